"""The dynamic model of one stance: constants, units about the line, the linear model, what no controller can beat."""

from __future__ import annotations

from dataclasses import dataclass
from math import nan

import numpy as np
from numpy.typing import NDArray

from balance.plant.legs import LegModes
from balance.stance.record import Stance

Array = NDArray[np.float64]


@dataclass(frozen=True)
class LinearModel:
    """ẋ = A x + B u about the balanced lean; SI, named; `u` are the units' own inputs.

    States: `lean`, `lean_rate`, then per unit `NAME.wheel_speed`, or `NAME.gimbal_angle`, `NAME.gimbal_rate`
    (no `NAME.` prefix where there is one unit).  Inputs: wheel torque (N·m on the wheel), gimbal torque (N·m per
    gimbal) or commanded gimbal rate (rad/s).  `disturbance` is the column of a torque about the line (+ outward) on
    the trunk.  Legs that give add `legs_lean`, `legs_lean_rate` at the end, and `on_legs`, the column of a torque on them.
    """

    states: tuple[str, ...]
    inputs: tuple[str, ...]
    A: Array             # (n, n)
    B: Array             # (n, m)
    disturbance: Array   # (n,)
    on_legs: Array | None = None   # (n,)


@dataclass(frozen=True)
class Unit:
    """One stabiliser as the contact line sees it."""

    name: str
    kind: str                    # "reaction wheel" | "gimballed flywheel" | "scissored pair"
    drive: str                   # "torque" | "rate": what the input commands
    axis_share: float            # α for wheels; e·(g × s₀) for gimballed
    inertia: float               # spin inertia about the rotor's axis, kg·m²
    momentum_capacity: float     # N·m·s about the line
    torque_limit: float          # N·m about the line, at rest
    input_limit: float           # on the unit's own input, SI
    speed_limit: float           # rad/s (wheel) or rad (gimbal stop)
    lag: float                   # rad/s bandwidth between input and torque; inf: none
    axis_T: Array                # (3,) spin axis, trunk frame
    gimbal_axis_T: Array | None  # (3,)
    at_T: Array                  # (3,)
    bias_speed: float = 0.0      # rad/s the law keeps a wheel turning at
    energy: float = 0.0          # J in all its flywheels at their spin speed; wheels: at their top speed
    spin_up: float = nan         # s to the spin speed by its own motor; NaN: no spin motor is stated
    spin_share: float = nan      # spin speed ÷ no-load speed of that motor: from 1 on it is never reached
    turn_rate: float = 0.0       # rad/s of its turntable; 0: it stands on none
    linked: bool = False         # the two gimbals of a pair are geared to each other


@dataclass(frozen=True)
class Bounds:
    """What no controller can beat (`physics.md`); z = lean + lean rate / p."""

    lean: float                  # rad from standstill
    lean_rate: float             # rad/s from the balanced lean
    impulse: float               # N·s at the height of the centre of mass
    torque_only_lean: float      # rad: T_max/G
    impulsive_lean: float        # rad: q_max/(J_rest p)
    limited_by: str              # "torque" | "momentum" | "speed line" | "gimbal rate" | "gimbal angle"


@dataclass(frozen=True)
class Plant:
    """Everything the design and the simulator need of one stance."""

    machine: str
    stance: Stance
    units: tuple[Unit, ...]
    inertia_locked: float        # J
    inertia_free: float          # J_rest
    stiffness: float             # G, N·m/rad
    pole: float                  # p = √(G/J_rest), rad/s
    unstable_pole: float         # largest eigenvalue of A
    doubling_time: float         # s
    balanced_lean: float         # θ_b, rad
    momentum_capacity: float     # N·m·s about the line, all units
    torque_limit: float          # N·m about the line, all units, at rest
    bounds: Bounds
    model: LinearModel
    momentum_row: Array          # (n,): stored momentum about the line = momentum_row · x  (linear)
    allotment: Array             # (m,): inputs = allotment · v, v the line command (single unit: v is its own input)
    levelling: Array             # (m, n): inputs += -levelling · x; moves no torque about the line, levels wheel speeds
    body_parameters: Array       # kernel.layout, (BODY_SIZE,)
    unit_parameters: Array       # kernel.layout, (units, UNIT_SIZE)
    sensor_parameters: Array     # kernel.sensing, (SENSOR_SIZE,)
    supply_parameters: Array | None = None   # kernel.layout, (UNIT_SIZE,): the supply all wheels share; None: no limit
    legs_parameters: Array | None = None     # kernel.layout, (UNIT_SIZE,): legs that give; None: they are stiff
    legs: LegModes | None = None             # what their give does
    stiff: Plant | None = None               # the same machine on stiff legs, where these give

    @property
    def for_law(self) -> Plant:
        """The plant a law is made for: what firmware measures is the trunk, on legs taken as stiff."""
        return self.stiff or self

    @property
    def acts(self) -> bool:
        """False when every stabiliser is square to the line: nothing can be done about this line."""
        return self.torque_limit > 0.0
