"""From the designs of all stances to one program."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from balance import __version__
from balance.design.law import Law
from balance.design.records import Design
from balance.firmware.names import clashing, identifier, tame
from balance.firmware.program import (
    DIRECT,
    LINE,
    MEMORY,
    RATE,
    READING,
    TILT,
    Memory,
    Program,
    Reading,
    Row,
    Term,
    Window,
)
from balance.firmware.reach import memory_reach
from balance.kernel import layout as at
from balance.plant.record import Plant
from balance.plant.sharing import line_torque_per_input
from balance.simulate.setup import resting

Array = NDArray[np.float64]

LARGEST_LEAN = np.pi / 2.0
LARGEST_RATE = 40.0
"""rad/s: 2,300 degrees per second, beyond the range of the usual gyros (common practice: 2,000)."""
LARGEST_ACCELERATION = 160.0
"""m/s² on each axis: 16 g, the widest range of the usual accelerometers (common practice)."""
DUST = 1e-10
TILT_REACH = np.pi / 4.0
"""rad: the accelerometer's tilt is held within ± this."""
INERTIAL_RATE = LARGEST_RATE * 3.0**0.5


class NotAlikeError(ValueError):
    """The stances' laws cannot be one program, or one of them must not be firmware at all."""


def describe(designs: Sequence[Design], name: str) -> Program:
    """Return the program of a design file's stances.

    Raises NotAlikeError where a stance has no law, an unstable loop or another shape, or where names clash in C.
    """
    refused = why_not(designs)
    if refused:
        raise NotAlikeError(refused)
    laws = alike([design.law for design in designs])
    first, plant = laws[0], designs[0].plant
    readings = tuple(_reading(designs, j) for j in range(len(first.measurements)))
    bounds = np.array([reach(r) for r in readings])
    reaches = np.max([memory_reach(law, bounds) for law in laws], axis=0)
    memory = tuple(Memory(n, _memory_unit(n, first), float(m)) for n, m in zip(first.memory, reaches, strict=True))
    units = tuple(unit.name for unit in plant.units)
    bare = Program(
        prefix=identifier(name),
        design=tame(name),
        machine=tame(plant.machine),
        kind=first.kind,
        stances=tuple(d.plant.stance.name for d in designs),
        sample_time=first.sample_time,
        latency=first.latency,
        patience=_patience(designs),
        gravity=plant.stance.gravity,
        readings=readings,
        memory=memory,
        line=_line(laws),
        moves=tuple(_move(laws, i) for i in range(len(first.memory))),
        held_moves=_held_moves(laws),
        inputs=tuple(_input(laws, plant, i) for i in range(len(units))),
        units=units,
        line_share=tuple(tuple(float(x) for x in row) for row in _line_shares(designs).T),
        windows=tuple(_window(designs[0], i, readings) for i in range(len(units))),
        axes=tuple(_axes(design) for design in designs),
        tool=f"balance-assist {__version__}",
        seal="",
    )
    bare = without_dust(bare)
    return replace(bare, seal=hashlib.sha256(repr(bare).encode()).hexdigest())


def why_not(designs: Sequence[Design]) -> str:
    """Return why the designs must not be one program; empty where they can."""
    refused = [f"{d.plant.stance.name}: {d.refused}" for d in designs if d.refused]
    refused += [
        f"{d.plant.stance.name}: the loop as designed is not stable"
        for d in designs
        if not (d.refused or d.margins.stable)
    ]
    if refused or not designs:
        return "; ".join(refused) or "no stance"
    if any(d.law.measurements != designs[0].law.measurements for d in designs):
        return "the stances' laws have different measurements"
    return clashing([u.name for u in designs[0].plant.units]) or clashing([d.plant.stance.name for d in designs])


def alike(laws: Sequence[Law]) -> list[Law]:
    """Give every law the memory of all of them, in order of first appearance; what a law does not use stays zero."""
    names = tuple(dict.fromkeys(name for law in laws for name in law.memory))
    out = []
    for law in laws:
        at_ = [names.index(name) for name in law.memory]
        A, B = np.zeros((len(names), len(names))), np.zeros((len(names), len(law.measurements)))
        E, C = np.zeros(len(names)), np.zeros(len(names))
        A[np.ix_(at_, at_)], B[at_], E[at_], C[at_] = law.A, law.B, law.E, law.C
        held_A, held_B = law.held_A, law.held_B
        if held_A is not None and held_B is not None:
            wide_A, wide_B = np.zeros_like(A), np.zeros_like(B)
            wide_A[np.ix_(at_, at_)], wide_B[at_] = held_A, held_B
            held_A, held_B = wide_A, wide_B
        out.append(replace(law, memory=names, A=A, B=B, E=E, C=C, held_A=held_A, held_B=held_B))
    return out


