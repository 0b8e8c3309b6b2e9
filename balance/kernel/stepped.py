"""One trial, sample by sample from Python: what computes the command is not this kernel's law but a caller's controller."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.bundles import Events, LawArrays, Output, Work
from balance.kernel.compiled import entry
from balance.kernel.run import finish, is_free, run_period, send, sense

Array = NDArray[np.float64]

MISSED, HELD, FREE = 0, 1, 2
"""What a sample is: not taken at all, taken while the machine is held, taken while it can fall."""


@entry
def begin_sample(X: Array, sample: int, units: Array, law: LawArrays, events: Events, work: Work, output: Output) -> int:
    """Put the measurements into their row of `work.numbers`; return MISSED, HELD or FREE."""
    start = sample * law.sample_time
    if not sense(X, start, sample, units, law, events, work, output):
        return MISSED
    return FREE if is_free(start, law.sample_time, events) else HELD


@entry
def end_sample(X: Array, sample: int, clipped: bool, taken: bool, units: Array, law: LawArrays, events: Events, work: Work,
               output: Output) -> int:
    """Send what stands in the newest row of the queue (if a sample was taken) and move to the next; return how it ended."""
    start = sample * law.sample_time
    if taken:
        send(start, sample, clipped, units, law, events, work, output)
    until = min(start + law.sample_time, events.lasts)
    end = run_period(X, start, until, sample, law.sample_time, units, events, work, output)
    if end != outcome.RAN or sample == output.history.shape[0] - 2:
        finish(X, sample + 1, units, work, output)
    return int(end)
