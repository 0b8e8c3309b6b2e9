"""A plant put on legs that give: model, balance and bounds anew; what the law is made for stays in `stiff`."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError, Problem
from balance.kernel import layout as at
from balance.machine.machine import Machine
from balance.plant.legs import balance_on, bound_scales, critical_stiffness, doubling, leg_modes, legs_parameters
from balance.plant.limits import limited_by
from balance.plant.linear import linear_model
from balance.plant.record import Bounds, LinearModel, Plant
from balance.plant.units import discounted

Array = NDArray[np.float64]


def give_way(stiff: Plant, machine: Machine) -> Plant:
    """Return the plant on the machine's own legs: as it is where they are stiff.

    Raises InputError for a hinge that does not lie below the centre of mass, a body with no extent of its own, or legs so
    near the critical stiffness that they balance nowhere.
    """
    give = machine.leg_compliance
    if give is None:
        return stiff
    body = stiff.body_parameters
    key, height = "leg_compliance.height", float(body[at.HEIGHT])
    place = machine.marks.get(key, (0, 0))
    if give.height >= height:
        raise InputError([Problem(machine.source, *place, key, f"{1e3 * give.height:.4g} mm",
                                  f"below the centre of mass, which is {1e3 * height:.4g} mm above the line on "
                                  f"{stiff.stance.name}", "what gives stands between the feet and the trunk")])
    if stiff.inertia_free <= body[at.MASS] * height**2:
        raise InputError([Problem(machine.source, *place, "leg_compliance", "legs that give under a point mass",
                                  "a body that has inertia about its own centre of mass (J_rest above m h²)",
                                  "the trunk turns on the hinge: state its whole inertia about the line")])
    legs = legs_parameters(give, body, stiff.inertia_free)
    if np.isnan(balance_on(body, legs)[0]):
        key = "leg_compliance.stiffness"
        raise InputError([Problem(machine.source, *machine.marks.get(key, (0, 0)), key, f"{give.stiffness:.4g} N*m/rad",
                                  f"well away from {critical_stiffness(body, legs):.3g} N*m/rad, where the legs buckle",
                                  f"no balance near upright on {stiff.stance.name}: the centre of mass is "
                                  f"{1e3 * float(body[at.OFFSET]):.3g} mm off the line")])
    return on_legs(stiff, legs, np.ones(len(stiff.units)))


def on_legs(stiff: Plant, legs: Array, push: Array) -> Plant:
    """Return the plant on legs with the kernel row `legs` (UNIT_SIZE,); `push` (units,): factors on the inputs' columns."""
    body = stiff.body_parameters.copy()
    psi, _ = balance_on(body, legs)
    if np.isfinite(psi):                                     # else two poles are unstable and no law holds it anyway
        body[at.BALANCED] = psi
    names = tuple(unit.name for unit in stiff.units)
    model = linear_model(body, stiff.unit_parameters, names, stiff.stiffness, float(body[at.INERTIA]), legs)
    model = replace(model, B=model.B * push)
    unstable = max(float(np.linalg.eigvals(model.A).real.max()), 0.0)
    wider = np.zeros((len(stiff.units), 2))
    return replace(
        stiff, model=model, unstable_pole=unstable, doubling_time=doubling(unstable),
        balanced_lean=float(body[at.BALANCED]), bounds=_bounds(stiff, model, legs), body_parameters=body,
        momentum_row=np.concatenate([stiff.momentum_row, [0.0, 0.0]]), levelling=np.hstack([stiff.levelling, wider]),
        legs_parameters=legs, legs=leg_modes(model.A, body, legs), stiff=stiff)


def _bounds(stiff: Plant, model: LinearModel, legs: Array) -> Bounds:
    """Return the closed-form bounds along the toppling mode; those of stiff legs where nothing topples."""
    height = stiff.stance.height
    if stiff.pole == 0.0 or model.on_legs is None:
        return stiff.bounds
    scales = bound_scales(model.A, model.disturbance, model.on_legs, float(legs[at.HINGE]) / height, stiff.pole)
    if scales is None:
        return stiff.bounds
    p, lean, rate, moment = scales
    able, push = float(sum(discounted(row, p) for row in stiff.unit_parameters)), moment / height
    only, kick = lean * stiff.torque_limit / p, lean * stiff.momentum_capacity
    gimballed = all(u.kind != "reaction wheel" for u in stiff.units)
    return Bounds(lean * able, rate * able, push * able, only, kick, limited_by(lean * able, only, kick, gimballed))
