"""Run the trials of a design file on one stance and say what happened."""

from __future__ import annotations

import math
from zlib import crc32

import numpy as np

from balance.base.errors import InputError, Problem
from balance.design.complementary import ESTIMATE
from balance.design.kalman import PREDICTED
from balance.design.records import Design
from balance.goal.goal import Goal
from balance.goal.trials import Trial
from balance.kernel import outcome
from balance.kernel.bundles import MEMORY, Output, fresh_work
from balance.kernel.integrate import longest_step
from balance.kernel.layout import BALANCED, FELL
from balance.kernel.run import run_trial
from balance.kernel.standing import standing_lean
from balance.machine.machine import Machine
from balance.plant.legs import balance_on
from balance.plant.record import Plant
from balance.simulate.events import Happening, directions, happening
from balance.simulate.ground import feet_story, foot_loads, lifted, most_friction
from balance.simulate.records import Trace, TrialResult
from balance.simulate.setup import empty_output, kernel_units, law_arrays, start_state
from balance.simulate.stepped import Controller, run_stepped
from balance.simulate.story import limit_story, settling_time, standing_swing, time_to_full

FELL_WORDS = {
    outcome.FELL_OUTWARD: "fell outward", outcome.FELL_INWARD: "fell inward", outcome.TOUCHED_DOWN: "touched down",
}


def run_trials(design: Design, goal: Goal, machine: Machine, record: bool,
               controller: Controller | None = None) -> tuple[TrialResult, ...]:
    """Run every trial of `goal` in every direction it asks for; none where the design was refused.

    `record`: keep the time histories, one row per sample. The controller is never told what disturbs it.
    """
    if design.refused:
        return ()
    refuse(goal, design.plant)
    return tuple(run_one(design, goal, name, trial, toward, record, controller)
                 for name, trial in goal.trials.items() for toward in directions(trial))


def refuse(goal: Goal, plant: Plant) -> None:
    """Raise InputError where a trial asks of the machine what it has not.

    More mass taken off than there is, a supply weakened that is not there, mass properties that vary on legs that give.
    """
    problems = []
    for name, trial in goal.trials.items():
        load = trial.payload
        if load is None or load.mass >= 0.0:
            continue
        most = min(plant.stance.mass, plant.inertia_free / (load.height**2 + load.across**2))
        if -load.mass >= most:
            key = f"trials.{name}.payload.mass"
            line, column = goal.marks.get(key, (0, 0))
            problems.append(Problem(goal.source, line, column, key, f"{load.mass:g} kg",
                                    f"less than {most:.3g} kg taken off at this height on {plant.stance.name}"))
    if plant.supply_parameters is None:
        problems += _needs_supply(goal)
    if plant.legs is not None:
        problems += [Problem(goal.source, *goal.marks.get(f"trials.{name}.varies", (0, 0)), f"trials.{name}.varies",
                             "`varies` on legs that give", "a machine without `leg_compliance`",
                             "mass properties that vary over time are modelled on stiff legs only")
                     for name, trial in goal.trials.items() if trial.varies is not None]
    if problems:
        raise InputError(problems)


def _needs_supply(goal: Goal) -> list[Problem]:
    """Return what cannot be asked of a machine without a supply that wheels draw on."""
    asked = [f"trials.{name}.supply" for name, trial in goal.trials.items() if trial.supply is not None]
    asked += ["require.bus_voltage"] if goal.require.bus_voltage is not None else []
    return [Problem(goal.source, *goal.marks.get(key, (0, 0)), key, "a bus voltage asked of this machine",
                    "a machine with reaction wheels and a `supply`", "add `supply:` to the machine file") for key in asked]


def run_one(design: Design, goal: Goal, name: str, trial: Trial, toward: str, record: bool,
            controller: Controller | None = None, finer: float = 1.0) -> TrialResult:
    """Run one trial in one direction. Sensor noise is drawn from the trial's name and direction: every run is alike.

    `controller` stands in the law's place; without one the kernel runs the law itself. `finer`: by how much the
    sub-steps of the integrator are shortened.
    """
    plant, units = design.plant, kernel_units(design.plant)
    event = happening(trial, toward, plant.body_parameters, goal.loop, longest_step(units) / finer,
                      plant.sensor_parameters, crc32(f"{name} {toward}".encode()))
    samples = math.ceil(trial.lasts / design.law.sample_time - 1e-9)
    output = empty_output(len(units), samples, record)
    body = plant.body_parameters.copy()
    body[FELL] = goal.fell
    law = law_arrays(design.law, plant, goal.loop.command_bits)
    work = fresh_work(body, units, law, event.events)
    for place in (ESTIMATE, PREDICTED):                      # the estimator has run before the trial begins
        if place in design.law.memory:
            work.numbers[MEMORY, design.law.memory.index(place)] = event.lean
    X = start_state(plant, event, units)
    if controller is None:
        ended = run_trial(X, units, law, event.events, work, output)
    else:
        controller.begin(plant.stance.name, event.lean)
        ended = run_stepped(controller, X, units, law, event.events, work, output)
    return _result(design, name, event, ended, output)


