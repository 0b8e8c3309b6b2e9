"""The answer of `balance plant` as a dictionary (SI, unit in the key)."""

from __future__ import annotations

from balance.api.json_numbers import Tree, matrix, number, row
from balance.plant.record import Plant, Unit
from balance.stance.measured import Disagreement


def json_plant(plants: tuple[Plant, ...], measured: tuple[Disagreement, ...] = ()) -> Tree:
    """Write the plants of one machine; `stances` is a list also for one stance. `measured`: the bench beside CAD."""
    return {
        "machine": plants[0].machine if plants else "",
        "stances": [_stance(p) for p in plants],
        "measured": [_measured(one) for one in measured],
    }


def _measured(one: Disagreement) -> Tree:
    """Write one measured number; `unit` goes for `cad`, `measured` and `uncertainty` (one sigma)."""
    return {
        "quantity": one.quantity,
        "unit": one.unit,
        "cad": number(one.cad),
        "measured": number(one.measured),
        "uncertainty": number(one.uncertainty),
        "beyond_uncertainty": one.beyond,
        "pole_change_share": number(one.pole_change),
    }


def _stance(plant: Plant) -> Tree:
    stance = plant.stance
    return {
        "stance": stance.name,
        "mass_kg": number(stance.mass),
        "com_height_m": number(stance.height),
        "com_offset_m": number(stance.offset),
        "inertia_locked_kg_m2": number(plant.inertia_locked),
        "inertia_wheel_free_kg_m2": number(plant.inertia_free),
        "toppling_stiffness_n_m_per_rad": number(plant.stiffness),
        "pole_rad_s": number(plant.pole),
        "unstable_pole_rad_s": number(plant.unstable_pole),
        "leg_compliance": _legs(plant),
        "doubling_time_s": number(plant.doubling_time),
        "balanced_lean_rad": number(plant.balanced_lean),
        "line": {
            "from": stance.foot_from,
            "to": stance.foot_to,
            "direction": row(stance.e_W),
            "length_m": number(stance.length),
            "slope_rad": number(stance.slope),
        },
        "touch_down_lean_rad": None if stance.touch_down_lean is None else number(stance.touch_down_lean),
        "momentum_capacity_n_m_s": number(plant.momentum_capacity),
        "torque_limit_n_m": number(plant.torque_limit),
        "acts": bool(plant.acts),
        "best_possible": {
            "lean_rad": number(plant.bounds.lean),
            "lean_rate_rad_s": number(plant.bounds.lean_rate),
            "impulse_n_s": number(plant.bounds.impulse),
            "limited_by": plant.bounds.limited_by,
        },
        "units": [_unit(u) for u in plant.units],
        "model": {
            "states": list(plant.model.states),
            "inputs": list(plant.model.inputs),
            "A": matrix(plant.model.A),
            "B": matrix(plant.model.B),
        },
    }


def _legs(plant: Plant) -> Tree | None:
    """Write what legs that give do; null where they are stiff. All poles of the machine without a law that fall away."""
    legs = plant.legs
    return None if legs is None else {
        "hinge_height_m": number(legs.hinge),
        "stiffness_n_m_per_rad": number(legs.stiffness),
        "critical_stiffness_n_m_per_rad": number(legs.critical),
        "unstable_poles_rad_s": row(legs.unstable),
        "mode_rad_s": number(legs.mode),
        "mode_damping_ratio": number(legs.damping),
    }


def _unit(unit: Unit) -> Tree:
    return {
        "name": unit.name,
        "kind": unit.kind,
        "drive": unit.drive,
        "axis_share": number(unit.axis_share),
        "spin_inertia_kg_m2": number(unit.inertia),
        "momentum_capacity_n_m_s": number(unit.momentum_capacity),
        "torque_limit_n_m": number(unit.torque_limit),
    }
