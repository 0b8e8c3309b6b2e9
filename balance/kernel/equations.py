"""The equations of motion about the contact line, written once. Sources and signs: `DEVELOPERS.md`, "The physics".

State X = [θ, θ̇, then (Ω, current) per wheel or (γ, γ̇) per gimballed unit]. The mass matrix couples θ̈ with each unit's
own acceleration only, so it is solved by elimination: each unit hands its share to the body row.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import inlined, part
from balance.kernel.layout import (
    BODY_DRAG,
    COULOMB,
    COUNT,
    COUPLING,
    DRIVE_TORQUE,
    E_GXS0,
    E_S0,
    FOOT_RADIUS,
    GIMBAL_DAMPING,
    GIMBAL_INERTIA,
    GIMBAL_SERVO,
    GIMBAL_SPRING,
    GRAVITY,
    HEIGHT,
    INERTIA,
    KAPPA,
    KIND,
    LEGS,
    MASS,
    MOMENTUM,
    OFFSET,
    OWN_INERTIA,
    RATE_LAG,
    ROLE,
    SPIN_HELD,
    STICTION,
    STIFF_COS,
    STIFF_SIN,
    TRANSVERSE,
    VISCOUS,
    WHEEL,
)
from balance.kernel.legs import legs_terms

Array = NDArray[np.float64]


@inlined
def sliding_drag(speed: float, coulomb: float, viscous: float) -> float:
    """Return f(Ω) in N·m of a wheel without stiction: Coulomb drag that fades linearly below 1 rad/s: no chatter."""
    return coulomb * min(max(speed, -1.0), 1.0) + viscous * speed


@inlined
def gravity_torque(theta: float, body: Array) -> float:
    """Return M(θ) in N·m, rolling feet of radius r included: G_s − m g r in place of G_s."""
    rolled = body[STIFF_SIN] - body[MASS] * body[GRAVITY] * body[FOOT_RADIUS]
    return float(rolled * np.sin(theta) + body[STIFF_COS] * np.cos(theta))


@inlined
def rolling(theta: float, theta_dot: float, body: Array) -> tuple[float, float]:
    """Return (what a foot ball adds to J(θ), what it adds to the torque); both 0 for point feet.

    J(θ) = J₀ − 2 m r[(h − r)(1 − cos θ) + δ sin θ],  m r[(h − r) sin θ + δ cos θ] θ̇².
    """
    r, m = body[FOOT_RADIUS], body[MASS]
    if r == 0.0:
        return 0.0, 0.0
    h, d = body[HEIGHT] - r, body[OFFSET]
    s, c = np.sin(theta), np.cos(theta)
    return -2.0 * m * r * (h * (1.0 - c) + d * s), m * r * (h * s + d * c) * theta_dot**2


STICKS = 0.05
"""rad/s: below it a wheel with stiction creeps instead of standing: too slow to matter, fast enough for a 0.1 ms step."""


@inlined
def wheel_drag(speed: float, coulomb: float, viscous: float, stiction: float) -> float:
    """Return f(Ω) in N·m. Without stiction Coulomb drag fades linearly below 1 rad/s: no chatter.

    With stiction F_s: [F_c + (F_s − F_c)/(1 + (Ω/1 rad/s)²)] sat(Ω/STICKS) + b Ω, the falling curve of Hess and Soom
    (1990; from memory).
    """
    if stiction <= coulomb:
        return float(sliding_drag(speed, coulomb, viscous))
    falling = coulomb + (stiction - coulomb) / (1.0 + speed * speed)
    return falling * min(max(speed / STICKS, -1.0), 1.0) + viscous * speed


@part
def gimbal_terms(i: int, gamma: float, gamma_dot: float, theta_dot: float,
                 units: Array) -> tuple[float, float, float, float]:
    """Return unit i's (inertia added to the body row, torque on it, coupling κ I_γ, push on one gimbal).

    With D = I_t − I_s(held): body row + count·(I_t − D σ²) θ̈, torque −H σ' γ̇ + 2 D σ σ' γ̇ θ̇ per rotor; gimbal row
    H σ' θ̇ − D σ σ' θ̇² − b γ̇ − k γ. The second rotor of a pair stands at −γ with −H.
    """
    H, It, held = units[i, MOMENTUM], units[i, TRANSVERSE], units[i, SPIN_HELD]
    a, b, D = units[i, E_S0], units[i, E_GXS0], It - held
    s, c = np.sin(gamma), np.cos(gamma)
    count = 1 if units[i, COUNT] < 1.5 else 2
    added, torque, push = 0.0, 0.0, 0.0
    for j in range(count):
        side = 1.0 if j == 0 else -1.0
        sigma = a * c + side * b * s
        slope = b * c - side * a * s                       # dσ/dγ at this rotor's own angle
        added += It - D * sigma * sigma
        torque += -H * slope * gamma_dot + side * 2.0 * D * sigma * slope * gamma_dot * theta_dot
        push += (H * slope * theta_dot - side * D * sigma * slope * theta_dot**2) / count
    coupling = units[i, KAPPA] * units[i, GIMBAL_INERTIA] if count == 1 else 0.0
    push -= units[i, GIMBAL_DAMPING] * gamma_dot + units[i, GIMBAL_SPRING] * gamma
    return added, torque, coupling, push


@inlined
def lean_acceleration(X: Array, inputs: Array, disturbance: float, body: Array, units: Array, out: Array) -> float:
    """Return θ̈; `out[3 + 2i]` in: NaN, or ±torque of a servo at its limit.

    Of legs that give it leaves χ̈ at θ̈ = 0 in `out[2 + 2i]` and in `out[3 + 2i]` what θ̈ takes off it.
    """
    added, push = rolling(X[0], X[1], body)
    mass = body[INERTIA] + added
    torque = gravity_torque(X[0], body) + push + disturbance - body[BODY_DRAG] * X[1]
    for i in range(units.shape[0]):
        if units[i, KIND] == WHEEL:
            if units[i, COUPLING] == 0.0:                  # square to the line, or no wheel at all: legs, the supply
                if units[i, ROLE] == LEGS:
                    more, line, coupling, own, back = legs_terms(X, i, body, units)
                    out[2 + 2 * i], out[3 + 2 * i] = (inputs[i] + back) / own, coupling / own
                    mass += more - coupling * out[3 + 2 * i]
                    torque += line - coupling * out[2 + 2 * i]
                continue
            net = inputs[i] - wheel_drag(X[2 + 2 * i], units[i, COULOMB], units[i, VISCOUS], units[i, STICTION])
            mass -= units[i, COUPLING] ** 2 / units[i, OWN_INERTIA]
            torque -= units[i, COUPLING] / units[i, OWN_INERTIA] * net
            continue
        more, line, coupling, back = gimbal_terms(i, X[2 + 2 * i], X[3 + 2 * i], X[1], units)
        mass += more
        torque += line
        if units[i, KIND] == GIMBAL_SERVO and np.isnan(out[3 + 2 * i]):
            torque -= coupling * (inputs[i] - X[3 + 2 * i]) * units[i, RATE_LAG]
        else:
            given = inputs[i] if units[i, KIND] != GIMBAL_SERVO else out[3 + 2 * i]
            mass -= coupling**2 / units[i, GIMBAL_INERTIA]
            torque -= coupling / units[i, GIMBAL_INERTIA] * (given + back)
    return float(torque / mass)


@inlined
def derivative(X: Array, inputs: Array, disturbance: float, body: Array, units: Array, out: Array) -> None:
    """Fill `out` with dX/dt. inputs (units,): wheel torque, torque per gimbal, or commanded gimbal rate.

    A position servo turns its gimbal at γ̈ = lag (commanded rate − γ̇) as long as its drive is strong enough for that
    and for what the flywheel pushes back; else it gives all it has.
    """
    for i in range(units.shape[0]):
        out[3 + 2 * i] = np.nan                            # every servo is first assumed to follow
    acceleration = lean_acceleration(X, inputs, disturbance, body, units, out)
    weak = False
    for i in range(units.shape[0]):
        if units[i, KIND] == GIMBAL_SERVO:
            need = servo_torque(i, X, inputs[i], acceleration, units)
            most = units[i, DRIVE_TORQUE]
            if abs(need) > most:
                out[3 + 2 * i] = most if need > 0.0 else -most
                weak = True
    if weak:
        acceleration = lean_acceleration(X, inputs, disturbance, body, units, out)
    out[0], out[1] = X[1], acceleration
    for i in range(units.shape[0]):
        unit_rates(i, X, inputs[i], acceleration, units, out)


@inlined
def servo_torque(i: int, X: Array, rate: float, acceleration: float, units: Array) -> float:
    """Return the drive torque per gimbal in N·m that a servo needs to follow a commanded rate."""
    _, _, coupling, back = gimbal_terms(i, X[2 + 2 * i], X[3 + 2 * i], X[1], units)
    wanted = (rate - X[3 + 2 * i]) * units[i, RATE_LAG]
    return float(units[i, GIMBAL_INERTIA] * wanted + coupling * acceleration - back)


@inlined
def unit_rates(i: int, X: Array, given: float, acceleration: float, units: Array, out: Array) -> None:
    """Fill the two rates of unit i. A wheel's second state, its current, belongs to the drive: rate 0 here."""
    if units[i, KIND] == WHEEL and units[i, COUPLING] == 0.0 and units[i, ROLE] == LEGS:
        out[2 + 2 * i] -= out[3 + 2 * i] * acceleration
        out[3 + 2 * i] = X[2 + 2 * i]
        return
    if units[i, KIND] == WHEEL:
        net = given - wheel_drag(X[2 + 2 * i], units[i, COULOMB], units[i, VISCOUS], units[i, STICTION])
        out[2 + 2 * i] = (net - units[i, COUPLING] * acceleration) / units[i, OWN_INERTIA]
        out[3 + 2 * i] = 0.0
        return
    limited = out[3 + 2 * i]
    out[2 + 2 * i] = X[3 + 2 * i]
    if units[i, KIND] == GIMBAL_SERVO and np.isnan(limited):
        out[3 + 2 * i] = (given - X[3 + 2 * i]) * units[i, RATE_LAG]
        return
    torque = limited if units[i, KIND] == GIMBAL_SERVO else given
    _, _, coupling, back = gimbal_terms(i, X[2 + 2 * i], X[3 + 2 * i], X[1], units)
    out[3 + 2 * i] = (torque + back - coupling * acceleration) / units[i, GIMBAL_INERTIA]
