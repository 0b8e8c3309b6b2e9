"""Fixed point: how many binary places every signal has, and each gain as sixteen bits with a constant shift.

A signal is a 32-bit whole number, value = number / 2^places. A term is ``(number · gain) >> 16`` with a 16-bit gain, from
two 16 × 16 products, then shifted by a constant; no 64-bit product is needed. Places are chosen from what a signal can
reach, so that no sum of any admissible readings leaves 31 bits: every intermediate is covered, not only the signals.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from balance.firmware.describe import reach
from balance.firmware.fields import fields_of
from balance.firmware.program import DIRECT, LINE, MEMORY, READING, TILT, Program, Row, Term

ROOM = 2.0**30
"""No sum exceeds this magnitude: one bit of 31 is kept free for the rounding of its terms."""

NARROW = 2**15 - 1
WHOLE = 2.0**-16


class NoRoomError(ValueError):
    """A signal has no bound, or gains too far apart: fixed point is not possible."""


@dataclass(frozen=True)
class FixedTerm:
    """gain · source as whole numbers: ((source · gains[stance]) >> 16) · 2^shift; one shift for all stances."""

    source: str
    place: int
    gains: tuple[int, ...]
    shift: int


@dataclass(frozen=True)
class FixedRow:
    """One sum in whole numbers. `keeps`: the old value is added whole, the gain on it is what it differs from one."""

    places: int
    terms: tuple[FixedTerm, ...]
    limits: tuple[int, ...]
    keeps: bool


@dataclass(frozen=True)
class FixedWindow:
    """What a motor gives at its speed, in whole numbers of places of its own; `drop`: shift of a command to them (<= 0)."""

    reading: int
    gain: int
    shift: int
    stall: int
    most: int
    drop: int


@dataclass(frozen=True)
class Fixed:
    """A program with all its numbers whole."""

    program: Program
    fields: tuple[int, ...]  # binary places of each number of the reading
    believed: tuple[int, ...]  # largest whole number of each that is believed
    readings: tuple[int, ...]  # binary places of each measurement
    rests: tuple[tuple[int, ...], ...]  # per measurement, per stance
    memory: tuple[int, ...]
    line: FixedRow
    moves: tuple[FixedRow, ...]
    held_moves: tuple[FixedRow, ...]
    inputs: tuple[FixedRow, ...]
    share: tuple[FixedTerm, ...]  # unit's command -> torque about the line
    back: tuple[FixedTerm, ...]  # torque about the line -> unit's command
    windows: tuple[FixedWindow | None, ...]
    line_places: int  # of a torque about the line while it is shared out


def places_for(most: float) -> int:
    """Return the binary places with which ± `most` stays within 2^29; at most 40."""
    if not math.isfinite(most):
        raise NoRoomError("it has no bound")
    return min(29 - math.ceil(math.log2(most)) if most > 0.0 else 29, 40)


def scale(program: Program) -> Fixed:
    """Return the program in whole numbers; raises NoRoomError where that cannot be done."""
    fields = tuple(places_for(f.most) for f in fields_of(program))
    readings: list[int] = []
    at = 0
    for reading in program.readings:
        if reading.kind == DIRECT:
            readings.append(min(fields[at], places_for(reach(reading))))
            at += 1
        else:
            readings.append(places_for(reach(reading)) if reading.kind == TILT else fields[-1] - 1)
    for each in program.memory:
        if not math.isfinite(each.most):
            raise NoRoomError(f"memory `{each.name}` has no bound: its own poles do not decay")
    memory = tuple(places_for(m.most) for m in program.memory)
    scales = {READING: readings, MEMORY: list(memory)}
    line = _row(program, program.line, scales, None, -1)
    scales[LINE] = [line.places]
    moves = tuple(_row(program, row, scales, memory[i], i) for i, row in enumerate(program.moves))
    held = tuple(_row(program, row, scales, memory[i], i) for i, row in enumerate(program.held_moves))
    inputs = tuple(_row(program, row, scales, None, -1) for row in program.inputs)
    share, back, line_places = _sharing(program, inputs)
    return Fixed(
        program,
        fields,
        tuple(math.floor(f.most * 2.0**s) for f, s in zip(fields_of(program), fields, strict=True)),
        tuple(readings),
        tuple(tuple(round(x * 2.0**s) for x in r.rest) for r, s in zip(program.readings, readings, strict=True)),
        memory,
        line,
        moves,
        held,
        inputs,
        share,
        back,
        tuple(_window(program, i, readings, inputs[i].places) for i in range(len(inputs))),
        line_places,
    )


def _reaches(program: Program, term: Term) -> float:
    """Return the largest magnitude of a term's source."""
    if term.source == LINE:
        return max(program.line.limits)
    return program.memory[term.place].most if term.source == MEMORY else reach(program.readings[term.place])


