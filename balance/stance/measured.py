"""Bench results in place of CAD: what was measured, how sure it is, and what it does to the machine's pole.

Measured is the whole machine in one stance's pose, rotors locked.  The difference to CAD is carried by the
trunk into every other stance: the legs' masses are the best known of all.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import hypot, sqrt

import numpy as np
from numpy.typing import NDArray

from balance.machine.machine import Machine
from balance.maths.inertia import about_line, rotated, shifted
from balance.maths.tensor_fit import fitted_tensor
from balance.stance.record import Stance
from balance.stance.rotors import spin_about_line
from balance.stance.stiffness import toppling_stiffness

Array = NDArray[np.float64]

COVERAGE = 2.0
"""A difference of more than this many standard uncertainties is one that chance does not explain (about 95 %)."""


@dataclass(frozen=True)
class Moment:
    """A measured moment of inertia about an axis through the centre of mass."""

    axis_T: Array          # (3,) unit, trunk axes
    value: float           # kg·m²
    uncertainty: float     # kg·m², standard


@dataclass(frozen=True)
class Bench:
    """What was measured of the whole machine; NaN for what was not."""

    mass: float            # kg
    mass_uncertainty: float
    centre_T: Array        # (3,) m, trunk axes
    centre_uncertainty: Array   # (3,) m
    moments: tuple[Moment, ...]


@dataclass(frozen=True)
class Correction:
    """What the trunk carries more (or less) than CAD says: mass and moments about the trunk's origin, its axes."""

    mass: float            # kg
    first_T: Array         # (3,) kg·m
    I_origin_T: Array      # (3, 3) kg·m²


@dataclass(frozen=True)
class Disagreement:
    """One measured number beside CAD's.  `pole_change` is what it alone does to p = √(G/J_rest), as a share of p."""

    quantity: str
    unit: str
    cad: float
    measured: float
    uncertainty: float
    pole_change: float

    @property
    def beyond(self) -> bool:
        """True where the difference is more than the uncertainty explains."""
        return abs(self.measured - self.cad) > COVERAGE * self.uncertainty


def pole(machine: Machine, stance: Stance) -> float:
    """Return p = √(G/J_rest) in rad/s, rotors free to spin, at the pose of the stance; 0 where it does not topple."""
    G_s, G_c = toppling_stiffness(stance)
    free = stance.inertia_locked - spin_about_line(machine, stance.R_WT.T @ stance.e_W)
    return sqrt(hypot(G_s, G_c) / free) if G_s > 0.0 else 0.0


def measured_stance(stance: Stance, bench: Bench) -> Stance:
    """Return the stance with the bench's numbers where there are any and CAD's where there are none."""
    mass = stance.mass if np.isnan(bench.mass) else bench.mass
    cad_T = stance.R_WT.T @ (stance.com_W - stance.p_WT)
    centre_T = np.where(np.isnan(bench.centre_T), cad_T, bench.centre_T)
    I_T = rotated(stance.I_com_W, stance.R_WT.T)
    if bench.moments:
        I_T = fitted_tensor(I_T, np.array([m.axis_T for m in bench.moments]), np.array([m.value for m in bench.moments]))
    return _with_masses(stance, mass, stance.p_WT + stance.R_WT @ centre_T, rotated(I_T, stance.R_WT))


def correction(cad: Stance, measured: Stance) -> Correction:
    """Return what the trunk must carry so that `cad` has the masses of `measured` (one pose)."""
    masses = []
    for s in (measured, cad):
        arm_T = s.R_WT.T @ (s.com_W - s.p_WT)
        masses.append((s.mass, s.mass * arm_T, shifted(rotated(s.I_com_W, s.R_WT.T), s.mass, arm_T)))
    (m, first, I_origin), (m_cad, first_cad, I_cad) = masses
    return Correction(m - m_cad, first - first_cad, I_origin - I_cad)


def corrected(stance: Stance, trunk: Correction) -> Stance:
    """Return any stance of the same machine with the trunk's correction carried along."""
    arm_T = stance.R_WT.T @ (stance.com_W - stance.p_WT)
    mass = stance.mass + trunk.mass
    centre_T = (stance.mass * arm_T + trunk.first_T) / mass
    I_origin = shifted(rotated(stance.I_com_W, stance.R_WT.T), stance.mass, arm_T) + trunk.I_origin_T
    I_T = I_origin - shifted(np.zeros((3, 3)), mass, centre_T)
    return _with_masses(stance, mass, stance.p_WT + stance.R_WT @ centre_T, rotated(I_T, stance.R_WT))


def disagreements(machine: Machine, stance: Stance, bench: Bench) -> tuple[Disagreement, ...]:
    """Return every measured number beside CAD's, with what each alone does to the pole."""
    before = pole(machine, stance)
    nothing = Bench(np.nan, 0.0, np.full(3, np.nan), np.zeros(3), ())
    found = []

    def add(name: str, unit: str, cad: float, value: float, sigma: float, alone: Bench) -> None:
        after = pole(machine, measured_stance(stance, alone))
        found.append(Disagreement(name, unit, cad, value, sigma, after / before - 1.0 if before else 0.0))

    if not np.isnan(bench.mass):
        add("mass", "kg", stance.mass, bench.mass, bench.mass_uncertainty, replace(nothing, mass=bench.mass))
    cad_T = stance.R_WT.T @ (stance.com_W - stance.p_WT)
    for i, axis in enumerate("xyz"):
        if not np.isnan(bench.centre_T[i]):
            only = np.where(np.arange(3) == i, bench.centre_T, np.nan)
            add(f"centre {axis}", "m", float(cad_T[i]), float(bench.centre_T[i]), float(bench.centre_uncertainty[i]),
                replace(nothing, centre_T=only))
    I_T = rotated(stance.I_com_W, stance.R_WT.T)
    for moment in bench.moments:
        x, y, z = moment.axis_T
        add(f"inertia about ({x:.3g}, {y:.3g}, {z:.3g})", "kg*m^2", float(moment.axis_T @ I_T @ moment.axis_T),
            moment.value, moment.uncertainty, replace(nothing, moments=(moment,)))
    return tuple(found)


def _with_masses(stance: Stance, mass: float, com_W: Array, I_com_W: Array) -> Stance:
    arm = com_W - stance.p_a_W
    return replace(stance, mass=mass, com_W=com_W, I_com_W=I_com_W, height=float(arm @ stance.u_W),
                   offset=float(arm @ stance.w_W), inertia_locked=about_line(I_com_W, mass, arm, stance.e_W))
