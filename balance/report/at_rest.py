"""What stands behind the dynamics, as tables of words: legs at rest, all feet down, and what flywheels ask of the rest."""

from __future__ import annotations

import math
from collections.abc import Sequence

from balance.plant.gyros import holds_lean_rate, needs_link, turn_times, turning
from balance.plant.record import Plant, Unit
from balance.report.amounts import amount, fixed, share
from balance.report.tables import Row, Table
from balance.stance.statics import Statics


def at_rest_table(statics: Sequence[Statics]) -> Table | None:
    """How far each stance is from balance, and how far inside of each edge its pose is with all feet down."""
    if not any(one.stance.joints for one in statics):
        return None
    rows = [Row("the trunk must shift, outward", tuple(_shift(one) for one in statics))]
    edges = {frozenset((e.foot_from, e.foot_to)): f"{e.foot_from} to {e.foot_to}"
             for one in statics if one.support for e in one.support.edges}
    rows += [Row(f"inside the edge {words}", tuple(_margin(one, key) for one in statics))
             for key, words in edges.items()]
    return Table("At rest, all feet down", ("Quantity", *(one.stance.name for one in statics)), tuple(rows),
                 "Shift: how far the trunk moves across the line, feet where they are, until the machine stands in balance. "
                 "Inside: in the pose of the stance, lifted feet lowered straight down; below 0 it tips over that edge.")


def _shift(one: Statics) -> str:
    words = fixed(one.shift.distance, "m", 2)
    return words if one.shift.reached else f"{words}, out of reach"


def _margin(one: Statics, edge: frozenset[str]) -> str:
    if one.support is None:
        return "a foot cannot reach"
    for found in one.support.edges:
        if frozenset((found.foot_from, found.foot_to)) == edge:
            return fixed(found.margin, "m", 1)
    return "–"


def joint_table(statics: Sequence[Statics]) -> Table | None:
    """The joint angles of every leg in every stance."""
    legs = dict.fromkeys(leg for one in statics for leg in one.stance.joints)
    if not legs:
        return None
    rows = tuple(Row(leg, tuple(_angles(one.stance.joints.get(leg, ())) for one in statics)) for leg in legs)
    return Table("Joint angles: swing, hip, knee", ("Leg", *(one.stance.name for one in statics)), rows,
                 "Swing sideways, hip from straight down (outward positive), knee from straight.")


def _angles(joints: Sequence[float]) -> str:
    return ", ".join(f"{math.degrees(x):.1f}°".replace("-", "−") for x in joints) or "–"


def gyro_table(plants: Sequence[Plant]) -> Table | None:
    """What each gimballed flywheel asks of its motor, its drive and the feet, and each turned wheel; None without any."""
    rows = []
    for i, unit in enumerate(plants[0].units):
        wheel = unit.kind == "reaction wheel"
        if wheel and unit.turn_rate <= 0.0:
            continue
        for plant in plants:
            table = turning(plant, i)
            feet = "no turntable" if table is None else f"{amount(table.stops, 'N*m')}, {share(table.share)}"
            rows.append(Row(unit.name, (
                plant.stance.name, amount(unit.energy, "J"),
                "–" if wheel else _spin_up(unit),
                "–" if wheel else amount(holds_lean_rate(plant.unit_parameters[i]), "rad/s"), feet)))
    if not rows:
        return None
    head = ("Unit", "Stance", "Energy, spinning", "Spins up in", "Drive holds a lean rate of", "Turning loads the feet")
    return Table("Flywheels in gimbals, and what turns", head, tuple(rows),
                 "A lean rate pushes the gimbals back with H σ' times it: beyond the one stated the drive gives way. "
                 "Turning the table at its rate limit, gimbals at their stops and wheels at top speed, makes the couple and "
                 "takes that share off the lighter foot; the table's own acceleration is not stated and not in it.")


def _spin_up(unit: Unit) -> str:
    if math.isnan(unit.spin_up):
        return "no spin motor stated"
    return amount(unit.spin_up, "s") if math.isfinite(unit.spin_up) else "never: too little voltage"


def turn_table(plants: Sequence[Plant]) -> Table | None:
    """How long each turntable takes from one line to another; None where nothing turns."""
    rows = [Row(unit.name, (f"{a} to {b}", amount(time, "s")))
            for i, unit in enumerate(plants[0].units) for (a, b), time in turn_times(plants, i).items()]
    if not rows:
        return None
    return Table("Turntables", ("Unit", "From line to line", "Takes at least"), tuple(rows),
                 "At the table's rate limit, by the shorter way; a step cannot be quicker than that.")


def link_cautions(plants: Sequence[Plant]) -> tuple[str, ...]:
    """Say which pairs would not stay mirrored without a link that nobody stated."""
    return tuple(
        f"{unit.name} on {plant.stance.name}: its axes are not square to the line, so two free gimbals do not stay mirrored "
        "there; gear them to each other and say `linked: true`, or this answer is not the machine's"
        for plant in plants for i, unit in enumerate(plant.units) if needs_link(plant, i))