def _row(program: Program, row: Row, scales: dict[str, list[int]], places: int | None, own: int) -> FixedRow:
    """Return a sum in whole numbers; its places are given, or what its terms can add up to leaves room for."""
    keeps = any(_is_own(t, own) and all(0.5 < g < 1.5 for g in t.gains) for t in row.terms)
    terms = [
        Term(t.source, t.place, tuple(g - 1.0 for g in t.gains)) if keeps and _is_own(t, own) else t for t in row.terms
    ]
    most = max(
        (sum(abs(t.gains[s]) * _reaches(program, t) for t in terms) for s in range(len(program.stances))), default=0.0
    )
    if keeps:
        most += program.memory[own].most
    room = math.floor(math.log2(ROOM / most)) if most > 0.0 else 40
    chosen = min(room, 40) if places is None else places
    if chosen > room:
        raise NoRoomError(f"the sum for {row.says} can reach {most:.3g}, too far for its {chosen} binary places")
    fixed = tuple(
        fixed_term(t.source, t.place, [g * 2.0 ** (chosen - scales[t.source][t.place]) for g in t.gains]) for t in terms
    )
    limits = tuple(min(math.floor(x * 2.0**chosen), 2**31 - 1) if math.isfinite(x) else 2**31 - 1 for x in row.limits)
    return FixedRow(chosen, fixed, limits, keeps)


def _is_own(term: Term, own: int) -> bool:
    return term.source == MEMORY and term.place == own


def fixed_term(source: str, place: int, factors: Sequence[float]) -> FixedTerm:
    """Return factors of whole numbers as 16-bit gains with the shift that fits the largest of them."""
    largest = max(abs(x) for x in factors)
    shift = max(math.frexp(largest / (NARROW * WHOLE))[1], -31) if largest > 0.0 else 0
    if largest > NARROW * WHOLE * 2.0**shift:  # frexp: largest < 2^shift of it, so this cannot be
        shift += 1
    return FixedTerm(source, place, tuple(round(x / (WHOLE * 2.0**shift)) for x in factors), shift)


def _sharing(
    program: Program, inputs: tuple[FixedRow, ...]
) -> tuple[tuple[FixedTerm, ...], tuple[FixedTerm, ...], int]:
    """Return the terms from commands to torque about the line and back, and the places of that torque."""
    if len(program.units) < 2:
        return (), (), 0
    most = 0.0
    for s in range(len(program.stances)):
        total = 0.0
        for unit, row in enumerate(inputs):
            asked = ROOM / 2.0**row.places  # what a sum can reach before its limit
            limit = program.inputs[unit].limits[s]
            total += abs(program.line_share[unit][s]) * max(asked + limit, 2.0 * limit)
        most = max(most, total)
    places = math.floor(math.log2(ROOM / most))
    share = tuple(
        fixed_term("unit", i, [x * 2.0 ** (places - inputs[i].places) for x in row])
        for i, row in enumerate(program.line_share)
    )
    back = tuple(
        fixed_term("line", i, [(1.0 / x if x else 0.0) * 2.0 ** (inputs[i].places - places) for x in row])
        for i, row in enumerate(program.line_share)
    )
    return share, back, places


def _window(program: Program, i: int, readings: list[int], command_places: int) -> FixedWindow | None:
    """Return unit i's window in whole numbers."""
    window = program.windows[i]
    if window is None:
        return None
    most = window.stall + window.slope * reach(program.readings[window.reading])
    places = min(math.floor(math.log2(ROOM / most)), command_places)
    term = fixed_term(READING, window.reading, [window.slope * 2.0 ** (places - readings[window.reading])])
    return FixedWindow(
        window.reading,
        term.gains[0],
        term.shift,
        round(window.stall * 2.0**places),
        round(min(window.most, most) * 2.0**places),
        places - command_places,
    )
