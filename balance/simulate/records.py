"""Trials as the simulator runs them, and what it measured. No verdict on requirements here: only what happened."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Trace:
    """Recorded time histories of one trial, one row per sample of the controller."""

    time: Array            # (n,) s
    lean: Array            # (n,) rad from the balanced lean
    lean_rate: Array       # (n,) rad/s
    torque: Array          # (n,) N·m about the line taken from the body by all units (dq/dt)
    torque_limit: Array    # (n,) N·m available about the line at this speed, voltage and gimbal angle
    momentum: Array        # (n,) N·m·s stored about the line
    command: Array         # (n,) the law's limited line command
    disturbance: Array     # (n,) N·m about the line
    units: Array           # (n, 2·units) kernel states of the units: (Ω, i) or (γ, γ̇)


@dataclass(frozen=True)
class FootLoad:
    """What the ground had to give one foot in a trial. After a foot has lifted or slipped the motion is no longer true."""

    foot: str
    least_load: float           # N, least normal force
    friction_needed: float      # largest |tangential| / normal while it carried load
    lift_off: float             # s when it first carried no load; NaN: it stayed on the ground
    slip: float                 # s when it first needed more than the feet's friction; NaN: it did not slip


@dataclass(frozen=True)
class TrialResult:
    """What happened in one trial, one direction."""

    name: str
    stance: str
    toward: str                 # "outward" | "inward"
    verdict: str                # "recovered" | "touched down" | "fell outward" | "fell inward" | "did not settle"
    reason: str                 # which limit was met first and when, in words; "" when none
    peak_lean: float            # rad, |lean|
    peak_lean_rate: float       # rad/s, |lean rate|
    settling_time: float        # s after the last scheduled event; inf when it never settled
    peak_torque: float          # N·m about the line
    torque_saturated: float     # s spent at the torque limit
    peak_momentum: float        # N·m·s about the line
    momentum_used: float        # share of capacity
    rms_torque: float           # N·m
    peak_current: float         # A, largest of the motors (0 for gimbal drives)
    peak_bus_power: float       # W
    friction_needed: float      # largest |tangential| / normal of either foot; blows that take no time are not in it
    lift_off: bool              # a foot carried no load at one moment
    feet: tuple[FootLoad, ...]  # foot a, foot b; none where no legs are known: then the two above count both together
    standing_swing: float       # rad, amplitude of the lean about its trend in the last second; inf when it fell
    end_lean: float             # rad
    end_momentum: float         # N·m·s
    peak_bus_voltage: float     # V; NaN without a supply that wheels draw on, as the next two
    deepest_sag: float          # V, most below the supply's own voltage
    peak_supply_current: float  # A
    trace: Trace | None
