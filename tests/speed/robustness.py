"""What one loop costs in the search for the worst case, beside the margins that are reported.

`python -m tests.speed.robustness` prints it.  Both ways in the same run on the same loops, so the ratio carries to another
machine; no time fails a test.
"""

from __future__ import annotations

import time
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from balance.api.gains import gains
from balance.api.load import load
from balance.design.robustness.ranges import ranges_of
from balance.design.robustness.screen import JUDGED, screen_of
from balance.design.robustness.worst import deviation, exact_margins

ROOT = Path(__file__).resolve().parents[2]
CASES = (("bench-rig", "line"), ("scout-wheels", "on-fore-left"), ("quay-gyros", "on-left-right"))
DISK = JUDGED.index("disk")


@dataclass(frozen=True)
class Timed:
    """Seconds per loop, screened and exact, and the largest relative difference of the disk margin between them."""

    name: str
    screened: float
    exact: float
    apart: float

    def __str__(self) -> str:
        """One line of the table."""
        return (f"{self.name:<14} screened {1e3 * self.screened:8.3f} ms   exact {1e3 * self.exact:8.1f} ms   "
                f"{self.exact / self.screened:6.0f} times   disk margins {self.apart:.1e} apart")


def measure(count: int) -> list[Timed]:
    """Time `count` deviated loops of each shipped kind of machine both ways."""
    rng, lines = np.random.default_rng(3), []
    for name, stance in CASES:
        job = load(str(ROOT / "designs" / f"{name}.yaml"), stance)
        (design,) = gains(job, worst=False)
        ranges = ranges_of(design.plant, job.machine.tolerances, job.goal.loop)
        deviations = [deviation(ranges, x) for x in rng.uniform(-1.0, 1.0, (count, len(ranges)))]
        screen = screen_of(design.plant, design.law)
        screen.scores(deviations[:1])
        start = time.perf_counter()
        scores = screen.scores(deviations)
        between = time.perf_counter()
        exact = np.array([exact_margins(screen, by, delay=True).disk for by in deviations])
        end = time.perf_counter()
        apart = float(np.max(np.abs(scores[:, DISK] / exact - 1.0)))
        lines.append(Timed(name, (between - start) / count, (end - between) / count, apart))
    return lines


if __name__ == "__main__":
    for line in measure(40):
        print(line)
