"""Tolerances, worst case, retuning and one gain set as dictionaries (SI, unit in the key)."""

from __future__ import annotations

import math
from collections.abc import Mapping

from balance.api.json_margins import json_margins
from balance.api.json_numbers import Number, Tree, number
from balance.design.records import Design, Range, Retuning, Robustness, WorstCase
from balance.design.robustness.one_law import OneLaw

ENDS = {"": "_share", "m": "_m", "s": "_s", "rad": "_rad"}
MARGINS = {"phase": ("phase_deg", 180.0 / math.pi), "delay": ("delay_s", 1.0)}
"""Margins whose key holds a unit; the others are bare factors."""


def json_robust(design: Design) -> Tree:
    """Write the worst case and what was retuned; null where nothing was asked for."""
    return {
        "worst_case": None if design.robustness is None else _worst(design.robustness),
        "retuned": None if design.retuned is None else _retuned(design.retuned),
        "gains_of": design.law_of or design.plant.stance.name,
    }


def _worst(found: Robustness) -> Tree:
    units = {one.name: one.unit for one in found.ranges}
    return {
        "stable": found.stable,
        "loops_tried": found.evaluations,
        "tolerances": [_range(one) for one in found.ranges],
        "margins": [_case(one, units) for one in found.cases],
        "margins_at_worst_disk": json_margins(found.margins),
    }


def _range(one: Range) -> Tree:
    end = ENDS[one.unit]
    return {"name": one.name, f"low{end}": number(one.low), f"high{end}": number(one.high)}


def _case(case: WorstCase, units: Mapping[str, str]) -> Tree:
    key, scale = MARGINS.get(case.margin, (case.margin, 1.0))
    at: dict[str, Number] = {f"{name}{ENDS[units[name]]}": number(value) for name, value in case.at.items()}
    return {"margin": key, "nominal": number(scale * case.nominal), "worst": number(scale * case.value), "at": at}


def _retuned(changed: Retuning) -> Tree:
    return {
        "allow_times": {name: number(value) for name, value in changed.scales.items()},
        "worst_disk_before": number(changed.before),
        "worst_disk_after": number(changed.after),
        "weights_tried": changed.tried,
        "part_of_the_way": number(changed.part),
    }


def json_one_gain_set(found: OneLaw | None) -> Tree | None:
    """Write one gain set for all stances beside one per stance; null where there is nothing to compare."""
    if found is None:
        return None
    rows = zip(found.stances, found.own, found.shared, strict=True)
    return {
        "gains_of": found.source,
        "stances": [{"stance": n, "own": json_margins(own), "one": json_margins(one)} for n, own, one in rows],
    }
