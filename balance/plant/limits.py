"""What no controller can beat: closed forms for z = lean + lean rate / p (`physics.md` of the agreement; all linear).

One unstable mode ż = p z + (d − T)/(J_rest p): z can be brought back only while p-discounted torque suffices,
|z| < (1/(J_rest p)) ∫ e^{−ps} T(s) ds along the all-out manoeuvre.  Null-controllable sets under bounded input:
Hu & Lin (from memory); linear inverted pendulum plus flywheel: Pratt, Carff, Drakunov, Goswami 2006 (from memory).
"""

from __future__ import annotations

from collections.abc import Callable
from math import cos, exp, inf, isinf, sin

import numpy as np

PANELS = 4000
"""Of four Gauss points each: a kink of T(s) between two panels costs less than 1e-6 of the whole."""


def torque_only(torque: float, stiffness: float) -> float:
    """Return T_max/G in rad."""
    return torque / stiffness


def torque_and_momentum(torque: float, momentum: float, stiffness: float, pole: float) -> float:
    """Return (T_max/G)(1 − e^{−p q_max/T_max}) in rad."""
    return torque / stiffness * (1.0 - exp(-pole * momentum / torque)) if torque > 0.0 else 0.0


def falling_line(torque: float, momentum: float, inertia: float, pole: float) -> float:
    """Return (T₀/(J_rest p))/(p + T₀/q₀) in rad: torque falls linearly to zero at momentum q₀."""
    return torque / (inertia * pole) / (pole + torque / momentum)


def impulsive(momentum: float, inertia: float, pole: float) -> float:
    """Return q_max/(J_rest p) in rad: all momentum at once."""
    return momentum / (inertia * pole)


def any_law(torque: Callable[[float], float], until: float, inertia: float, pole: float) -> float:
    """Return (1/(J_rest p)) ∫₀^until e^{−ps} T(s) ds in rad by quadrature; `until` may be inf."""
    end = min(until, 60.0 / pole)
    edges = np.linspace(0.0, end, PANELS + 1)
    nodes, weights = np.polynomial.legendre.leggauss(4)
    half = 0.5 * end / PANELS
    times = (edges[:-1, None] + half * (1.0 + nodes)).ravel()
    values = np.array([exp(-pole * s) * torque(float(s)) for s in times])
    return float(half * (values.reshape(PANELS, 4) @ weights).sum()) / (inertia * pole)


def late(bound: float, pole: float, latency: float) -> float:
    """Return a bound that is left when nothing acts for `latency` s: e^{−p t_d} of it."""
    return bound * exp(-pole * latency)


def wheel_discounted(torque: float, corner: float, decay: float, end: float, pole: float) -> float:
    """Return ∫ e^{−ps} T(s) ds in N·m·s of a wheel: constant to `corner` s, then falling as e^{−t/decay} to `end` s."""
    if torque == 0.0:
        return 0.0
    held = min(corner, end)
    total = torque * (1.0 - exp(-pole * held)) / pole if not isinf(held) else torque / pole
    if end > corner:
        rate = pole + 1.0 / decay
        tail = 0.0 if isinf(end) else exp(-rate * (end - corner))
        total += torque * exp(-pole * corner) * (1.0 - tail) / rate
    return total


def gimbal_discounted(momentum: float, rate: float, stop: float, pole: float) -> float:
    """Return ∫₀^{γ_max/γ̇_max} e^{−ps} h γ̇_max cos(γ̇_max s) ds in N·m·s; `momentum` h = count·H·e·(g × s₀)."""
    end = stop / rate
    inner = exp(-pole * end) * (rate * sin(stop) - pole * cos(stop)) + pole
    return momentum * rate * inner / (pole**2 + rate**2)


def limited_by(lean: float, torque_lean: float, impulsive_lean: float, gimballed: bool) -> str:
    """Say which limit holds the bound: the one whose own bound is nearer."""
    short_of_torque = 1.0 - lean / torque_lean if torque_lean > 0.0 else inf
    short_of_momentum = 1.0 - lean / impulsive_lean if impulsive_lean > 0.0 else inf
    words = ("gimbal rate", "gimbal angle") if gimballed else ("torque", "momentum")
    return words[int(np.argmin([short_of_torque, short_of_momentum]))]
