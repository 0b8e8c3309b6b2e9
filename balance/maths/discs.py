"""Stress in a spinning disc of varying thickness: plane stress, axially symmetric, one elastic material.

Equilibrium d(h r σ_r)/dr − h σ_θ + ρ ω² r² h = 0 with compatible strains.  The profile is cut into rings of one
thickness each, in which σ_r and σ_θ are known in closed form (Lamé); from ring to ring h σ_r and the displacement pass
unchanged (Grammel's method, from memory; Timoshenko & Goodier, "Theory of Elasticity", from memory).  A wheel of steps
is exact within that theory; a smooth profile converges with the square of the number of rings.  Fillets, holes, keys
and glue are not in it.
"""

from __future__ import annotations

from collections.abc import Callable
from math import inf, sqrt
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

RINGS = 400
"""Rings a smooth profile is cut into: stresses to 1e-5 of the peak for profiles that halve from bore to rim."""


class Stresses(NamedTuple):
    """Stresses at ω = 1 rad/s; every stress grows with ω²."""

    radii: Array          # (n,) m, both sides of every ring's edges and wherever a ring has its largest stress
    radial: Array         # (n,) Pa·s²
    hoop: Array           # (n,) Pa·s²

    @property
    def peak(self) -> float:
        """Largest principal stress in Pa·s²."""
        return float(max(self.radial.max(), self.hoop.max()))


def stresses(edges: Array, heights: Array, density: float, poisson: float, rim_load: float = 0.0) -> Stresses:
    """Return the stresses of a free disc that spins at 1 rad/s.

    edges (n + 1,): radii in m, rising, the first 0 for a disc without a bore; heights (n,): thickness in m of each
    ring; density in kg/m³; `rim_load`: radial stress at the rim in Pa·s² (blades, a shrunk ring).  Cost: 3n small steps.
    """
    c_r, c_t = (3.0 + poisson) / 8.0 * density, (1.0 + 3.0 * poisson) / 8.0 * density
    solid = float(edges[0]) == 0.0
    lame = _both(edges, heights, poisson, c_r, c_t, solid)
    free = (lame[0][-1], lame[1][-1])
    at_rim = [_radial(a, b, edges[-1], c) for (a, b), c in zip(free, (c_r, 0.0), strict=True)]
    share = (rim_load - at_rim[0]) / at_rim[1]
    A = np.array([p[0] + share * q[0] for p, q in zip(*lame, strict=True)])            # (n,)
    B = np.array([p[1] + share * q[1] for p, q in zip(*lame, strict=True)])            # (n,)
    return _gathered(edges, A, B, c_r, c_t)


def cut(thickness: Callable[[float], float], bore: float, outer: float, rings: int = RINGS) -> tuple[Array, Array]:
    """Return (edges (rings + 1,), heights (rings,)) in m of a smooth profile; each ring has its thickness midway."""
    edges = np.linspace(bore, outer, rings + 1)
    return edges, np.array([thickness(r) for r in 0.5 * (edges[:-1] + edges[1:])])


def mean_hoop(edges: Array, heights: Array, density: float) -> float:
    """Return the mean hoop stress over a cut through the axis at ω = 1 rad/s in Pa·s²: ρ ∫h r² dr / ∫h dr.

    A ductile rotor bursts when it reaches the strength (Robinson's criterion, from memory).
    """
    cubes, widths = np.diff(edges**3) / 3.0, np.diff(edges)
    return float(density * (heights @ cubes) / (heights @ widths))


def inertia(edges: Array, heights: Array, density: float) -> tuple[float, float]:
    """Return (mass in kg, inertia about the axis in kg·m²)."""
    mass = np.pi * density * (heights @ np.diff(edges**2))
    return float(mass), float(0.5 * np.pi * density * (heights @ np.diff(edges**4)))


def speed_at(stress_at_one: float, allowed: float) -> float:
    """Return the speed in rad/s at which a stress that grows with ω² reaches `allowed` (Pa)."""
    return sqrt(allowed / stress_at_one) if stress_at_one > 0.0 else inf


def uniform_strength(density: float, speed: float, stress: float, radius: float) -> float:
    """Return h(r)/h(0) of the disc whose stress is the same everywhere: e^(−ρ ω² r²/2σ)."""
    return float(np.exp(-density * speed**2 * radius**2 / (2.0 * stress)))


def _both(edges: Array, heights: Array, poisson: float, c_r: float, c_t: float,
          solid: bool) -> tuple[list[tuple[float, float]], list[tuple[float, float]]]:
    """Return Lamé's (A, B) of every ring: with the load and no free stress at the bore, and of a unit of it alone."""
    found: list[list[tuple[float, float]]] = []
    for load_r, load_t, unit in ((c_r, c_t, 0.0), (0.0, 0.0, 1.0)):
        radial, hoop = (unit, unit) if solid else (0.0, unit)
        rings: list[tuple[float, float]] = []
        for i, height in enumerate(heights):
            inner = float(edges[i])
            if i > 0:
                before = radial
                radial = before * float(heights[i - 1]) / float(height)
                hoop += poisson * (radial - before)
            s_r, s_t = radial + load_r * inner**2, hoop + load_t * inner**2
            a, b = 0.5 * (s_r + s_t), 0.5 * (s_t - s_r) * inner**2
            rings.append((a, b))
            outer = float(edges[i + 1])
            radial, hoop = _radial(a, b, outer, load_r), _hoop(a, b, outer, load_t)
        found.append(rings)
    return found[0], found[1]


def _gathered(edges: Array, A: Array, B: Array, c_r: float, c_t: float) -> Stresses:
    """Return the stresses at both edges of each ring and where they are largest inside it."""
    radii, radial, hoop = [], [], []
    for i, (a, b) in enumerate(zip(A, B, strict=True)):
        inner, outer = edges[i], edges[i + 1]
        tops = [(max(b, 0.0) / c_r) ** 0.25, (max(-b, 0.0) / c_t) ** 0.25]
        for r in (inner, outer, *(t for t in tops if inner < t < outer)):
            radii.append(r)
            radial.append(_radial(a, b, r, c_r))
            hoop.append(_hoop(a, b, r, c_t))
    return Stresses(np.array(radii), np.array(radial), np.array(hoop))


def _radial(a: float, b: float, r: float, c: float) -> float:
    return a - (b / r**2 if r > 0.0 else 0.0) - c * r**2


def _hoop(a: float, b: float, r: float, c: float) -> float:
    return a + (b / r**2 if r > 0.0 else 0.0) - c * r**2
