"""One stance's design: the law, its poles and margins, the ideal beside it, and what cannot be beaten."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError, Problem
from balance.design.bode_integral import bode_integral
from balance.design.command import command_unit
from balance.design.complementary import complementary
from balance.design.ideal import ideal_lqr
from balance.design.kalman import kalman, sensor_sigma
from balance.design.law import Law
from balance.design.limits import loop_limits
from balance.design.loop import SampledPlant, actuator_break, close, sample_plant
from balance.design.lqr import lqr_law
from balance.design.margins import UNSTABLE, margins_of
from balance.design.pid import design_pid
from balance.design.records import Design, Ideal, Response
from balance.design.sampled_margins import at_actuator
from balance.goal.goal import Complementary, Goal, Kalman, LqrControl, NoEstimator, PidControl
from balance.plant.record import Plant

Array = NDArray[np.float64]

POINTS = 1200
"""Frequencies of the recorded response: enough for a smooth Nyquist curve."""

SQUARE = "cannot act about this line: every stabiliser is square to it"


def design_stance(plant: Plant, goal: Goal) -> Design:
    """Return the design; a machine that cannot be balanced is answered in `refused`, never by an exception.

    Raises InputError for explicit weights that do not go with the model's states.
    """
    T = 1.0 / goal.loop.rate
    sampled = sample_plant(plant, T, goal.loop.latency)
    if not plant.acts:
        return refusal(plant, sampled, SQUARE)
    found = law_for(plant, goal)
    return refusal(plant, sampled, found) if isinstance(found, str) else measured(plant, sampled, found, goal)


def measured(plant: Plant, sampled: SampledPlant, law: Law, goal: Goal) -> Design:
    """Return what a law does on a plant: poles, margins, the ideal beside it, what cannot be beaten."""
    T = sampled.sample_time
    poles = np.linalg.eigvals(close(sampled, law)).astype(np.complex128)
    ideal = _ideal(plant.for_law, goal.control) if isinstance(goal.control, LqrControl) else None
    margins = margins_of(at_actuator(sampled, law))
    integral = bode_integral(actuator_break(sampled, law)) if margins.stable else None
    return Design(plant, law, poles, equivalent(poles, T), margins, loop_limits(plant, T, goal.loop.latency), ideal,
                  response(sampled, law), integral, "")


def _ideal(plant: Plant, control: LqrControl) -> Ideal | None:
    """Return the continuous design, or None where there is none (a mode at the edge that no input moves)."""
    try:
        return ideal_lqr(plant, control)
    except np.linalg.LinAlgError:
        return None


def law_for(plant: Plant, goal: Goal) -> Law | str:
    """Return the law with its estimator, made for the plant as firmware sees it (`Plant.for_law`), or why there is none."""
    T = 1.0 / goal.loop.rate
    true, plant = plant, plant.for_law
    sampled = sample_plant(plant, T, goal.loop.latency)
    check_noise(plant, goal)
    if isinstance(goal.control, PidControl):                 # its search sees the loop as it is, legs that give included
        found = design_pid(plant, sampled if true is plant else sample_plant(true, T, goal.loop.latency), goal)
    else:
        found = _lqr(plant, sampled, goal, goal.control)
    if isinstance(found, str) or isinstance(goal.estimator, NoEstimator):
        return found
    if isinstance(goal.estimator, Complementary):
        return complementary(found, goal.estimator.crossover)
    try:
        return kalman(found, plant, sampled, goal.estimator)
    except np.linalg.LinAlgError:
        return "no Kalman filter with these noises: its Riccati equation has no stabilising solution"


def _lqr(plant: Plant, sampled: SampledPlant, goal: Goal, control: LqrControl) -> Law | str:
    """Return the law or why there is none."""
    check_weights(plant, goal, control)
    limits = loop_limits(plant, sampled.sample_time, sampled.latency)
    try:
        return lqr_law(plant, sampled, control)
    except np.linalg.LinAlgError:
        return (f"no gains stabilise this loop in double precision: the unstable pole times the delay is "
                f"{limits.pole_times_delay:.2f}, so |T| would be at least {limits.least_peak_complementary:.3g}: "
                f"{100.0 / limits.least_peak_complementary:.2g} % more or less torque would lose it")


def check_weights(plant: Plant, goal: Goal, control: LqrControl) -> None:
    """Raise InputError where explicit weights do not go with the model's states."""
    states = plant.model.states
    if control.weights is None or len(control.weights.states) == len(states):
        return
    key = "control.weights.states"
    line, column = goal.marks.get(key, (0, 0))
    raise InputError([Problem(goal.source, line, column, key, f"{len(control.weights.states)} weights",
                              f"{len(states)}, one for each of {', '.join(states)}",
                              "lag and past commands weigh nothing and are left out")])


def check_noise(plant: Plant, goal: Goal) -> None:
    """Raise InputError where a Kalman filter is asked to weigh sensors that have no noise."""
    if not isinstance(goal.estimator, Kalman) or np.all(sensor_sigma(plant) > 0.0):
        return
    line, column = goal.marks.get("estimator", (0, 0))
    raise InputError([Problem(goal.source, line, column, "estimator.kind", "`kalman` for sensors without noise",
                              "a machine with `imu: {gyro_noise: …, accel_noise: …}`",
                              "the filter weighs gyro and accelerometer by their noise")])


def equivalent(poles: NDArray[np.complex128], sample_time: float) -> NDArray[np.complex128]:
    """Return ln(z)/T in rad/s; poles at z = 0 (pure delay) become −inf."""
    with np.errstate(divide="ignore"):
        rates = np.log(np.abs(poles)) / sample_time
    return (rates + 1j * np.angle(poles) / sample_time).astype(np.complex128)


def response(sampled: SampledPlant, law: Law) -> Response:
    """Return the frequency response at the physical torque for drawing, up to Nyquist."""
    view = at_actuator(sampled, law)
    w = np.geomspace(max(view.lowest, 1e-4 * view.highest), view.highest, POINTS)
    return Response(w, actuator_break(sampled, law).response(w))


def refusal(plant: Plant, sampled: SampledPlant, why: str) -> Design:
    """Return a design without a law: the open loop's poles, no margins, and the reason."""
    states, none = plant.for_law.model.states, np.zeros(0)
    n = len(states)
    law = Law("none", sampled.sample_time, sampled.latency, states, (), np.zeros((0, 0)),
              np.zeros((0, n)), none, none, np.zeros(n), 0.0, np.zeros(len(plant.units)), np.zeros((len(plant.units), n)),
              np.array([unit.input_limit for unit in plant.units]), command_unit(plant), none, (), {})
    poles = np.linalg.eigvals(sampled.A).astype(np.complex128)
    return Design(plant, law, poles, equivalent(poles, sampled.sample_time), UNSTABLE,
                  loop_limits(plant, sampled.sample_time, sampled.latency), None,
                  Response(none, none.astype(np.complex128)), None, why)