def without_dust(program: Program) -> Program:
    """Leave out terms that never reach DUST of their row's largest: rounding of the design's own arithmetic."""

    def swept(row: Row) -> Row:
        if not row.terms:
            return row
        sizes = np.array([[abs(gain) * _source_reach(program, term) for gain in term.gains] for term in row.terms])
        kept = [t for t, size in zip(row.terms, sizes, strict=True) if np.any(size > DUST * sizes.max(axis=0))]
        return replace(row, terms=tuple(kept))

    return replace(
        program,
        line=swept(program.line),
        moves=tuple(swept(r) for r in program.moves),
        held_moves=tuple(swept(r) for r in program.held_moves),
        inputs=tuple(swept(r) for r in program.inputs),
    )


def _source_reach(program: Program, term: Term) -> float:
    if term.source == LINE:
        return max(program.line.limits)
    if term.source == MEMORY:
        most = program.memory[term.place].most
        return most if np.isfinite(most) else 1.0
    return reach(program.readings[term.place])


def reach(reading: Reading) -> float:
    """Return the largest magnitude of a reading after what it is counted from is taken off."""
    return reading.most + max(abs(x) for x in reading.rest)


def _reading(designs: Sequence[Design], j: int) -> Reading:
    """Return the j-th measurement: which C field it is, and where it stops being believed."""
    name = designs[0].law.measurements[j]
    balanced = tuple(float(d.plant.balanced_lean) for d in designs)
    none = tuple(float(resting(d.law, d.plant)[j]) for d in designs)
    if name == "tilt":
        return Reading(name, "", "rad", TILT, TILT_REACH, balanced)
    if name == "gyro":
        return Reading(name, "", "rad/s", RATE, INERTIAL_RATE, none)
    if name == "lean":
        return Reading(name, "lean_rad", "rad", DIRECT, LARGEST_LEAN, balanced)
    if name == "lean_rate":
        return Reading(name, "lean_rate_rad_s", "rad/s", DIRECT, LARGEST_RATE, none)
    unit = "rad" if name.endswith("angle") else "rad/s"
    return Reading(
        name,
        f"{identifier(name)}_{'rad' if unit == 'rad' else 'rad_s'}",
        unit,
        DIRECT,
        _believed(designs[0], name),
        none,
    )


def _believed(design: Design, name: str) -> float:
    """Return the largest wheel speed, gimbal angle or gimbal rate that is believed: twice what the drive can reach."""
    states = [s for s in design.plant.for_law.model.states if s not in ("lean", "lean_rate")]
    owners = [row for row in design.plant.unit_parameters for _ in range(1 if row[at.KIND] == at.WHEEL else 2)]
    row = owners[states.index(name)]
    if name.endswith("gimbal_angle"):
        return 2.0 * min(float(row[at.ANGLE_STOP]), np.pi)
    if name.endswith("gimbal_rate"):
        return 2.0 * float(row[at.RATE_LIMIT]) if np.isfinite(row[at.RATE_LIMIT]) else LARGEST_RATE
    no_load = abs(row[at.BUS_VOLTAGE] / row[at.BACK_EMF]) if row[at.BACK_EMF] else np.inf
    fastest = min(float(row[at.SPEED_LIMIT]), float(no_load))
    return 2.0 * fastest if np.isfinite(fastest) else 2000.0


def _memory_unit(name: str, law: Law) -> str:
    """Return the unit of a remembered number."""
    if name.startswith("torque"):
        return law.unit
    known = {
        "integral": "N*m",
        "filtered_rate": "rad/s",
        "lean_estimate": "rad",
        "lean_predicted": "rad",
        "lean_rate_predicted": "rad/s",
        "gyro_bias": "rad/s",
        "balance_offset": "rad",
        "momentum_integral": "N*m*s^2",
    }
    return "N*m" if ".levelling" in name else known.get(name, "SI")


def _line(laws: Sequence[Law]) -> Row:
    terms = [Term(MEMORY, i, _each(laws, lambda law, i=i: law.C[i])) for i in range(len(laws[0].C))]
    terms += [Term(READING, j, _each(laws, lambda law, j=j: law.D[j])) for j in range(len(laws[0].D))]
    says = "torque about the contact line" if len(laws[0].allotment) > 1 else "the unit's own command"
    return Row("line", says, laws[0].unit, _acting(terms), _each(laws, lambda law: law.output_limit))


