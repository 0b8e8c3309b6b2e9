"""Margins of the loop broken at one sensor, everything else closed: what a sensor's own gain, phase or delay may do."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.design.ideal import delay_by_phase
from balance.design.loop import BrokenLoop, sample_plant, sensor_break
from balance.design.margins import BrokenView, margins_of
from balance.design.records import Design, Margins
from balance.design.sampled_margins import view

Array = NDArray[np.float64]


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


def _by_phase(broken: BrokenLoop) -> BrokenView:
    """Return the loop with an added delay judged by phase."""
    loop = view(broken, lambda _: broken)
    bearable = delay_by_phase(loop.response, loop.lowest, loop.highest)

    def growth(factor: float, delay: float) -> float:
        return delay - bearable if delay else loop.growth(factor, 0.0)

    return BrokenView(loop.response, growth, loop.lowest, loop.highest, loop.ends, loop.marks)
