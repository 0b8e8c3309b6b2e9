"""Machine and stance into the dynamic model: kernel arrays, linear model, constants, what no controller can beat."""

from __future__ import annotations

from math import atan, atan2, cos, hypot, inf, log, pi, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.machine.machine import Machine
from balance.plant.limits import impulsive, limited_by, torque_only
from balance.plant.linear import linear_model
from balance.plant.off_line import add_body, add_units
from balance.plant.on_legs import give_way
from balance.plant.record import Bounds, Plant, Unit
from balance.plant.sensor import sensor_parameters
from balance.plant.sharing import allotment, levelling, line_torque_per_input, momentum_row
from balance.plant.units import discounted, on_line, supply_row
from balance.stance.record import Stance

Array = NDArray[np.float64]


def build_plant(machine: Machine, stance: Stance, fell: float = pi / 6.0) -> Plant:
    """Return the dynamic model of a machine standing on two feet, on legs that give where the file says so.

    `fell` is the lean (rad) beyond which the simulator calls it fallen.  Stabilisers square to the line give a plant
    with `acts` False, never an error.  Raises InputError for legs that cannot give as stated.
    """
    return give_way(_on_stiff_legs(machine, stance, fell), machine)


def _on_stiff_legs(machine: Machine, stance: Stance, fell: float) -> Plant:
    pairs = [on_line(machine, name, s, stance.R_WT.T @ stance.e_W) for name, s in machine.stabilisers.items()]
    units = tuple(unit for unit, _ in pairs)
    rows = np.array([row for _, row in pairs])                               # (k, UNIT_SIZE)
    add_units(machine, stance, units, rows)
    body = _body(stance, rows, fell)
    add_body(stance, rows, body)
    stiffness, inertia = about_balance(body)
    model = linear_model(body, rows, tuple(machine.stabilisers), stiffness, inertia)
    free = free_inertia(inertia, rows)
    pole = sqrt(stiffness / free) if stiffness > 0.0 else 0.0
    unstable = max(float(np.linalg.eigvals(model.A).real.max()), 0.0)
    shares = allotment(units, line_torque_per_input(rows))
    first = [model.states.index(s) for s in model.states if s.split(".")[-1] in ("wheel_speed", "gimbal_angle")]
    return Plant(
        machine=machine.machine, stance=stance, units=units, inertia_locked=stance.inertia_locked,
        inertia_free=free, stiffness=stiffness, pole=pole, unstable_pole=unstable,
        doubling_time=log(2.0) / unstable if unstable > 0.0 else inf, balanced_lean=float(body[at.BALANCED]),
        momentum_capacity=sum(u.momentum_capacity for u in units), torque_limit=sum(u.torque_limit for u in units),
        bounds=_bounds(units, rows, stance.height, stiffness, free, pole), model=model,
        momentum_row=momentum_row(rows, first, len(model.states)), allotment=shares,
        levelling=levelling(rows, shares, first, len(model.states)), body_parameters=body, unit_parameters=rows,
        sensor_parameters=sensor_parameters(machine, stance), supply_parameters=supply_row(machine))


def _body(stance: Stance, rows: Array, fell: float) -> Array:
    """Pack the body's row of the kernel; what varies with the gimbals' angles is taken out of J."""
    body = np.zeros(at.BODY_SIZE)
    down = stance.gravity * cos(stance.slope)
    body[at.INERTIA] = stance.inertia_locked - sum(_rotor_about_line(r) for r in rows if r[at.KIND] != at.WHEEL)
    body[at.STIFF_SIN] = stance.mass * down * stance.height
    body[at.STIFF_COS] = stance.mass * down * stance.offset
    body[at.BODY_DRAG], body[at.MASS], body[at.GRAVITY] = stance.drag, stance.mass, down
    body[at.HEIGHT], body[at.OFFSET], body[at.FOOT_RADIUS] = stance.height, stance.offset, stance.foot_radius
    body[at.BALANCED] = balanced(stance.offset, stance.height - stance.foot_radius)
    body[at.LANDS_OUTWARD] = stance.outward_touch_down if stance.outward_touch_down is not None else inf
    body[at.TOUCH_DOWN] = stance.touch_down_lean if stance.touch_down_lean is not None else inf
    body[at.FELL], body[at.FRICTION] = fell, stance.friction
    return body


def balanced(offset: float, above: float) -> float:
    """Return θ_b in rad: −atan(δ/(h − r)); feet as round as the machine is high (h = r) are no error."""
    return -atan2(offset, above) if above >= 0.0 else -atan(offset / above)


def _rotor_about_line(row: Array) -> float:
    """Return what each gimballed unit adds to J at angle zero and the kernel adds itself, or (spin) never, kg·m².

    I_t(1 − σ₀²) + I_s σ₀² per rotor, and (F_s − F_across) σ₀² of a frame whose two inertias square to g differ.
    """
    share = row[at.E_S0] ** 2
    return float(row[at.COUNT] * (row[at.TRANSVERSE] * (1.0 - share) + (row[at.SPIN] + row[at.SPIN_HELD]) * share))


def about_balance(body: Array) -> tuple[float, float]:
    """Return (G in N·m/rad, inertia in kg·m²) at the balanced lean, rolling feet included."""
    r, h, d = body[at.FOOT_RADIUS], body[at.HEIGHT], body[at.OFFSET]
    s, c = sin(body[at.BALANCED]), cos(body[at.BALANCED])
    rolled = -2.0 * body[at.MASS] * r * ((h - r) * (1.0 - c) + d * s)
    weight = body[at.MASS] * body[at.GRAVITY]
    return float(weight * hypot(h - r, d) * (1.0 if h >= r else -1.0)), float(body[at.INERTIA] + rolled)


def free_inertia(inertia: float, rows: Array) -> float:
    """Return J_rest in kg·m²: wheels free to spin, gimbals at angle zero."""
    total = inertia
    for row in rows:
        if row[at.KIND] == at.WHEEL:
            total -= row[at.COUPLING] ** 2 / row[at.OWN_INERTIA]
        else:
            turning = (row[at.TRANSVERSE] - row[at.SPIN_HELD]) * row[at.E_S0] ** 2
            total += row[at.COUNT] * (row[at.TRANSVERSE] - turning)
    return float(total)


def _bounds(units: tuple[Unit, ...], rows: Array, height: float, stiffness: float, free: float, pole: float) -> Bounds:
    """Return the closed-form bounds; a body that does not topple has none (inf)."""
    if pole == 0.0:
        return Bounds(inf, inf, inf, inf, inf, "nothing: it does not topple")
    lean = float(sum(discounted(row, pole) for row in rows)) / (free * pole)
    only = torque_only(sum(float(u.torque_limit) for u in units), stiffness)
    kick = impulsive(sum(u.momentum_capacity for u in units), free, pole)
    return Bounds(lean, lean * pole, lean * pole * free / height, only, kick,
                  limited_by(lean, only, kick, all(u.kind != "reaction wheel" for u in units)))
