"""The same machine written in other units: kilogram, metre, second and ampere replaced by any numbers."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from balance.files.fields import Shape

EXPONENTS: dict[str, tuple[float, float, float, float]] = {
    # dimension of the file -> powers of kilogram, metre, second, ampere
    "length": (0, 1, 0, 0), "mass": (1, 0, 0, 0), "time": (0, 0, 1, 0), "current": (0, 0, 0, 1), "angle": (0, 0, 0, 0),
    "frequency": (0, 0, -1, 0), "angular speed": (0, 0, -1, 0), "acceleration": (0, 1, -2, 0), "density": (1, -3, 0, 0),
    "inertia": (1, 2, 0, 0), "torque": (1, 2, -2, 0), "angular stiffness": (1, 2, -2, 0), "angular damping": (1, 2, -1, 0),
    "torque constant": (1, 2, -2, -1), "voltage": (1, 2, -3, -1), "resistance": (1, 2, -3, -2), "inductance": (1, 2, -2, -2),
    "capacitance": (-1, -2, 4, 2), "gyro noise": (0, 0, -0.5, 0), "acceleration noise": (0, 1, -1.5, 0),
    "momentum": (1, 2, -1, 0), "impulse": (1, 1, -1, 0),
}


@dataclass(frozen=True)
class Units:
    """How many of the new units make one of SI."""

    mass: float
    length: float
    time: float
    current: float = 1.0

    def factor(self, mass: float, length: float, time: float, current: float = 0.0) -> float:
        """Return what a number with these powers is multiplied by."""
        return self.mass**mass * self.length**length * self.time**time * self.current**current


def rescaled(value: Any, units: Units) -> Any:
    """Return a record of a machine file with every quantity in the new units, found by the record's own metadata."""
    changed = {}
    for member in dataclasses.fields(value):
        shape = member.metadata.get("shape")
        if shape is not None:
            changed[member.name] = _member(getattr(value, member.name), shape, units)
    return dataclasses.replace(value, **changed)


def _member(value: Any, shape: Shape, units: Units) -> Any:
    if value is None:
        return None
    if shape.kind == "quantity":
        return value * units.factor(*EXPONENTS[shape.dimension])
    if shape.kind == "list" and shape.items is not None and shape.items.kind == "quantity":
        return tuple(x * units.factor(*EXPONENTS[shape.items.dimension]) for x in value)
    if isinstance(value, Mapping):
        inner = shape.items
        return {name: rescaled(entry, units) if inner is None or inner.kind in ("section", "variant")
                else _member(entry, inner, units) for name, entry in value.items()}
    return rescaled(value, units) if dataclasses.is_dataclass(value) else value
