"""The controller as data: one discrete state-space law that the kernel's tick, the C generator and the tests all read."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Law:
    """One law for one stance.

    Each sample, from measurements y and memory x::

        v  = C x + D y               the line command (single unit: its own input; several: torque about the line)
        v' = clip(v, ±output_limit)
        x⁺ = A x + B y + E v'        the memory sees the limited command: past commands, anti-windup, observer
        inputs = allotment · v' - levelling · y     then each clipped to ±input_limits

    While the machine is held (more feet down) v' is 0, and a law whose memory rests on a model of the fall moves it on by
    x⁺ = held_A x + held_B y instead.  `measurements` are names of the plant model's states, lean first.
    """

    kind: str                       # "lqr" | "pid"
    sample_time: float              # s
    latency: float                  # s, sampling instant to command
    measurements: tuple[str, ...]   # (m,)
    memory: tuple[str, ...]         # (k,) e.g. "torque_1_ago", "torque_lag", "integral"
    A: Array                        # (k, k)
    B: Array                        # (k, m)
    E: Array                        # (k,)
    C: Array                        # (k,)
    D: Array                        # (m,)
    output_limit: float
    allotment: Array                # (units,)
    levelling: Array                # (units, m)
    input_limits: Array             # (units,)
    unit: str                       # of v: "N*m" | "rad/s"
    K: Array                        # (k_lqr,) u = -K x on `states` for lqr, else empty
    states: tuple[str, ...]         # names that go with K
    gains: dict[str, float]         # pid: kp, ki, kd, …; empty for lqr
    held_A: Array | None = None     # (k, k) in place of A while the machine is held: v' = 0 and the model does not hold
    held_B: Array | None = None     # (k, m)
    residual: float | None = None   # lqr: of its Riccati equation, relative to the largest weight
