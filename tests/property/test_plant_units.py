"""The plant's constants, bounds and linear model of any machine scale with the units they are stated in."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from balance.plant.build import build_plant
from balance.plant.record import Plant
from balance.stance.build import build_stance
from tests.property.machines import random_machine
from tests.property.units import Units, rescaled

Array = NDArray[np.float64]

ROUNDING = 1e-9
"""Relative: eigenvalues and the inverse of a mass matrix lose a few digits more than sums do."""

PLANT_UNITS = {         # powers of kilogram, metre, second
    "inertia_locked": (1, 2, 0), "inertia_free": (1, 2, 0), "stiffness": (1, 2, -2), "pole": (0, 0, -1),
    "unstable_pole": (0, 0, -1), "doubling_time": (0, 0, 1), "balanced_lean": (0, 0, 0), "momentum_capacity": (1, 2, -1),
    "torque_limit": (1, 2, -2),
}
BOUND_UNITS = {"lean": (0, 0, 0), "lean_rate": (0, 0, -1), "impulse": (1, 1, -1), "torque_only_lean": (0, 0, 0),
               "impulsive_lean": (0, 0, 0)}


def state_factor(name: str, units: Units) -> float:
    """Return what a state's number is multiplied by: rates are per second, angles have no unit."""
    return units.factor(0, 0, -1) if name.endswith(("rate", "speed")) else 1.0


def input_factor(name: str, units: Units) -> float:
    """Return what an input's number is multiplied by: a commanded rate per second, else a torque."""
    return units.factor(0, 0, -1) if name.endswith("rate_command") else units.factor(1, 2, -2)


def off(a: Array | float, b: Array | float) -> bool:
    """Return True where two numbers or arrays disagree by more than rounding of the largest."""
    a, b = np.asarray(a), np.asarray(b)
    finite = np.abs(a[np.isfinite(a)])
    scale = float(finite.max()) if finite.size else 1.0
    same = (a == b) | (np.abs(np.where(np.isfinite(a), a, 0.0) - np.where(np.isfinite(b), b, 0.0)) <= ROUNDING * scale)
    return not bool(np.all(same & (np.isfinite(a) == np.isfinite(b))))


def disagreements(s: Plant, t: Plant, units: Units) -> list[str]:
    """Return the names of the numbers of `t` that are not those of `s` in other units."""
    found = [n for n, powers in PLANT_UNITS.items() if off(getattr(s, n) * units.factor(*powers), getattr(t, n))]
    found += [n for n, powers in BOUND_UNITS.items()
              if off(getattr(s.bounds, n) * units.factor(*powers), getattr(t.bounds, n))]
    x = np.array([state_factor(n, units) for n in s.model.states])
    u = np.array([input_factor(n, units) for n in s.model.inputs])
    per_second = units.factor(0, 0, -1)
    # entries of one matrix have many units: compare in the old ones, where their sizes are alike
    if off(s.model.A, t.model.A / per_second / x[:, None] * x):
        found.append("A")
    if off(s.model.B, t.model.B / per_second / x[:, None] * u):
        found.append("B")
    return found


@pytest.mark.parametrize("seed", range(40))
def test_plant_scales_with_the_units(seed: int) -> None:
    rng = np.random.default_rng(seed)
    machine = random_machine(rng)
    units = Units(*(float(x) for x in 10.0 ** rng.uniform(-2.0, 2.0, 4)))
    twin = rescaled(machine, units)
    s = build_plant(machine, build_stance(machine, "s"))
    t = build_plant(twin, build_stance(twin, "s"))
    assert disagreements(s, t, units) == []
    wrong = replace(twin, gravity=1.01 * twin.gravity)
    assert "stiffness" in disagreements(s, build_plant(wrong, build_stance(wrong, "s")), units)
