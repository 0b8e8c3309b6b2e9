"""No product, sum or shift of the fixed-point law can leave 32 bits: bounds on every intermediate, not samples of them.

Worked out here from the whole-number description alone: largest believed readings, gains as rounded, one unit in the last
place for every rounding, and the memory's reach under all of that (impulse responses' magnitudes summed).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.firmware.describe import reach
from balance.firmware.fixed_model import AXIS
from balance.firmware.program import DIRECT, LINE, MEMORY
from balance.firmware.quantised import fixed_laws
from balance.firmware.reach import memory_reach
from balance.firmware.scaling import Fixed, FixedRow, FixedTerm
from tests.firmware.builds import CASES, designs, package

END = 2**31 - 1


def scaled(term: FixedTerm, s: int, size: float) -> float:
    """Return the largest magnitude of a term for a source within ± size: product, rounding down, shift."""
    return (size * abs(term.gains[s]) / 2**16 + 2.0) * 2.0**term.shift + 1.0


def total(row: FixedRow, s: int, sizes: dict[tuple[str, int], float], own: float = 0.0) -> float:
    """Return the largest magnitude of any partial sum of a row."""
    return own * row.keeps + sum(scaled(t, s, sizes[t.source, 0 if t.source == LINE else t.place]) for t in row.terms)


def memory_sizes(fixed: Fixed, case: str, s: int, readings: list[float]) -> list[float]:
    """Return the largest whole number of each memory, with every rounding as a disturbance of its own."""
    law = fixed_laws(designs(case), fixed)[s]
    k = len(law.memory)
    noise = np.array([(len(row.terms) + 1) * 3.0 * 2.0 ** max(max((t.shift for t in row.terms), default=0), 0) / 2.0**places
                      for row, places in zip(fixed.moves, fixed.memory, strict=True)])
    held = None if law.held_B is None else np.hstack([law.held_B, np.eye(k)])
    wide = replace(law, B=np.hstack([law.B, np.eye(k)]), held_B=held)
    bounds = np.array([x / 2.0**p for x, p in zip(readings, fixed.readings, strict=True)])
    return [x * 2.0**p for x, p in zip(memory_reach(wide, np.append(bounds, noise)), fixed.memory, strict=True)]


def intermediates(fixed: Fixed, case: str, s: int) -> dict[str, float]:
    """Return the largest magnitude of everything that is ever put into 32 bits."""
    program, out, readings = fixed.program, {}, []
    for j, (reading, rest) in enumerate(zip(program.readings, fixed.rests, strict=True)):
        at = sum(r.kind == DIRECT for r in program.readings[:j])
        if reading.kind == DIRECT:
            size = fixed.believed[at] * 2.0 ** (fixed.readings[j] - fixed.fields[at])
        else:
            size = reach(reading) * 2.0 ** fixed.readings[j] + 3.0
        readings.append(size + abs(rest[s]))
        out[f"reading {reading.name}"] = readings[-1]
    if program.inertial:
        widest = max(sum(abs(round(x * 2.0**AXIS)) for x in axis) for axis in program.axes[s])
        for kind, most in (("force", fixed.believed[-4]), ("rate", fixed.believed[-1])):
            out[f"{kind} along an axis"] = widest * most / 2**15 + 6.0
    memory = memory_sizes(fixed, case, s, readings)
    sizes = {("reading", j): size for j, size in enumerate(readings)} | {(MEMORY, i): size for i, size in enumerate(memory)}
    sizes[LINE, 0] = fixed.line.limits[s]
    out["line"] = total(fixed.line, s, sizes)
    for i, row in enumerate(fixed.moves):
        out[f"memory {i}"] = max(memory[i], total(row, s, sizes, memory[i]))
    for i, row in enumerate(fixed.held_moves):
        out[f"memory {i}, held"] = total(row, s, sizes, memory[i])
    asked = [total(row, s, sizes) for row in fixed.inputs]
    limits = [row.limits[s] for row in fixed.inputs]
    out |= {f"unit {i}": size for i, size in enumerate(asked)}
    if fixed.share:
        out["missing"] = sum(scaled(t, s, a + most) for t, a, most in zip(fixed.share, asked, limits, strict=True))
        rooms = [scaled(t, s, 2.0 * most) for t, most in zip(fixed.share, limits, strict=True)]
        out["room, twice"] = 2.0 * sum(rooms)
        for i, (t, room, most) in enumerate(zip(fixed.back, rooms, limits, strict=True)):
            out[f"taken over by {i}"] = most + scaled(t, s, room)
    for i, window in enumerate(fixed.windows):
        if window is not None:
            term = FixedTerm("reading", window.reading, (window.gain,), window.shift)
            out[f"window {i}"] = window.stall + scaled(term, 0, readings[window.reading])
    return out


@pytest.mark.parametrize("case", CASES)
def test_every_intermediate_fits_32_bits(case: str) -> None:
    fixed = package(case).fixed
    assert fixed is not None
    for s in range(len(fixed.program.stances)):
        found = intermediates(fixed, case, s)
        assert {name: size for name, size in found.items() if not size <= END} == {}
        # and the line command does not waste them: at least half of what can be had, 2^29, in some stance
        assert found["line"] > 2**26


@pytest.mark.parametrize("case", ["quay-gyros", "scout-wheels"])
def test_three_places_more_do_not_fit(case: str) -> None:
    """The twin, and proof that the bound is not idle: the same law with its line command eight times as fine."""
    fixed = package(case).fixed
    assert fixed is not None
    fine = replace(fixed.line, terms=tuple(replace(t, shift=t.shift + 3) for t in fixed.line.terms))
    assert any(intermediates(replace(fixed, line=fine), case, s)["line"] > END for s in range(len(fixed.program.stances)))
