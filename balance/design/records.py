"""What the design room answers: margins, poles, the ideal beside the real, and what cannot be beaten."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law
from balance.plant.record import Plant

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


BODE_CLOSE = 1e-4
"""Difference of the two sides within which a loop passes its self-check; leaving out an unstable pole p costs p T ≈ 1e-2."""


@dataclass(frozen=True)
class Crossing:
    """One crossing of the loop transfer: of the unit circle (`phase`) or of the negative real axis (`gain`)."""

    kind: str            # "phase" | "gain"
    frequency: float     # rad/s
    value: float         # phase margin in rad, or gain factor


@dataclass(frozen=True)
class Margins:
    """Margins of a loop broken at one place; everything but `stable` is NaN where the closed loop is unstable."""

    stable: bool
    gain_lower: float         # largest factor below 1 at which stability is lost (0: none)
    gain_upper: float         # smallest factor above 1 (inf: none)
    phase: float              # rad, smallest
    phase_crossover: float    # rad/s
    delay: float              # s: smallest added input delay that puts an eigenvalue on the unit circle (inf: none)
    delay_estimate: float     # s: phase/ω, the textbook estimate
    modulus: float            # min |1 + L|
    disk: float               # balanced disk α
    peak_sensitivity: float   # Ms
    peak_complementary: float # Mt
    crossings: tuple[Crossing, ...]


@dataclass(frozen=True)
class Response:
    """Frequency response of the loop broken at the physical torque, for drawing."""

    frequency: Array          # (n,) rad/s, up to the Nyquist frequency
    loop: Complex             # (n,) L(e^{jωT}), negative feedback (1 + L)


@dataclass(frozen=True)
class LoopLimits:
    """What cannot be beaten by any law at this sampling and delay."""

    pole_times_delay: float
    least_peak_complementary: float   # e^{p t_d}
    total_delay: float                # s: latency + half a sample + actuator lag
    largest_disk: float               # balanced disk margin no law exceeds
    least_peak_sensitivity: float     # Ms no law stays below


@dataclass(frozen=True)
class BodeIntegral:
    """Both sides of Bode's sensitivity integral of a sampled loop, in nepers per sample (`bode_integral`)."""

    found: float                      # by quadrature of the response
    due: float                        # by the unstable poles of the broken loop: plant and controller

    @property
    def holds(self) -> bool:
        """Whether the response and the eigenvalues tell the same story."""
        return abs(self.found - self.due) <= BODE_CLOSE


@dataclass(frozen=True)
class Ideal:
    """The continuous design without sampling or delay, reported beside the real one."""

    K: Array
    poles: Complex
    margins: Margins


@dataclass(frozen=True)
class Design:
    """One stance's law and everything measured on it."""

    plant: Plant
    law: Law
    poles: Complex            # discrete closed loop
    equivalent: Complex       # ln(z)/T in rad/s
    margins: Margins
    limits: LoopLimits
    ideal: Ideal | None
    response: Response
    integral: BodeIntegral | None   # None where the loop is not stable
    refused: str              # "" or why no law could be designed ("cannot act about this line", …)
    own: Margins | None = None          # of the stance's own gains, where one gain set for all stances is used instead
    law_of: str = ""                    # the stance whose gains those are
    retuned: Retuning | None = None     # what `retune: robust` changed
    robustness: Robustness | None = None    # the worst case within the tolerances, where any are stated


@dataclass(frozen=True)
class Range:
    """How far one number may lie from what the files state. `unit`: "" for a share of the nominal value, else SI."""

    name: str
    low: float
    high: float
    unit: str


@dataclass(frozen=True)
class WorstCase:
    """One margin at its worst. `at`: the deviations there, those that cost most first; idle ones are left out.

    `value` is in the margin's own unit (rad, s or none), NaN where the loop is unstable there.
    """

    margin: str                  # a field of `Margins`
    nominal: float
    value: float
    at: Mapping[str, float]


@dataclass(frozen=True)
class Robustness:
    """One stance's law held fixed while the machine and the delay move within their tolerances.

    `stable` says whether the loop was stable wherever it was tried; `worst` is the machine, `late` its added latency (s),
    `margins` and `response` its loop where the disk margin is smallest (or the loop unstable).
    """

    ranges: tuple[Range, ...]
    stable: bool
    cases: tuple[WorstCase, ...]
    evaluations: int
    worst: Plant
    late: float
    margins: Margins
    response: Response


@dataclass(frozen=True)
class Retuning:
    """What `retune: robust` did to the largest acceptable excursions, and to the disk margin in the worst case.

    `scales`: factors on the allowed lean, lean rate and stored momentum; `tried`: weights whose loop was measured;
    `part`: of the way to the best of them, 1 unless the trials would bear no more (0: nothing was changed).
    """

    scales: Mapping[str, float]
    before: float                # disk margin in the worst case with the weights as given (NaN: unstable there)
    after: float
    tried: int
    part: float = 1.0
