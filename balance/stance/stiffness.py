"""How gravity topples a stance: its stiffness about the line, and where it balances."""

from __future__ import annotations

from math import atan2, cos

from balance.stance.record import Stance


def toppling_stiffness(stance: Stance) -> tuple[float, float]:
    """Return (G_s, G_c) in N·m: M(θ) = G_s sin θ + G_c cos θ, feet rolling on their radius."""
    weight = stance.mass * stance.gravity * cos(stance.slope)
    return weight * (stance.height - stance.foot_radius), weight * stance.offset


def balanced_lean(stance: Stance) -> float:
    """Return θ_b in rad, where gravity has no moment about the line: −atan(δ/(h − r))."""
    G_s, G_c = toppling_stiffness(stance)
    return -atan2(G_c, G_s)
