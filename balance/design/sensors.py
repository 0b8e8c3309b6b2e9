"""Margins of the loop broken at one sensor, everything else closed: what a sensor's own gain, phase or delay may do."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.design.ideal import delay_by_phase
from balance.design.loop import BrokenLoop, close, sample_plant, sensor_break
from balance.design.margins import BrokenView, margins_of
from balance.design.records import Design, Margins
from balance.design.sampled_margins import view
from balance.maths.search import largest_between
from balance.maths.structured import balanced, scaled_norm, structured_bound

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

POINTS = 400
"""Frequencies of the first look; the highest is then refined."""


def sensor_margins(design: Design) -> tuple[tuple[str, Margins], ...]:
    """Return (measurement, margins) for every measurement the law feeds back.

    A measurement may come late by any part of a sample, so the delay margin here is phase/ω, smallest over the
    crossings: what lies between two samples of one sensor is not in the sampled model.  Infinite where |L| stays below 1.
    """
    law = design.law
    if design.refused:
        return ()
    sampled = sample_plant(design.plant, law.sample_time, law.latency)
    found = []
    for i, name in enumerate(law.measurements):
        if law.D[i] != 0.0 or np.any(law.B[:, i] != 0.0):
            found.append((name, margins_of(_by_phase(sensor_break(sampled, law, name)))))
    return tuple(found)


def all_sensors(design: Design) -> float:
    """Return the balanced disk margin α of all measurements at once, each with its own factor; NaN without a stable loop.

    Every reading may be multiplied by any complex (1 + δ/2)/(1 − δ/2), |δ| < α, independently: α = 1/max μ(S − ½), with S
    from what is added to the readings to what the law is shown. Seiler, Packard, Gahinet 2020 (read); never below the
    truth's safe side: μ is bounded from above (`maths.structured`).
    """
    law = design.law
    if design.refused or not design.margins.stable:
        return float("nan")
    sampled = sample_plant(design.plant, law.sample_time, law.latency)
    used = [i for i in range(len(law.measurements)) if law.D[i] != 0.0 or np.any(law.B[:, i] != 0.0)]
    A = close(sampled, law)
    B = np.array([np.concatenate([sampled.B * law.D[i], law.B[:, i] + law.E * law.D[i]]) for i in used]).T      # (N, m)
    C = np.hstack([sampled.rows(tuple(law.measurements[i] for i in used)), np.zeros((len(used), len(law.memory)))])
    rates = np.abs(np.log(np.linalg.eigvals(A).astype(np.complex128) + 1e-300)) / law.sample_time
    top = np.pi / law.sample_time
    grid = np.concatenate([[0.0], np.geomspace(max(1e-2 * float(rates.min()), 1e-6 * top), top, POINTS)])

    def shown(w: Array) -> Complex:
        z = np.exp(1j * w * law.sample_time)[:, None, None]
        swept = np.linalg.solve(z * np.eye(len(A)) - A, np.broadcast_to(B, (len(w), *B.shape)))
        out: Complex = (0.5 * np.eye(len(used)) + C @ swept).astype(np.complex128)        # S − ½ = I + … − ½
        return out

    bounds = scaled_norm(shown(grid), balanced(shown(grid)))
    at = int(np.argmax(bounds))
    low, high = grid[max(at - 1, 0)], grid[min(at + 1, POINTS)]
    worst = largest_between(lambda w: structured_bound(shown(np.array([w]))[0]), low, high, 1e-4 * (high - low) + 1e-12)
    return 1.0 / max(worst, structured_bound(shown(grid[at:at + 1])[0]))


def _by_phase(broken: BrokenLoop) -> BrokenView:
    """Return the loop with an added delay judged by phase."""
    loop = view(broken, lambda _: broken)
    bearable = delay_by_phase(loop.response, loop.lowest, loop.highest)

    def growth(factor: float, delay: float) -> float:
        return delay - bearable if delay else loop.growth(factor, 0.0)

    return BrokenView(loop.response, growth, loop.lowest, loop.highest, loop.ends, loop.marks)
