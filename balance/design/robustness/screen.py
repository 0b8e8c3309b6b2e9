"""Many deviated loops at once: stable or not by eigenvalues, then margins off one frequency grid.

Good to a part in a thousand, for ranking; what is reported comes from `design.margins` with refined crossings.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law
from balance.design.loop import BrokenLoop, SampledPlant, actuator_break, sample_plant, sensor_break
from balance.design.noise import output_rms, per_sample
from balance.design.pid import GYRO_NOISE
from balance.design.pid_screen import axis_crossings, unit_crossings
from balance.design.robustness.ranges import LATENCY
from balance.maths.transfer import respond_each, triangular
from balance.plant.deviation import deviated
from balance.plant.record import Plant

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

JUDGED = ("disk", "modulus", "phase", "gain_lower", "gain_upper", "delay")
"""Margins that are searched, by their names in `Margins`; columns of what `scores` returns."""

POINTS = 220
"""Frequencies of the grid: neighbours 6 % apart, where a smooth loop's peak is found to 0.1 % (parabola through three)."""

RINGS = 0.15
"""Damping ratio below which a mode's peak is narrower than the grid."""
AROUND = 61
"""Points within 20 % of such a mode: 0.7 % apart, a third of the width of a peak damped by 0.01."""

ENDLESS = 1e12
TOGETHER = 32
"""Loops whose response is worked out at once: their numbers stay in the processor's cache."""


@dataclass(frozen=True)
class Screen:
    """One law on one stance's plant, and the frequencies (rad/s) its loops are looked at."""

    plant: Plant
    law: Law
    frequency: Array

    def sampled(self, by: Mapping[str, float]) -> SampledPlant:
        """Return the deviated machine sampled under the deviated delay."""
        late = max(self.law.latency + by.get(LATENCY, 0.0), 0.0)
        return sample_plant(deviated(self.plant, by), self.law.sample_time, late)

    def loop(self, by: Mapping[str, float]) -> BrokenLoop:
        """Return the deviated machine under the law, cut at the physical torque."""
        return actuator_break(self.sampled(by), self.law)

    def slowest(self) -> float:
        """Return the time constant (s) of the slowest mode of the nominal closed loop; inf where it does not decay."""
        poles = np.abs(np.linalg.eigvals(self.loop({}).closed()))
        rate = -math.log(max(float(poles.max()), 1e-300)) / self.law.sample_time
        return 1.0 / rate if rate > 0.0 else math.inf

    def shaken(self) -> float:
        """Return the RMS of the nominal command under a small gyroscope's noise, as a share of the command's limit."""
        law, sampled = self.law, self.sampled({})
        name = "gyro" if "gyro" in law.measurements else "lean_rate"
        cut, felt = actuator_break(sampled, law), sensor_break(sampled, law, name)
        sigma, direct = per_sample(GYRO_NOISE, 1.0 / law.sample_time), law.D[law.measurements.index(name)]
        rms = output_rms(cut.closed(), felt.b[:, None], np.array([sigma]), -cut.c[None, :], np.array([[direct]]))
        return float(rms[0] / law.output_limit)

    def scores(self, deviations: Sequence[Mapping[str, float]]) -> Array:
        """Return (N, len(JUDGED)): how good each margin is, more is better; below 0 where the loop is unstable.

        Factors are counted from 1: 1 − lower and upper − 1.  An unstable loop has minus its growth per sample.
        """
        loops = [self.loop(by) for by in deviations]
        growth = np.array([np.abs(np.linalg.eigvals(one.closed())).max() - 1.0 for one in loops])
        response = self._responses(loops)
        found = quick_margins(response, self.frequency)                      # (N, 6)
        return np.where(growth[:, None] >= 0.0, -growth[:, None] - 1e-12, np.maximum(found, 0.0))


    def _responses(self, loops: Sequence[BrokenLoop]) -> Complex:
        """Return L (N, f), loops of one size together: a deviated delay may hold more or fewer commands."""
        points = np.exp(1j * self.frequency * self.law.sample_time)
        found = np.empty((len(loops), len(points)), dtype=np.complex128)
        sizes = np.array([len(one.b) for one in loops])
        for size in np.unique(sizes):
            where = np.flatnonzero(sizes == size)
            for part in np.array_split(where, -(-len(where) // TOGETHER)):
                found[part] = respond_each([triangular(loops[i].A, loops[i].b, loops[i].c) for i in part], points)
        return found


def quick_margins(loop: Complex, frequency: Array) -> Array:
    """Return (N, len(JUDGED)) off the grid for loops (N, f) that are stable; factors counted from 1.

    A frequency that falls on a pole of the loop counts as one of endless gain: there feedback is perfect.
    """
    loop = np.where(np.isfinite(loop), loop, ENDLESS)
    back = np.abs(1.0 + loop)
    phase, delay = unit_crossings(loop, frequency)
    lower, upper = axis_crossings(loop)
    disk, modulus = 1.0 / top(0.5 * np.abs(1.0 - loop) / back), 1.0 / top(1.0 / back)
    return np.stack([disk, modulus, phase, 1.0 - lower, upper - 1.0, delay], axis=1)


def top(values: Array) -> Array:
    """Return (N,) the highest values over the last axis, a parabola laid through the logarithms of three neighbours."""
    at = np.argmax(values, axis=1)
    middle = np.clip(at, 1, values.shape[1] - 2)
    rows = np.arange(len(values))
    a, b, c = (np.log(values[rows, middle + k]) for k in (-1, 0, 1))
    bend = np.minimum(a - 2.0 * b + c, -1e-300)
    peak = np.where(at == middle, b - (c - a) ** 2 / (8.0 * bend), np.log(values[rows, at]))
    highest: Array = np.exp(peak)
    return highest


def screen_of(plant: Plant, law: Law) -> Screen:
    """Return a screen with its grid: from far below the slowest closed-loop mode up to the Nyquist frequency.

    It is denser around any mode that rings, loop open or closed, for its peak is narrow and moves with the machine.
    """
    T = law.sample_time
    nominal = actuator_break(sample_plant(plant, T, law.latency), law)
    closed, opened = (_rates(matrix, T) for matrix in (nominal.closed(), nominal.A))
    highest = np.pi / T * (1.0 - 1e-12)
    slow = np.abs(closed)
    lowest = max(0.02 * float(slow[slow > 1e-7 * highest].min(initial=highest)), 1e-6 * highest)
    rates = np.concatenate([closed, opened])
    ringing = rates[(rates.imag > lowest) & (rates.imag < 0.95 * highest) & (np.abs(rates.real) < RINGS * np.abs(rates))]
    near = np.outer(np.abs(ringing), np.linspace(0.8, 1.2, AROUND)).ravel()
    grid = np.concatenate([np.geomspace(lowest, highest, POINTS), near[(near > lowest) & (near < highest)]])
    return Screen(plant, law, np.unique(grid))


def _rates(matrix: Array, T: float) -> Complex:
    """Return ln(z)/T of the eigenvalues that are not pure delay."""
    poles = np.linalg.eigvals(matrix).astype(np.complex128)
    return (np.log(poles[np.abs(poles) > 1e-9]) / T).astype(np.complex128)
