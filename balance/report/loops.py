"""The loop as numbers to draw: magnitude, phase, margins to mark, and the count of encirclements."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.records import Crossing, Design

Array = NDArray[np.float64]
MARGINAL = 1e-9
"""How near the stability boundary an open-loop pole counts as on it: an integrator of the machine is exact to rounding."""


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


def unstable_poles(design: Design) -> int:
    """Count the poles outside the unit circle of the loop broken at the torque: the machine's and the controller's own."""
    law = design.law
    machine = int(np.sum(np.linalg.eigvals(design.plant.model.A).real > MARGINAL * design.plant.pole))
    if not law.memory:
        return machine
    own = np.linalg.eigvals(law.A + np.outer(law.E, law.C))
    return machine + int(np.sum(np.abs(own) > 1.0 + MARGINAL))


def count_turns(loop: Array, frequency: Array, needed: int) -> Count:
    """Add up the turns of 1 + L over the whole unit circle, counter-clockwise positive.

    Integrators lie on the contour: it passes them on the outside, which adds half a clockwise turn each.  Their number
    is the slope of |L| at the lowest frequencies.
    """
    angle = np.unwrap(np.angle(1.0 + loop))                                                       # (n,)
    slope = -math.log(abs(loop[1] / loop[0])) / math.log(frequency[1] / frequency[0])
    integrators = max(0, round(slope))
    turns = float(2.0 * (angle[-1] - angle[0]) - math.pi * integrators) / math.tau
    found = round(turns)
    return Count(needed, found, turns, abs(turns - found) < 0.1)


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
    margins = design.margins
    return LoopPicture(
        stance=design.plant.stance.name, frequency=frequency, magnitude=magnitude,
        phase=phase_degrees(loop, magnitude), loop=loop, nyquist=math.pi / design.law.sample_time,
        stable=margins.stable, modulus=margins.modulus, nearest=complex(loop[int(np.argmin(np.abs(1.0 + loop)))]),
        phase_crossings=tuple(c for c in margins.crossings if c.kind == "phase"),
        gain_crossings=tuple(c for c in margins.crossings if c.kind == "gain" and c.value > 0.0),
        count=count_turns(loop, frequency, unstable_poles(design)))
