"""Many recoveries of one law at once: machines, starts, sizes of the disturbance and seeds vary, the trial stays."""

from __future__ import annotations

import math
import os
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.kernel import lane_rows as at
from balance.kernel import outcome
from balance.kernel.bundles import MEMORY, Events, LawArrays, fresh_work
from balance.kernel.lane_rows import LANES
from balance.kernel.lanes import run_block
from balance.kernel.run import run_trial
from balance.kernel.standing import standing_lean
from balance.simulate.blocks import filled, machine_rows, not_covered, rows_needed
from balance.simulate.setup import empty_output
from balance.simulate.story import SETTLED_LEAST, SETTLED_SHARE, STAYS, settling_time

Array = NDArray[np.float64]

VERDICTS = ("recovered", "fell outward", "fell inward", "touched down", "did not settle")
"""What `Recoveries.verdict` counts from 0; the first four stand as the kernel's `outcome` does."""


@dataclass(frozen=True)
class Batch:
    """n trials that differ in machine, start, size and noise."""

    bodies: Array      # (n, BODY_SIZE) rows of `kernel.layout`, `FELL` included
    units: Array       # (n, u, UNIT_SIZE)
    states: Array      # (n, 2 + 2u) where each starts
    memory: Array      # (n, k) the law's memory at the start
    scale: Array       # (n,) of every torque and blow of the trial
    seeds: NDArray[np.int64]   # (n,) of the sensor noise, not negative
    capacity: Array    # (n,) N·m·s the units can store about the line


@dataclass(frozen=True)
class Recoveries:
    """What happened to each of n trials; the same meanings as in `records.TrialResult`."""

    verdict: NDArray[np.int64]   # (n,) place in VERDICTS
    peak_lean: Array             # (n,) rad
    peak_lean_rate: Array        # (n,) rad/s
    settling_time: Array         # (n,) s; inf: never
    peak_torque: Array           # (n,) N·m
    torque_saturated: Array      # (n,) s
    peak_momentum: Array         # (n,) N·m·s
    rms_torque: Array            # (n,) N·m
    peak_current: Array          # (n,) A
    peak_bus_power: Array        # (n,) W
    end_time: Array              # (n,) s
    end_lean: Array              # (n,) rad
    end_momentum: Array          # (n,) N·m·s
    in_lanes: bool               # False: each trial was run by itself, for `why`
    why: str

    @property
    def counts(self) -> dict[str, int]:
        """How many trials ended in each verdict."""
        return {word: int(np.count_nonzero(self.verdict == k)) for k, word in enumerate(VERDICTS)}


def recoveries(batch: Batch, law: LawArrays, events: Events, quiet_from: float, end_torque: float = 0.0,
               threads: int | None = None) -> Recoveries:
    """Run a batch. `quiet_from`: s, when the last scheduled change is over; `end_torque`: N·m that stays on.

    Results are the same bit for bit for any number of threads and wherever a batch is cut. What lanes do not cover
    (`Recoveries.why`) runs through the single kernel, one trial after the other.
    """
    samples = math.ceil(events.lasts / law.sample_time - 1e-9)
    time = np.minimum(np.arange(samples + 1) * law.sample_time, events.lasts)
    earlier = int(np.searchsorted(time, events.lasts - max(0.1 * events.lasts, STAYS)))
    why = not_covered(batch.bodies, batch.units, law, events)
    if why:
        rows = np.array([_alone(batch, i, law, events, quiet_from, end_torque, earlier) for i in range(len(batch.scale))]).T
    else:
        rows = _in_lanes(batch, law, events, quiet_from, end_torque, threads, earlier)
    return _told(rows, batch, events.lasts - time[earlier], why)


def _in_lanes(batch: Batch, law: LawArrays, events: Events, quiet_from: float, end_torque: float, threads: int | None,
              earlier: int) -> Array:
    """Return the answers of all trials, (RESULTS, n)."""
    count = len(batch.scale)
    machines = machine_rows(batch.bodies, batch.units, batch.scale, batch.seeds.astype(float), end_torque)
    out = np.empty((at.RESULTS, count))
    samples = math.ceil(events.lasts / law.sample_time - 1e-9)
    settling = (quiet_from, SETTLED_SHARE, SETTLED_LEAST, STAYS)
    workers = min(threads or cores(), max(math.ceil(count / LANES), 1))

    def run(worker: int) -> None:
        block, history = _aligned(rows_needed(law) * LANES), _aligned((samples + 1) * LANES)
        active = np.zeros((len(events.torques), outcome.TORQUE_SIZE))
        for begin in range(worker * LANES, count, workers * LANES):
            these = slice(begin, min(begin + LANES, count))
            filled(block.reshape(-1, LANES), machines[:, these], batch.states[these], batch.memory[these])
            run_block(block, batch.units.shape[1], law, events, active, history, earlier, settling)
            out[:, these] = block.reshape(-1, LANES)[:at.RESULTS, :these.stop - begin]

    with ThreadPoolExecutor(workers) as pool:
        list(pool.map(run, range(workers)))
    return out


