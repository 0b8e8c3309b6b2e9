"""The loop as numbers to draw: magnitude, phase, margins to mark, and the count of encirclements."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.loop import BrokenLoop, actuator_break, sample_plant
from balance.design.records import Crossing, Design

Array = NDArray[np.float64]
MARGINAL = 1e-5
"""How near the unit circle an open-loop pole counts as on it: three integrators together are found to about 1e-5."""
LOWEST = 1e-8
"""Where counting starts, as a share of half the sampling frequency: below the slowest bearing drag."""


@dataclass(frozen=True)
class Count:
    """Nyquist's count. Counter-clockwise turns about −1 `needed` (unstable open-loop poles) and `found`.

    `turns` is what the frequency response itself adds up to; where it is no whole number (`sure` false) the response
    does not reach low enough to count.
    """

    needed: int
    found: int
    turns: float
    sure: bool


@dataclass(frozen=True)
class WorstLoop:
    """The loop at its worst within the tolerances; arrays as in `LoopPicture`, `modulus` NaN where it is unstable."""

    frequency: Array       # (n,) rad/s
    magnitude: Array       # (n,) dB
    phase: Array           # (n,) degrees
    loop: Array            # (n,) complex128
    stable: bool
    modulus: float
    count: Count


@dataclass(frozen=True)
class LoopPicture:
    """One loop, ready to draw. `phase` is unwrapped, in degrees, next to −180° at the first crossover."""

    stance: str
    frequency: Array       # (n,) rad/s
    magnitude: Array       # (n,) dB
    phase: Array           # (n,) degrees
    loop: Array            # (n,) complex128
    nyquist: float         # rad/s, half the sampling frequency
    stable: bool
    modulus: float         # min |1 + L|; NaN where unstable
    nearest: complex       # the point of L nearest to −1
    phase_crossings: tuple[Crossing, ...]
    gain_crossings: tuple[Crossing, ...]
    count: Count
    worst: WorstLoop | None = None


def count_turns(broken: BrokenLoop, lowest: float, frequency: Array, loop: Array) -> Count:
    """Add up the turns of 1 + L over the whole unit circle, counter-clockwise positive; poles outside it are `needed`.

    The drawn response (`frequency` in rad/s, `loop`) is continued down to `lowest`.  Integrators lie on the contour: it
    passes them on the outside, which adds half a clockwise turn each; their number is the slope of |L| at the low end.
    """
    needed = int(np.sum(np.abs(np.linalg.eigvals(broken.A)) > 1.0 + MARGINAL))
    below = np.geomspace(min(lowest, 0.1 * frequency[0]), frequency[0], 240)[:-1]
    whole = np.concatenate([broken.response(below), loop])
    if not np.isfinite(whole).all():
        return Count(needed, 0, math.nan, False)
    angle = np.unwrap(np.angle(1.0 + whole))
    slope = -math.log(abs(whole[1] / whole[0])) / math.log(below[1] / below[0])
    integrators = max(0, round(slope))
    turns = float(2.0 * (angle[-1] - angle[0]) - math.pi * integrators) / math.tau
    return Count(needed, round(turns), turns, abs(turns - round(turns)) < 0.1)


def phase_degrees(loop: Array, magnitude: Array) -> Array:
    """Unwrap the phase, shifted by whole turns so that it stands between −360° and 0° where the loop last has gain 1."""
    phase = np.degrees(np.unwrap(np.angle(loop)))
    above = np.flatnonzero(magnitude >= 0.0)
    anchor = phase[above[-1]] if above.size else phase[int(np.argmax(magnitude))]
    shifted: Array = phase - 360.0 * (math.floor(anchor / 360.0) + 1.0)
    return shifted


def picture_loop(design: Design) -> LoopPicture | None:
    """Gather one loop, or None where there is none (refused designs)."""
    loop, frequency = np.asarray(design.response.loop), np.asarray(design.response.frequency)
    usable = np.isfinite(loop) & (frequency > 0.0) & (loop != 0.0)
    loop, frequency = loop[usable], frequency[usable]
    if design.refused or loop.size < 8:
        return None
    magnitude = 20.0 * np.log10(np.abs(loop))
    margins, law = design.margins, design.law
    nyquist = math.pi / law.sample_time
    broken = actuator_break(sample_plant(design.plant, law.sample_time, law.latency), law)
    return LoopPicture(
        stance=design.plant.stance.name, frequency=frequency, magnitude=magnitude,
        phase=phase_degrees(loop, magnitude), loop=loop, nyquist=nyquist,
        stable=margins.stable, modulus=margins.modulus, nearest=complex(loop[int(np.argmin(np.abs(1.0 + loop)))]),
        phase_crossings=tuple(c for c in margins.crossings if c.kind == "phase"),
        gain_crossings=tuple(c for c in margins.crossings if c.kind == "gain" and c.value > 0.0),
        count=count_turns(broken, LOWEST * nyquist, frequency, loop), worst=worst_loop(design))


def worst_loop(design: Design) -> WorstLoop | None:
    """Gather the loop where the disk margin is smallest, or None where no tolerances are stated."""
    found = design.robustness
    if found is None:
        return None
    loop, frequency = np.asarray(found.response.loop), np.asarray(found.response.frequency)
    usable = np.isfinite(loop) & (loop != 0.0)
    loop, frequency = loop[usable], frequency[usable]
    magnitude = 20.0 * np.log10(np.abs(loop))
    law = design.law
    broken = actuator_break(sample_plant(found.worst, law.sample_time, max(law.latency + found.late, 0.0)), law)
    count = count_turns(broken, LOWEST * math.pi / law.sample_time, frequency, loop)
    margins = found.margins
    return WorstLoop(frequency, magnitude, phase_degrees(loop, magnitude), loop, margins.stable, margins.modulus, count)
