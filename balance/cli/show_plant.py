"""What `balance plant` prints: every stance as its contact line sees it."""

from __future__ import annotations

from collections.abc import Callable

from balance.base.tables import text_table
from balance.cli.colour import NOT_MET
from balance.cli.words import folded, side_by_side
from balance.plant.record import Plant, Unit
from balance.report.amounts import amount, share
from balance.report.at_rest import at_rest_table, gyro_table, joint_table, link_cautions, turn_table
from balance.report.facts import leg_words
from balance.report.tables import Table
from balance.stance.measured import Disagreement
from balance.stance.statics import Statics

CANNOT = "cannot act about this line"


def show_plant(plants: tuple[Plant, ...], measured: tuple[Disagreement, ...] = (),
               statics: tuple[Statics, ...] = ()) -> str:
    """Return the text of the answer: the stances side by side, each stabiliser about each line, the bench beside CAD.

    `statics` go with `plants` one by one; without them nothing is said of legs and of all feet down.
    """
    head = f"{plants[0].machine}: standing on two feet, free to topple about the line through them"
    notes = [
        folded(f"{NOT_MET}: {p.stance.name}: the stabilisers {CANNOT} (every one is square to it)")
        for p in plants
        if not p.acts
    ]
    notes += [folded(f"caution: {words}") for words in link_cautions(plants)]
    parts = [_stances(plants), *_at_rest(statics), _units(plants), *_gyros(plants), *_bench(measured)]
    return "\n\n".join([folded(head), *parts, *notes, SIGNS])


def _at_rest(statics: tuple[Statics, ...]) -> list[str]:
    """Joint angles and margins; nothing for a machine given by three numbers."""
    told = [table for table in (at_rest_table(statics), joint_table(statics)) if table is not None]
    return [_plain(table) for table in told]


def _gyros(plants: tuple[Plant, ...]) -> list[str]:
    """What flywheels in gimbals ask of drive, motor, turntable and feet; nothing for wheels."""
    return [_plain(table) for table in (gyro_table(plants), turn_table(plants)) if table is not None]


def _plain(table: Table) -> str:
    """A report's table as text, its note under it."""
    body = text_table(list(table.head), [[row.label, *row.cells] for row in table.rows], "l" + "r" * (len(table.head) - 1))
    return f"{table.caption}\n{body}" + (f"\n\n{folded(table.note)}" if table.note else "")


def _bench(measured: tuple[Disagreement, ...]) -> list[str]:
    """Every measured number beside CAD's; the plants above are those of the measured machine."""
    if not measured:
        return []
    rows = [
        [
            one.quantity,
            amount(one.cad, one.unit, 4),
            amount(one.measured, one.unit, 4),
            amount(one.uncertainty, one.unit, 2),
            "beyond it" if one.beyond else "within",
            f"{100.0 * one.pole_change:+.2f} %".replace("-", "−"),
        ]
        for one in measured
    ]
    head = ["measured", "from parts", "on the bench", "± (1 σ)", "differs", "pole"]
    return [
        "\n".join([text_table(head, rows, "lrrrlr"), "", folded(
            "The stances above stand with the bench's numbers. Differs: by more than twice the uncertainty, or not. "
            "Pole: what this number alone does to it.")])
    ]


SIGNS = """\
Offsets and leans are positive outward, away from the lifted feet. The pole is
how fast a fall grows: the lean multiplies by e every 1/pole. The largest lean
and push are what no controller can beat with these stabilisers, by the closed
forms; the simulator has the last word."""


def _stances(plants: tuple[Plant, ...]) -> str:
    return side_by_side(
        "stance",
        plants,
        lambda p: p.stance.name,
        [
            ("contact line from", lambda p: p.stance.foot_from),
            ("contact line to", lambda p: p.stance.foot_to),
            ("its length", lambda p: amount(p.stance.length, "m") if p.stance.length else ""),
            ("its slope", lambda p: amount(p.stance.slope, "rad") if p.stance.slope else ""),
            ("mass", lambda p: amount(p.stance.mass, "kg", 4)),
            ("centre of mass above the line", lambda p: amount(p.stance.height, "m", 4)),
            ("centre of mass outward", lambda p: amount(p.stance.offset, "m")),
            ("balanced lean", lambda p: amount(p.balanced_lean, "rad")),
            ("inertia, rotors locked", lambda p: amount(p.inertia_locked, "kg*m^2", 4)),
            ("inertia, rotors free", lambda p: amount(p.inertia_free, "kg*m^2", 4)),
            ("toppling stiffness", lambda p: amount(p.stiffness, "N*m/rad", 4)),
            ("pole", lambda p: amount(p.pole, "1/s", 4)),
            *_legs(plants),
            ("time for a fall to double", lambda p: amount(p.doubling_time, "s")),
            ("inward turn to the lifted foot", _touch_down),
            *_outward(plants),
            ("torque limit about the line", lambda p: amount(p.torque_limit, "N*m")),
            ("momentum capacity", lambda p: amount(p.momentum_capacity, "N*m*s")),
            ("largest lean from standstill", lambda p: amount(p.bounds.lean, "rad") if p.acts else "none"),
            ("largest push at mass height", lambda p: amount(p.bounds.impulse, "N*s") if p.acts else "none"),
            ("set by", lambda p: p.bounds.limited_by if p.acts else ""),
        ],
    )


def _legs(plants: tuple[Plant, ...]) -> list[tuple[str, Callable[[Plant], str]]]:
    """Rows about legs that give; none where they are stiff."""
    if plants[0].legs is None:
        return []
    labels = (("legs give at a hinge", "hinge"), ("leg stiffness", "stiffness"), ("below it they buckle", "critical"),
              ("trunk and legs swing at", "mode"), ("unstable poles with that", "unstable"))

    def words(word: str) -> Callable[[Plant], str]:
        return lambda p: leg_words(p)[word]

    return [(label, words(word)) for label, word in labels]


def _touch_down(plant: Plant) -> str:
    lean = plant.stance.touch_down_lean
    return "nothing lifted" if lean is None else amount(lean, "rad")


def _outward(plants: tuple[Plant, ...]) -> list[tuple[str, Callable[[Plant], str]]]:
    """The row about feet lifted on the outward side; none where there are none."""
    there = any(p.stance.outward_touch_down is not None for p in plants)
    return [("outward turn to a lifted foot", _lands_outward)] if there else []


def _lands_outward(plant: Plant) -> str:
    turn = plant.stance.outward_touch_down
    return "nothing lifted there" if turn is None else amount(turn, "rad")


def _units(plants: tuple[Plant, ...]) -> str:
    rows = [
        [
            plant.stance.name,
            unit.name,
            f"{unit.axis_share:+.4f}".replace("-", "−"),
            _lost(unit),
            amount(unit.torque_limit, "N*m"),
            amount(unit.momentum_capacity, "N*m*s"),
        ]
        for plant in plants
        for unit in plant.units
    ]
    head = ["stance", "stabiliser", "α", "cosine loss", "torque", "momentum"]
    table = text_table(head, rows, "llrrrr")
    return f"{table}\n\n{ALPHA}"


ALPHA = """\
α is the share of a wheel's axis that lies along the contact line (for a
gimballed flywheel: of the torque its gimbal makes at angle zero). Torque and
momentum are what is left of the unit's own about the line; the cosine loss
goes into the feet."""


def _lost(unit: Unit) -> str:
    """Say how much of the unit's own torque does not act about the line."""
    if unit.torque_limit <= 0.0:
        return "all: square"
    return share(1.0 - abs(unit.axis_share)) if abs(unit.axis_share) < 1.0 - 1e-12 else "none"
