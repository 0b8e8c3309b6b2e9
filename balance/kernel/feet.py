"""What the ground must give the feet while the machine moves about the line: in all, and on each of the two."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import inlined
from balance.kernel.layout import (
    AXIS_U,
    AXIS_W,
    COM_ALONG,
    COUNT,
    COUPLING_U,
    COUPLING_W,
    E_GXS0,
    E_S0,
    FOOT_RADIUS,
    GIMBAL_INERTIA,
    GRAVITY,
    GRAVITY_ALONG,
    GXS0_U,
    GXS0_W,
    HEIGHT,
    KIND,
    LENGTH,
    MASS,
    MOMENTUM,
    OFFSET,
    PRODUCT_U,
    PRODUCT_W,
    S0_U,
    S0_W,
    SPIN_HELD,
    TRANSVERSE,
    WHEEL,
)
from balance.kernel.legs import hinge_moves

Array = NDArray[np.float64]


@inlined
def centre(theta: float, body: Array) -> tuple[float, float]:
    """Return (y_c, z_c) in m: the centre of mass across and above the centres of the foot balls, at lean θ."""
    s, c = np.sin(theta), np.cos(theta)
    h = body[HEIGHT] - body[FOOT_RADIUS]
    return h * s + body[OFFSET] * c, h * c - body[OFFSET] * s


@inlined
def foot_forces(X: Array, dX: Array, push: float, body: Array, units: Array) -> tuple[float, float]:
    """Return (force across the line along w, sum of the normal forces) of the ground on the whole machine in N.

    F = m(θ̈(r + z_c) − θ̇² y_c) − push, N = m(g cos β − θ̈ y_c − θ̇² z_c): the foot balls roll on by r θ; `push` is what
    pushes along w beside the ground.  Wheels and gimballed rotors turn about their own centres of mass and carry no force;
    legs that give move the hinge, and the trunk with it.
    """
    y, z = centre(X[0], body)
    _, _, aside, up = hinge_moves(X, dX, units)
    across = body[MASS] * (dX[1] * (body[FOOT_RADIUS] + z) - X[1] ** 2 * y + aside)
    return across - push, body[MASS] * (body[GRAVITY] - dX[1] * y - X[1] ** 2 * z + up)


@inlined
def turning(X: Array, dX: Array, body: Array, units: Array) -> tuple[float, float]:
    """Return dL/dt about the centre of mass in N·m along the world's u and w: what the feet's couple must make.

    In the body's own axes L = θ̇ I e + Σ wheels I Ω a + Σ rotors [θ̇(I_t e − D σ s) ± H s ± I_γ γ̇ g]; its change there
    and θ̇ e × L, turned by θ into the world's axes.
    """
    rate, push = X[1], dX[1]
    lu, lw, du, dw = body[PRODUCT_U] * rate, body[PRODUCT_W] * rate, body[PRODUCT_U] * push, body[PRODUCT_W] * push
    for i in range(units.shape[0]):
        x, v, vd = X[2 + 2 * i], X[3 + 2 * i], dX[3 + 2 * i]
        if units[i, KIND] == WHEEL:
            lu += units[i, COUPLING_U] * x
            lw += units[i, COUPLING_W] * x
            du += units[i, COUPLING_U] * dX[2 + 2 * i]
            dw += units[i, COUPLING_W] * dX[2 + 2 * i]
            continue
        H, D, own = units[i, MOMENTUM], units[i, TRANSVERSE] - units[i, SPIN_HELD], units[i, GIMBAL_INERTIA]
        c, sine = np.cos(x), np.sin(x)
        for j in range(2 if units[i, COUNT] > 1.5 else 1):
            side = 1.0 if j == 0 else -1.0
            s = side * sine
            su, sw = units[i, S0_U] * c + units[i, GXS0_U] * s, units[i, S0_W] * c + units[i, GXS0_W] * s
            tu, tw = units[i, GXS0_U] * c - units[i, S0_U] * s, units[i, GXS0_W] * c - units[i, S0_W] * s
            sigma = units[i, E_S0] * c + units[i, E_GXS0] * s
            slope = units[i, E_GXS0] * c - units[i, E_S0] * s
            along = side * H - D * sigma * rate                       # of L along s
            change = -D * (sigma * push + slope * rate * side * v)
            lu += along * su + side * own * v * units[i, AXIS_U]
            lw += along * sw + side * own * v * units[i, AXIS_W]
            du += change * su + along * side * v * tu + side * own * vd * units[i, AXIS_U]
            dw += change * sw + along * side * v * tw + side * own * vd * units[i, AXIS_W]
    du, dw = du - rate * lw, dw + rate * lu                           # + θ̇ e × L
    s, c = np.sin(X[0]), np.cos(X[0])
    return du * c - dw * s, du * s + dw * c


@inlined
def each_foot(X: Array, dX: Array, push: float, body: Array, units: Array) -> tuple[float, float, float, float, float]:
    """Return (normal on a, normal on b, force along w on a, on b, force along e on both together) in N.

    Moments about foot a: L (e × R_b) = ρ × R + dL/dt, R the whole ground force and ρ from foot a to the centre of mass.
    A wheel off the line twists the machine and moves load from one foot to the other.  How the two share the force
    along the line is not determined by rigid bodies.  `push`, N along w, acts right above or below the centre of mass as
    seen along the line: it does not twist the machine.  Where nothing is known of the feet, foot a stands for both.
    """
    across, normal = foot_forces(X, dX, push, body, units)
    along = -body[MASS] * body[GRAVITY_ALONG]
    if body[LENGTH] == 0.0:
        return normal, 0.0, across, 0.0, along
    y, z = centre(X[0], body)
    aside, up, _, _ = hinge_moves(X, dX, units)
    y, z = y + aside, z + up
    du, dw = turning(X, dX, body, units)
    x, length = body[COM_ALONG], body[LENGTH]
    normal_b = (x * normal - (body[FOOT_RADIUS] + z) * along + dw) / length
    across_b = (x * across - y * along - du) / length
    return normal - normal_b, normal_b, across - across_b, across_b, along


@inlined
def friction_needed(normal: float, across: float, along: float, total: float) -> float:
    """Return one foot's needed friction coefficient, the force along the line shared by normal load; inf when lifted."""
    if normal <= 0.0:
        return float(np.inf)
    beside = along * normal / total
    return float(np.sqrt(across * across + beside * beside) / normal)       # hypot costs more, and nothing overflows here