def cores() -> int:
    """Return how many processor cores this process may use; where the system does not say, all there are."""
    allowed = getattr(os, "sched_getaffinity", None)
    return len(allowed(0)) if allowed else os.cpu_count() or 1


def _aligned(size: int) -> Array:
    """Return zeros that begin on a cache line."""
    raw = np.zeros(size + 8)
    skip = -raw.ctypes.data % 64 // 8
    return raw[skip:skip + size]


def _alone(batch: Batch, i: int, law: LawArrays, events: Events, quiet_from: float, end_torque: float,
           earlier: int) -> Array:
    """Return the answers of trial i run by the single kernel, (RESULTS,), in the rows of the lanes."""
    torques, jumps, scale = events.torques.copy(), events.jumps.copy(), batch.scale[i]
    torques[:, [outcome.LEVEL, outcome.SLOPE, outcome.SWING]] *= scale
    jumps[:, outcome.KICK] *= scale
    happens = events._replace(torques=torques, jumps=jumps, seed=int(batch.seeds[i]))
    samples = math.ceil(events.lasts / law.sample_time - 1e-9)
    output = empty_output(batch.units.shape[1], samples, False)
    work = fresh_work(batch.bodies[i], batch.units[i], law, happens)
    work.numbers[MEMORY, :batch.memory.shape[1]] = batch.memory[i]
    ended = run_trial(batch.states[i].copy(), batch.units[i], law, happens, work, output)
    metrics, row = output.metrics, np.zeros(at.RESULTS)
    taken = int(metrics[outcome.SAMPLES])
    time = np.minimum(np.arange(taken) * law.sample_time, metrics[outcome.END_TIME])
    row[at.END], row[at.SETTLED] = ended, math.inf
    if ended == outcome.RAN:
        target = standing_lean(batch.bodies[i], batch.units[i], end_torque * scale)
        row[at.SETTLED] = settling_time(time, output.history[:taken, 0], target, quiet_from)
        row[at.EARLIER] = output.history[earlier, 1]
    for to, place in ((at.PEAK_LEAN, outcome.PEAK_LEAN), (at.PEAK_RATE, outcome.PEAK_RATE),
                      (at.PEAK_TORQUE, outcome.PEAK_TORQUE), (at.PEAK_MOMENTUM, outcome.PEAK_MOMENTUM),
                      (at.PEAK_CURRENT, outcome.PEAK_CURRENT), (at.PEAK_POWER, outcome.PEAK_POWER),
                      (at.SATURATED, outcome.SATURATED), (at.TORQUE_SQUARED, outcome.TORQUE_SQUARED),
                      (at.END_TIME, outcome.END_TIME), (at.END_LEAN, outcome.END_LEAN),
                      (at.END_MOMENTUM, outcome.END_MOMENTUM)):
        row[to] = metrics[place]
    return row


def _told(rows: Array, batch: Batch, span: float, why: str) -> Recoveries:
    """Return the answers, (RESULTS, n), by name; the verdict by the rule of a single trial."""
    growth = (np.abs(rows[at.END_MOMENTUM]) - np.abs(rows[at.EARLIER])) / span
    with np.errstate(divide="ignore", invalid="ignore"):
        full_in = np.where(growth > 0.0, (batch.capacity - np.abs(rows[at.END_MOMENTUM])) / growth, np.inf)
    verdict = rows[at.END].astype(np.int64)
    lasts = rows[at.END_TIME]
    unsettled = (verdict == 0) & (np.isinf(rows[at.SETTLED]) | (full_in < lasts))
    verdict[unsettled] = VERDICTS.index("did not settle")
    return Recoveries(
        verdict, rows[at.PEAK_LEAN], rows[at.PEAK_RATE], rows[at.SETTLED], rows[at.PEAK_TORQUE], rows[at.SATURATED],
        rows[at.PEAK_MOMENTUM], np.sqrt(rows[at.TORQUE_SQUARED] / lasts), rows[at.PEAK_CURRENT], rows[at.PEAK_POWER], lasts,
        rows[at.END_LEAN], rows[at.END_MOMENTUM], not why, why)
