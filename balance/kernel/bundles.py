"""The flat arrays of one trial, bundled by what they are for: named tuples that compiled code takes apart."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Places = NDArray[np.int64]


class LawArrays(NamedTuple):
    """The law (`design.law.Law`) with m measurements, k places of memory, u units."""

    A: Array              # (k, k)
    B: Array              # (k, m)
    E: Array              # (k,)
    C: Array              # (k,)
    D: Array              # (m,)
    output_limit: float
    allotment: Array      # (u,)
    levelling: Array      # (u, m)
    input_limits: Array   # (u,)
    line_share: Array     # (u,) torque about the line per input; 0: takes nothing over
    places: Places        # (m,) where each measurement stands in X; 0 is read as lean
    sample_time: float    # s
    latency: float        # s


class Events(NamedTuple):
    """What happens to the machine. `breaks` holds every instant of sudden change, ascending."""

    torques: Array        # (s, TORQUE_SIZE)
    jumps: Array          # (j, JUMP_SIZE) by time
    breaks: Array         # (b,) s
    release: float        # s: held until then; 0: free from the start
    release_rate: float   # rad/s at release
    lasts: float          # s
    longest: float        # s: longest sub-step


class Output(NamedTuple):
    """What a trial fills."""

    history: Array        # (samples + 1, 2): lean, line momentum at each sample and at the end
    trace: Array          # (samples + 1, TRACE_SIZE + 2 u), or no rows: nothing recorded
    metrics: Array        # (METRIC_SIZE,) given as zeros
    first: Array          # (u + 1, LIMITS, 2) given as inf


class Work(NamedTuple):
    """Working arrays of one trial."""

    body: Array           # copy: an offset shift changes it
    live: Array           # copy of the units: a gimbal on its stop changes it
    held: Places          # (u,) 1, -1: on its upper, lower stop
    met: Places           # (u,) limit met in this sub-step
    rate: Array           # (n,) rates at the stage at hand
    total: Array          # (n,) the step's sum
    probe: Array          # (n,) the stage's state
    kept: Array           # (n,)
    inputs: Array         # (u,) inputs of the equations of motion
    slopes: Array         # (u,) rates of the motor currents
    asked: Array          # (u,) what the law asks now
    commands: Array       # (u,) the same, standing still for a gimbal on its stop
    active: Array         # (s, TORQUE_SIZE) torques that act in this piece
    at: Places            # next jump, next break, number of active torques, law limited in this period
    x: Array              # (k,) the law's memory
    spare: Array          # (k,)
    y: Array              # (m,)
    queue: Array          # (whole periods of latency + 2, u) inputs computed, newest first
    line: Array           # the law's limited line command, time reached
    spare_metrics: Array  # for steps that only look ahead
    spare_first: Array
