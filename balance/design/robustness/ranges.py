"""Which numbers may move, and how far: the machine file's tolerances and the design file's range of delay."""

from __future__ import annotations

import math
from collections.abc import Mapping

from balance.design.records import Range
from balance.goal.goal import Loop
from balance.machine.tolerances import PairMismatch, Tolerances
from balance.plant.deviation import unit_key
from balance.plant.record import Plant

LATENCY = "latency"
"""Name of the deviation that belongs to the loop and not to the plant, s."""


def ranges_of(plant: Plant, tolerances: Tolerances | None, loop: Loop) -> tuple[Range, ...]:
    """Return the ranges that are wider than nothing on this plant, in a fixed order.

    Jitter is taken as a delay that may stand anywhere in its range; no sample's command comes before its measurement.
    """
    given = tolerances or Tolerances()
    found = [_both("mass", given.mass), _both("height", given.height, "m"), _both("offset", given.offset, "m"),
             _both("inertia", given.inertia), _both("leg_stiffness", given.leg_stiffness if plant.legs else 0.0),
             *_units(plant, given), *_lags(plant, given),
             Range(LATENCY, -min(loop.latency_tolerance, loop.latency), loop.latency_tolerance + loop.jitter, "s")]
    return tuple(one for one in found if one.high > one.low)


def _both(name: str, width: float, unit: str = "") -> Range:
    return Range(name, -width, width, unit)


def _units(plant: Plant, given: Tolerances) -> list[Range]:
    """Return what moves with each unit: a motor's torque, a flywheel's momentum, a pair's mirror symmetry."""
    found = []
    for i, unit in enumerate(plant.units):
        if unit.drive == "torque" and unit.torque_limit > 0.0:
            found.append(_both(unit_key(plant, i, "torque_constant"), given.torque_constant))
        if unit.kind != "reaction wheel":
            found.append(_both(unit_key(plant, i, "flywheel_momentum"), given.flywheel_momentum))
        if unit.kind == "scissored pair":
            mismatch = given.pair_mismatch or PairMismatch()
            found.append(_both(unit_key(plant, i, "pair_angle"), mismatch.angle, "rad"))
    return found


def _lags(plant: Plant, given: Tolerances) -> list[Range]:
    """Return the ranges of the actuators' lags; only wheels' current loops feel the supply."""
    kinds = {unit.kind == "reaction wheel" for unit in plant.units}
    return [_both("voltage", given.voltage if True in kinds else 0.0), _both("bandwidth", given.bandwidth)]


def told(at: Mapping[str, float], ranges: tuple[Range, ...]) -> str:
    """Write deviations for people, as `mass +3 %, height −6 mm`; a number keeps its unit on its line."""
    units = {one.name: one.unit for one in ranges}
    scales = {"": (100.0, "\u00a0%"), "m": (1e3, "\u00a0mm"), "s": (1e3, "\u00a0ms"), "rad": (180.0 / math.pi, "°")}
    words = []
    for name, value in at.items():
        factor, unit = scales[units[name]]
        number = f"{factor * value:+.3g}".replace("-", "−")
        words.append(f"{name.replace('_', ' ').replace('.', ' ')} {number}{unit}")
    return ", ".join(words) or "the machine as stated"
