"""The machine standing on two feet: what the contact line sees, before any stabiliser acts."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Stance:
    """One pair of feet.  World frame z up; vectors carry their frame (`_W` world, `_T` trunk).

    The line runs from `foot_from` (a) to `foot_to` (b) along `e`; `u` is up, square to the line; `w` = e × u
    is horizontal and points outward.  θ turns u toward w.  The centre of mass is at height·u + offset·w from
    the line.
    """

    name: str
    foot_from: str
    foot_to: str
    p_a_W: Array                    # (3,) m
    p_b_W: Array                    # (3,) m
    e_W: Array                      # (3,)
    u_W: Array                      # (3,)
    w_W: Array                      # (3,)
    R_WT: Array                     # (3, 3) trunk to world at θ = 0
    p_WT: Array                     # (3,) trunk origin in the world
    slope: float                    # rad, β: the line's own slope
    gravity: float                  # m/s²
    mass: float                     # kg
    height: float                   # m
    offset: float                   # m
    inertia_locked: float           # kg·m², about the line, every rotor locked (gimbals at angle zero)
    com_W: Array                    # (3,) m
    I_com_W: Array                  # (3, 3) kg·m², whole machine, rotors locked, about its centre of mass
    drag: float                     # N·m·s/rad about the line (bench bearings)
    foot_radius: float              # m
    friction: float
    lifted: dict[str, tuple[float, float]]   # foot -> (signed distance from the line along w, clearance) in m
    touch_down_lean: float | None   # rad > 0: inward turn from θ = 0 that lands a lifted foot; None: never
    outward_touch_down: float | None   # rad > 0: the same outward, by a foot lifted on that side
    joints: dict[str, tuple[float, ...]]     # leg -> joint angles (swing, hip, knee) in rad
    points_W: dict[str, Array]      # drawing: leg name -> (k, 3) hip, knee, foot; part name -> (1, 3) centre

    @property
    def length(self) -> float:
        """Distance between the two contacts in m."""
        return float(np.linalg.norm(self.p_b_W - self.p_a_W))

    @property
    def outward_is_fall_only(self) -> bool:
        """True when nothing lifted catches an inward fall (two-legged and lumped machines)."""
        return self.touch_down_lean is None
