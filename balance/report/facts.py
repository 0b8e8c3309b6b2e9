"""The numbers of a report as tables of words, one column a stance: machine, gains, margins, trials."""

from __future__ import annotations

import math
from collections.abc import Callable

from balance.check.records import CheckResult
from balance.design.records import Design, Margins
from balance.plant.record import Plant
from balance.report.amounts import amount, figure, share, spelt
from balance.report.tables import Row, Table
from balance.simulate.records import TrialResult


def machine_table(plants: tuple[Plant, ...]) -> Table:
    """Return what the contact line sees of each stance, and what no controller can beat."""
    rows = [
        _across("mass", plants, lambda p: amount(p.stance.mass, "kg")),
        _across("height of the centre of mass", plants, lambda p: amount(p.stance.height, "m")),
        _across("its offset, outward", plants, lambda p: amount(p.stance.offset, "m")),
        _across("length of the contact line", plants, lambda p: amount(p.stance.length, "m")),
        _across("inertia J, rotors locked", plants, lambda p: amount(p.inertia_locked, "kg*m^2")),
        _across("inertia J_rest, rotors free", plants, lambda p: amount(p.inertia_free, "kg*m^2")),
        _across("toppling stiffness G", plants, lambda p: amount(p.stiffness, "N*m/rad")),
        _across("pole p", plants, lambda p: f"{figure(p.pole)} rad/s"),
        _across("a lean doubles every", plants, lambda p: amount(p.doubling_time, "s")),
        _across("balanced lean", plants, lambda p: amount(p.balanced_lean, "rad")),
        _across("lifted foot lands at", plants, _landing),
        _across("torque limit about the line", plants, lambda p: amount(p.torque_limit, "N*m")),
        _across("momentum capacity about the line", plants, lambda p: amount(p.momentum_capacity, "N*m*s")),
        _across("best possible lean from rest", plants, lambda p: amount(p.bounds.lean, "rad")),
        _across("best possible push at the centre of mass", plants, lambda p: amount(p.bounds.impulse, "N*s")),
        _across("which is limited by", plants, lambda p: p.bounds.limited_by),
    ]
    for i, unit in enumerate(plants[0].units):
        what = "cosine between axis and line" if unit.kind == "reaction wheel" else "share of momentum toward the line"
        rows.append(Row(f"{unit.name}: {what}", tuple(figure(abs(p.units[i].axis_share)) for p in plants)))
    head = ("Quantity", *(p.stance.name for p in plants))
    note = ("Lean is measured from the balanced lean, positive outward: away from the lifted feet. \"Best possible\" is the "
            "closed form for the all-out manoeuvre of a linear machine; no controller can do more.")
    return Table("The machine on its two feet", head, tuple(rows), note)


def _across(label: str, plants: tuple[Plant, ...], words: Callable[[Plant], str]) -> Row:
    return Row(label, tuple(words(p) for p in plants))


def _landing(plant: Plant) -> str:
    angle = plant.stance.touch_down_lean
    return "never: a fall both ways" if angle is None else f"{amount(angle + plant.balanced_lean, 'rad')} inward"


def margin_table(designs: tuple[Design, ...]) -> Table:
    """Return the margins at the physical torque, every stance a column."""
    def row(label: str, words: Callable[[Margins], str]) -> Row:
        return Row(label, tuple(words(d.margins) if d.margins.stable else "–" for d in designs))

    rows = (
        Row("closed loop", tuple("stable" if d.margins.stable else "NOT stable" for d in designs)),
        row("gain may fall to, times", lambda m: figure(m.gain_lower)),
        row("gain may rise to, times", lambda m: figure(m.gain_upper)),
        row("phase margin", lambda m: amount(m.phase, "rad")),
        row("at", lambda m: f"{figure(m.phase_crossover)} rad/s, {figure(m.phase_crossover / math.tau)} Hz"),
        row("delay margin", lambda m: amount(m.delay, "s")),
        row("modulus margin", lambda m: figure(m.modulus)),
        row("balanced disk margin α", lambda m: figure(m.disk)),
        row("peak sensitivity Ms", lambda m: figure(m.peak_sensitivity)),
        row("peak complementary sensitivity Mt", lambda m: figure(m.peak_complementary)),
        Row("least Mt possible, e^(p·latency)", tuple(figure(d.limits.least_peak_complementary) for d in designs)),
        Row("p × total delay", tuple(figure(d.limits.pole_times_delay) for d in designs)),
    )
    note = ("Measured on the sampled loop with its delay, broken at the physical torque. The delay margin is the "
            "added delay that puts an eigenvalue on the unit circle. Linear: no limit of torque, speed or angle is in "
            "these numbers.")
    return Table("Stability margins", ("Margin", *(d.plant.stance.name for d in designs)), rows, note)


def gain_table(design: Design) -> Table:
    """Return one stance's gains in SI with their order and sign."""
    law = design.law
    said = (f"sampled every {amount(law.sample_time, 's')}, {amount(law.latency, 's')} from sample to command, "
            f"command in {spelt(law.unit)}")
    if law.kind == "pid":
        rows = tuple(Row(name.replace("_", " "), (figure(value, 6),)) for name, value in law.gains.items())
        note = ("T = kp e + ki ∫e dt + kd·(filtered lean rate), e = lean + momentum gain × stored momentum: torque taken "
                "from the body about the line, SI, parallel form, per second.")
        return Table(f"PID on {design.plant.stance.name}: {said}", ("Gain", "Value"), rows, note)
    dust = 1e-12 * max((abs(k) for k in law.K), default=0.0)
    rows = tuple(Row(name, (figure(k, 6) if abs(k) > dust else "0",)) for name, k in zip(law.states, law.K, strict=True))
    note = "u = −K x in SI, states in this order; the rows named lag and ago are kept by the controller itself."
    return Table(f"LQR on {design.plant.stance.name}: {said}", ("State", "K"), rows, note)


def trial_table(trials: tuple[TrialResult, ...]) -> Table:
    """Return what happened in the trials of one stance."""
    rows = tuple(
        Row(f"{t.name}, {t.toward}", (
            t.verdict, amount(t.peak_lean, "rad"), _settled(t),
            amount(t.peak_torque, "N*m"), amount(t.torque_saturated, "s"), share(t.momentum_used),
            amount(t.rms_torque, "N*m"), amount(t.peak_bus_power, "W"), figure(t.friction_needed, 2),
            t.reason or "–"), "met" if t.verdict == "recovered" else "unmet")
        for t in trials)
    head = ("Trial", "Outcome", "Peak lean", "Settled after", "Peak torque", "At a limit", "Momentum used", "RMS torque",
            "Peak power", "Friction needed", "Limits met")
    return Table("What happened", head, rows, "Times count from the last event of the trial.", wordy=True)


def _settled(trial: TrialResult) -> str:
    return amount(trial.settling_time, "s") if math.isfinite(trial.settling_time) else "never"


def open_points(result: CheckResult) -> tuple[str, ...]:
    """Return what the report takes for granted, in sentences."""
    said = [
        "The trunk and legs are rigid, the two feet are points that neither slip nor lift; needed friction is reported "
        "for the whole machine across the line.",
        "The supply holds its open-circuit voltage: sag and regeneration are not simulated.",
        "Gears have no backlash, bearings no stiction.",
    ]
    if result.goal.estimator.__class__.__name__ == "NoEstimator":
        said.insert(0, "Lean and lean rate are measured as they are: no sensor noise, bias or estimator is in the loop.")
    return tuple(said)
