"""The machine and the trials as tables of words: what each contact line sees, and what happened on it."""

from __future__ import annotations

import math
from collections.abc import Callable

from balance.plant.record import Plant, Unit
from balance.report.amounts import MINUS, amount, figure, fixed, share, speed
from balance.report.tables import Row, Table
from balance.simulate.records import TrialResult
from balance.simulate.story import SETTLED_LEAST
from balance.stance.measured import Disagreement

SEEN = 0.1 * SETTLED_LEAST
"""rad: a standing swing from here on is worth telling: a tenth of the band that counts as settled."""

NOTE = ("Lean is measured from the balanced lean, positive outward: away from the lifted feet. “Best possible” is the "
        "closed form for the all-out manoeuvre of the linear machine, without delay and noise; no controller does better.")


def machine_table(plants: tuple[Plant, ...]) -> Table:
    """What the contact line sees of each stance, and what no controller can beat."""
    def row(label: str, words: Callable[[Plant], str]) -> Row:
        return Row(label, tuple(words(p) for p in plants))

    def possible(label: str, words: Callable[[Plant], str]) -> Row:
        return Row(label, tuple(words(p) if p.acts else "nothing acts" for p in plants))

    rows = (
        row("contact line", lambda p: f"{p.stance.foot_from} to {p.stance.foot_to}, {amount(p.stance.length, 'm')}"),
        row("mass", lambda p: amount(p.stance.mass, "kg")),
        row("height of the centre of mass", lambda p: amount(p.stance.height, "m")),
        row("its offset, outward", lambda p: fixed(p.stance.offset, "m", 2)),
        row("balanced lean", lambda p: fixed(p.balanced_lean, "rad", 3)),
        row("inertia J, rotors locked", lambda p: amount(p.inertia_locked, "kg*m^2", 4)),
        row("inertia J_rest, rotors free", lambda p: amount(p.inertia_free, "kg*m^2", 4)),
        row("toppling stiffness G", lambda p: amount(p.stiffness, "N*m/rad", 4)),
        row("pole p = √(G/J_rest)", lambda p: f"{figure(p.pole)} rad/s"),
        *_legs(plants),
        row("a lean doubles every", lambda p: amount(p.doubling_time, "s")),
        row("lifted foot lands at", landing),
        *((row("and outward at", landing_outward),) if any(p.stance.outward_touch_down is not None for p in plants) else ()),
        row("torque limit about the line", lambda p: amount(p.torque_limit, "N*m")),
        row("momentum capacity about the line", lambda p: amount(p.momentum_capacity, "N*m*s")),
        possible("best possible lean from rest", lambda p: amount(p.bounds.lean, "rad")),
        possible("best possible lean rate", lambda p: amount(p.bounds.lean_rate, "rad/s")),
        possible("best possible push at the centre of mass", lambda p: amount(p.bounds.impulse, "N*s")),
        possible("which is limited by", lambda p: p.bounds.limited_by),
    )
    return Table("The machine on its two feet", ("Quantity", *(p.stance.name for p in plants)), rows, NOTE)


def leg_words(plant: Plant) -> dict[str, str]:
    """Say what the give of the legs does on one stance; dashes where they are stiff."""
    legs = plant.legs
    if legs is None:
        return dict.fromkeys(("hinge", "stiffness", "critical", "mode", "unstable"), "–")
    swings = f"{figure(legs.mode / (2.0 * math.pi))} Hz, damping ratio {figure(legs.damping, 2)}"
    return {"hinge": f"{amount(legs.hinge, 'm')} up", "stiffness": amount(legs.stiffness, "N*m/rad"),
            "critical": amount(legs.critical, "N*m/rad"), "mode": swings if math.isfinite(legs.mode) else "nothing swings",
            "unstable": f"{' and '.join(figure(float(p)) for p in legs.unstable)} rad/s" if len(legs.unstable) else "none"}


def _legs(plants: tuple[Plant, ...]) -> tuple[Row, ...]:
    """Rows about legs that give; none where they are stiff."""
    if plants[0].legs is None:
        return ()
    return tuple(Row(label, tuple(leg_words(p)[word] for p in plants)) for label, word in (
        ("the legs give at a hinge", "hinge"), ("their stiffness", "stiffness"), ("below which they buckle", "critical"),
        ("trunk and legs swing at", "mode"), ("unstable poles with that", "unstable")))


