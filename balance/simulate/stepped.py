"""A trial under somebody else's controller: the same plant, sensing, latency and events, sample by sample."""

from __future__ import annotations

from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.bundles import LINE, MEASURED, Events, LawArrays, Output, Work
from balance.kernel.stepped import HELD, MISSED, begin_sample, end_sample

Array = NDArray[np.float64]


class Controller(Protocol):
    """What can stand in the law's place."""

    def begin(self, stance: str, lean: float) -> None:
        """Forget everything and stand on `stance`; an estimator has settled at `lean` (rad)."""

    def command(self, measured: Array, held: bool) -> tuple[Array, bool]:
        """Return (the units' inputs (units,), was anything clipped) for the law's measurements (m,) of one sample."""


def run_stepped(controller: Controller, X: Array, units: Array, law: LawArrays, events: Events, work: Work,
                output: Output) -> int:
    """Run one trial as the kernel does, asking `controller` at every sample; return how it ended (`kernel.outcome`)."""
    m, alone = law.places.size, law.allotment.size == 1
    for sample in range(output.history.shape[0] - 1):
        what, clipped = begin_sample(X, sample, units, law, events, work, output), False
        if what != MISSED:
            given, clipped = controller.command(work.numbers[MEASURED, :m], what == HELD)
            work.queue[0, : given.size] = given
            work.numbers[LINE, 0] = given[0] if alone else law.line_share @ given
        end = int(end_sample(X, sample, clipped, what != MISSED, units, law, events, work, output))
        if end != outcome.RAN:
            return end
    return int(outcome.RAN)