def _move(laws: Sequence[Law], i: int) -> Row:
    terms = [Term(MEMORY, j, _each(laws, lambda law, j=j: law.A[i, j])) for j in range(len(laws[0].memory))]
    terms += [Term(READING, j, _each(laws, lambda law, j=j: law.B[i, j])) for j in range(len(laws[0].measurements))]
    terms.append(Term(LINE, 0, _each(laws, lambda law: law.E[i])))
    name = laws[0].memory[i]
    return Row(
        name,
        f"{name.replace('_', ' ')} at the next sample",
        _memory_unit(name, laws[0]),
        _acting(terms),
        tuple(np.inf for _ in laws),
    )


def _held_moves(laws: Sequence[Law]) -> tuple[Row, ...]:
    """Return the memory's rows while the machine is held; empty where they are those of the free machine."""
    if all(law.held_A is None for law in laws):
        return ()
    held = [
        replace(
            law,
            A=law.A if law.held_A is None else law.held_A,
            B=law.B if law.held_B is None else law.held_B,
            E=np.zeros_like(law.E),  # the limited command is zero then
        )
        for law in laws
    ]
    rows = [_move(held, i) for i in range(len(held[0].memory))]
    return tuple(replace(row, says=f"{row.says}, held") for row in rows)


def _input(laws: Sequence[Law], plant: Plant, i: int) -> Row:
    unit = plant.units[i]
    terms = [Term(LINE, 0, _each(laws, lambda law: law.allotment[i]))]
    terms += [
        Term(READING, j, _each(laws, lambda law, j=j: -law.levelling[i, j])) for j in range(len(laws[0].measurements))
    ]
    drive = "rad/s" if unit.drive == "rate" else "N*m"
    says = "gimbal rate asked of" if unit.drive == "rate" else "torque asked of"
    return Row(unit.name, f"{says} {unit.name}", drive, _acting(terms), _each(laws, lambda law: law.input_limits[i]))


def _each(laws: Sequence[Law], of: object) -> tuple[float, ...]:
    assert callable(of)
    return tuple(float(of(law)) for law in laws)


def _acting(terms: list[Term]) -> tuple[Term, ...]:
    """Leave out what is zero on every stance."""
    return tuple(term for term in terms if any(gain != 0.0 for gain in term.gains))


def _line_shares(designs: Sequence[Design]) -> Array:
    """Return (stances, units); zeros where one unit stands alone: nothing can be shared out."""
    rows = [line_torque_per_input(d.plant.unit_parameters) for d in designs]
    return np.array(rows) if len(designs[0].plant.units) > 1 else np.zeros((len(designs), 1))


def _window(design: Design, i: int, readings: tuple[Reading, ...]) -> Window | None:
    """Return what the i-th wheel's motor can give; None for gimbals and where no voltage is stated."""
    row, unit = design.plant.unit_parameters[i], design.plant.units[i]
    if row[at.KIND] != at.WHEEL or not np.isfinite(row[at.BUS_VOLTAGE]) or not row[at.RESISTANCE]:
        return None
    name = "wheel_speed" if len(design.plant.units) == 1 else f"{unit.name}.wheel_speed"
    places = [j for j, reading in enumerate(readings) if reading.name == name]
    if not places:
        return None
    per_amp = abs(float(row[at.TORQUE_PER_AMP]))
    most = min(per_amp * float(row[at.CURRENT_LIMIT]), float(row[at.TORQUE_LIMIT]))
    return Window(
        places[0],
        per_amp * float(row[at.BUS_VOLTAGE] / row[at.RESISTANCE]),
        per_amp * abs(float(row[at.BACK_EMF])) / float(row[at.RESISTANCE]),
        most,
    )


def _axes(design: Design) -> tuple[tuple[float, ...], ...]:
    stance = design.plant.stance
    return tuple(tuple(float(x) for x in stance.R_WT.T @ v) for v in (stance.e_W, stance.u_W, stance.w_W))


def _patience(designs: Sequence[Design]) -> int:
    """Return for how many samples an old reading may stand in: half the smallest delay margin, one to twenty samples."""
    delay = min(d.margins.delay for d in designs)
    half = 0.5 * delay / designs[0].law.sample_time if np.isfinite(delay) else 20.0
    return int(min(max(half, 1.0), 20.0))
