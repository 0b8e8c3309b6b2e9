"""The answer of `balance plant` as a dictionary (SI, unit in the key)."""

from __future__ import annotations

from balance.api.json_numbers import Tree, matrix, number, row
from balance.plant.gyros import holds_lean_rate, needs_link, turn_times, turning
from balance.plant.record import Plant
from balance.stance.measured import Disagreement
from balance.stance.statics import Statics


def json_plant(plants: tuple[Plant, ...], measured: tuple[Disagreement, ...] = (),
               statics: tuple[Statics, ...] = ()) -> Tree:
    """Write the plants of one machine; `stances` is a list also for one stance.

    `measured`: the bench beside CAD; `statics`: what stands behind each plant, one by one.
    """
    rests = {one.stance.name: one for one in statics}
    return {
        "machine": plants[0].machine if plants else "",
        "stances": [{**_stance(p), **json_statics(rests.get(p.stance.name))} for p in plants],
        "turn_times": [{"unit": unit.name, "from": a, "to": b, "time_s": number(time)}
                       for i, unit in enumerate(plants[0].units if plants else ())
                       for (a, b), time in turn_times(plants, i).items()],
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
        "touch_down_outward_rad": None if stance.outward_touch_down is None else number(stance.outward_touch_down),
        "momentum_capacity_n_m_s": number(plant.momentum_capacity),
        "torque_limit_n_m": number(plant.torque_limit),
        "acts": bool(plant.acts),
        "best_possible": {
            "lean_rad": number(plant.bounds.lean),
            "lean_rate_rad_s": number(plant.bounds.lean_rate),
            "impulse_n_s": number(plant.bounds.impulse),
            "limited_by": plant.bounds.limited_by,
        },
        "units": [_unit(plant, i) for i in range(len(plant.units))],
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


def json_statics(one: Statics | None) -> Tree:
    """Write joint angles, the margins with all feet down and the shift to balance of one stance."""
    if one is None:
        return {}
    support, words = one.support, ("swing_rad", "hip_rad", "knee_rad")
    return {
        "joints": {leg: {word: number(angle) for word, angle in zip(words, angles, strict=False)}
                   for leg, angles in one.stance.joints.items()},
        "all_feet_down": None if support is None else {
            "margins": [{"from": e.foot_from, "to": e.foot_to, "margin_m": number(e.margin)} for e in support.edges],
            "least_margin_m": number(support.margin)},
        "all_feet_down_reason": one.unsupported,
        "shift_to_balance_m": number(one.shift.distance),
        "shift_reached": one.shift.reached,
        "shift_reason": one.shift.reason,
    }


def _unit(plant: Plant, i: int) -> Tree:
    unit, table, held = plant.units[i], turning(plant, i), holds_lean_rate(plant.unit_parameters[i])
    return {
        "name": unit.name,
        "kind": unit.kind,
        "drive": unit.drive,
        "axis_share": number(unit.axis_share),
        "spin_inertia_kg_m2": number(unit.inertia),
        "momentum_capacity_n_m_s": number(unit.momentum_capacity),
        "torque_limit_n_m": number(unit.torque_limit),
        "energy_j": number(unit.energy),
        "spin_up_s": number(unit.spin_up),
        "spin_of_no_load_speed": number(unit.spin_share),
        "drive_holds_lean_rate_rad_s": number(held),
        "needs_link": needs_link(plant, i),
        "turntable": None if table is None else {
            "rate_rad_s": number(table.rate), "couple_level_n_m": number(table.level),
            "couple_at_stops_n_m": number(table.stops), "share_of_lighter_foot": number(table.share)},
    }