def _result(design: Design, name: str, event: Happening, ended: int, output: Output) -> TrialResult:
    """Return what the kernel measured, in words and numbers."""
    plant, metrics = design.plant, output.metrics
    taken = int(metrics[outcome.SAMPLES])
    time = np.minimum(np.arange(taken) * design.law.sample_time, metrics[outcome.END_TIME])
    lean, momentum = output.history[:taken, 0], output.history[:taken, 1]
    settled = math.inf
    if ended == outcome.RAN:
        settled = settling_time(time, lean, end_lean(plant, event), event.quiet_from)
    full_in = time_to_full(time, momentum, plant.momentum_capacity)
    verdict = FELL_WORDS.get(ended, "recovered")
    running_away = full_in < event.events.lasts
    if ended == outcome.RAN and (math.isinf(settled) or running_away):
        verdict = "did not settle"
    command = "gimbal rate" if design.law.unit == "rad/s" else "torque"
    reason = limit_story(output.first, [u.name for u in plant.units], plant.momentum_capacity, command)
    if not reason and verdict.startswith("fell"):
        reason = "no limit was met: the law itself did not hold it"
    if verdict == "did not settle" and running_away and not math.isinf(settled):
        reason = _and(reason, f"stored momentum still grows and would be full {full_in:.2g} s later")
    feet = foot_loads(plant.stance, metrics)
    if ended == outcome.RAN:
        reason = _and(reason, feet_story(feet))
    return TrialResult(
        name=name, stance=plant.stance.name, toward=event.toward, verdict=verdict, reason=reason,
        peak_lean=float(metrics[outcome.PEAK_LEAN]), peak_lean_rate=float(metrics[outcome.PEAK_RATE]), settling_time=settled,
        peak_torque=float(metrics[outcome.PEAK_TORQUE]), torque_saturated=float(metrics[outcome.SATURATED]),
        peak_momentum=float(metrics[outcome.PEAK_MOMENTUM]),
        momentum_used=_share(float(metrics[outcome.PEAK_MOMENTUM]), float(plant.momentum_capacity)),
        rms_torque=math.sqrt(metrics[outcome.TORQUE_SQUARED] / metrics[outcome.END_TIME]),
        peak_current=float(metrics[outcome.PEAK_CURRENT]), peak_bus_power=float(metrics[outcome.PEAK_POWER]),
        friction_needed=most_friction(metrics), lift_off=lifted(metrics), feet=feet,
        standing_swing=standing_swing(time, lean) if ended == outcome.RAN else math.inf,
        end_lean=float(metrics[outcome.END_LEAN]), end_momentum=float(metrics[outcome.END_MOMENTUM]),
        peak_bus_voltage=_of_bus(plant, metrics[outcome.PEAK_BUS]),
        deepest_sag=_of_bus(plant, metrics[outcome.DEEPEST_SAG]),
        peak_supply_current=_of_bus(plant, metrics[outcome.PEAK_SUPPLY]),
        trace=_trace(output, taken, len(plant.units)))


def _of_bus(plant: Plant, value: float) -> float:
    """Return a number of the bus; NaN where no supply is stated or no wheel draws on it."""
    return float(value) if plant.supply_parameters is not None else math.nan


def end_lean(plant: Plant, event: Happening) -> float:
    """Return the lean in rad at which gravity balances what stays on; NaN where nothing does."""
    if plant.legs_parameters is not None:
        lean, _ = balance_on(event.end_body, plant.legs_parameters, event.end_torque)    # only couples stay on
        return lean - float(event.end_body[BALANCED])
    return float(standing_lean(event.end_body, plant.unit_parameters, event.end_torque))


def _trace(output: Output, taken: int, units: int) -> Trace | None:
    """Return the recorded histories by name; None where nothing was recorded."""
    if output.trace.shape[0] == 0:
        return None
    rows = output.trace[:taken]
    columns = [rows[:, k].copy() for k in range(outcome.TRACE_SIZE)]
    return Trace(*columns, *[rows[:, outcome.TRACE_SIZE:outcome.TRACE_SIZE + 2 * units].copy()])


def _share(peak: float, capacity: float) -> float:
    """Return the share of the capacity used."""
    return peak / capacity if capacity > 0.0 else math.inf


def _and(reason: str, more: str) -> str:
    """Join two reasons, of which either may be empty."""
    return "; ".join(one for one in (reason, more) if one)
