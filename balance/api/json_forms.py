"""Sensor margins and firmware forms of the gains as dictionaries."""

from __future__ import annotations

from dataclasses import asdict

from balance.api.json_margins import json_margins
from balance.api.json_numbers import Tree, number, row
from balance.design.forms import actuator_gains, pid_forms
from balance.design.records import Design
from balance.design.sensors import all_sensors, sensor_margins
from balance.design.steady import standing


def json_forms(design: Design) -> Tree:
    """Write what `balance gains` tells beside the law itself."""
    forms = pid_forms(design)
    return {
        "stance": design.plant.stance.name,
        "sensor_margins": [{"at": name, **json_margins(found)} for name, found in sensor_margins(design)],
        "all_sensors_disk": number(all_sensors(design)),
        "actuators": [] if design.refused else [
            {"unit": a.unit, "measurements": list(design.law.measurements), "si": row(a.si),
             "ampere": None if a.current is None else row(a.current), "duty": None if a.duty is None else row(a.duty)}
            for a in actuator_gains(design)],
        "steady": None if design.refused else _steady(design),
        "pid_forms": None if forms is None else {name: number(value) for name, value in asdict(forms).items()},
    }


def _steady(design: Design) -> Tree:
    """Write what a constant error leads to."""
    found = standing(design)
    return {
        "tolerable_offset_m": number(found.offset),
        "tolerable_tilt_rad": number(found.tilt),
        "momentum_per_mm_n_m_s": number(found.momentum),
        "unit_states_per_mm": row(found.speeds),
        "drag_power_per_mm_w": number(found.power),
        "full_in_per_mm_s": number(found.full_in),
    }