def landing(plant: Plant) -> str:
    """Say at which lean the lifted foot meets the ground."""
    angle = plant.stance.touch_down_lean
    return "never: a fall both ways" if angle is None else f"{amount(angle + plant.balanced_lean, 'rad')} inward"


def landing_outward(plant: Plant) -> str:
    """Say at which lean a foot lifted on the outward side meets the ground."""
    angle = plant.stance.outward_touch_down
    return "never" if angle is None else f"{amount(angle - plant.balanced_lean, 'rad')} outward"


def bench_table(measured: tuple[Disagreement, ...]) -> Table:
    """The bench beside CAD: every measured number, and what it alone does to the pole."""
    rows = tuple(Row(one.quantity, (amount(one.cad, one.unit, 4), amount(one.measured, one.unit, 4),
                                    amount(one.uncertainty, one.unit, 2), "beyond it" if one.beyond else "within",
                                    f"{100.0 * one.pole_change:+.2f} %".replace("-", MINUS)))
                 for one in measured)
    return Table("Measured on the bench", ("Quantity", "From parts", "Measured", "± (1 σ)", "Differs", "Pole"), rows,
                 "The tables above are those of the measured machine: what differs is carried by the trunk into every "
                 "stance. A difference of more than twice the uncertainty is one that chance does not explain.")


def unit_table(plants: tuple[Plant, ...]) -> Table:
    """Each stabiliser as each line sees it."""
    many = len(plants) > 1
    rows = tuple(Row(unit.name, ((plant.stance.name,) if many else ()) + unit_cells(unit))
                 for i, _ in enumerate(plants[0].units) for plant in plants for unit in (plant.units[i],))
    head = ("Stabiliser", *(("Stance",) if many else ()), "Kind", "Share toward the line", "Torque about it",
            "Momentum about it", "Spin inertia", "Limit")
    return Table("The stabilisers as each line sees them", head, rows,
                 "The share is the cosine between a wheel's axis and the line; for a flywheel in a gimbal, how much of its "
                 "momentum the gimbal can turn toward the line. A share of 0 is square to the line: no torque about it.")


def unit_cells(unit: Unit) -> tuple[str, ...]:
    """One unit's numbers."""
    wheel = unit.kind == "reaction wheel"
    limit = speed(unit.speed_limit) if wheel else f"±{amount(unit.speed_limit, 'rad')}"
    part = abs(unit.axis_share) if abs(unit.axis_share) > 1e-9 else 0.0
    return (unit.kind, figure(part), amount(unit.torque_limit, "N*m"), amount(unit.momentum_capacity, "N*m*s"),
            amount(unit.inertia, "kg*m^2"), limit if math.isfinite(unit.speed_limit) else "none stated")


def trial_table(trials: tuple[TrialResult, ...]) -> Table:
    """What happened in the trials of one stance."""
    rows = tuple(Row(f"{t.name}, {t.toward}", trial_cells(t), "met" if t.verdict == "recovered" else "unmet")
                 for t in trials)
    head = ("Trial", "Outcome", "Peak lean", "Settled after", "Peak torque", "At that limit for", "Momentum used",
            "RMS torque", "Peak draw", "Friction needed", "Limits met")
    return Table("What happened", head, rows,
                 "Settling counts from the trial's last event. Friction is what the worse foot needs.", wordy=True)


def settled(t: TrialResult) -> str:
    """Say when the lean has settled, and what swing is left that a person could see or hear."""
    when = amount(t.settling_time, "s") if math.isfinite(t.settling_time) else "never"
    swings = math.isfinite(t.standing_swing) and t.standing_swing > SEEN
    return f"{when}, ±{amount(t.standing_swing, 'rad')} left" if swings else when


def trial_cells(t: TrialResult) -> tuple[str, ...]:
    """One trial's numbers."""
    draw = (amount(t.peak_bus_power, "W"), *((amount(t.peak_current, "A"),) if t.peak_current else ()))
    return (t.verdict, amount(t.peak_lean, "rad"), settled(t), amount(t.peak_torque, "N*m"),
            amount(t.torque_saturated, "s") if t.torque_saturated else "–", share(t.momentum_used),
            amount(t.rms_torque, "N*m"), ", ".join(draw),
            figure(t.friction_needed, 2) + (", feet lift" if t.lift_off else ""), t.reason or "–")
