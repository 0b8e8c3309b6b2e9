"""The plant's constants, bounds and linear model of any machine scale with the units they are stated in."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from balance.machine.machine import Machine
from balance.plant.build import build_plant
from balance.plant.gyros import holds_lean_rate, turning
from balance.plant.record import Plant
from balance.stance.build import build_stance
from balance.stance.statics import statics_of
from tests.plant.random_plants import random_plant_on_legs
from tests.property.machines import random_machine
from tests.property.units import Units, rescaled

Array = NDArray[np.float64]

ROUNDING = 1e-9
"""Relative: eigenvalues and the inverse of a mass matrix lose a few digits more than sums do."""

LOOSE = 1e-7
"""Relative, and of a metre, second, joule: a shift is found by secants to 1e-12 of the machine's size, its slope near 1."""

PLANT_UNITS = {         # powers of kilogram, metre, second
    "inertia_locked": (1, 2, 0), "inertia_free": (1, 2, 0), "stiffness": (1, 2, -2), "pole": (0, 0, -1),
    "unstable_pole": (0, 0, -1), "doubling_time": (0, 0, 1), "balanced_lean": (0, 0, 0), "momentum_capacity": (1, 2, -1),
    "torque_limit": (1, 2, -2),
}
BOUND_UNITS = {"lean": (0, 0, 0), "lean_rate": (0, 0, -1), "impulse": (1, 1, -1), "torque_only_lean": (0, 0, 0),
               "impulsive_lean": (0, 0, 0)}


UNIT_UNITS = {"energy": (1, 2, -2), "spin_up": (0, 0, 1), "spin_share": (0, 0, 0), "turn_rate": (0, 0, -1),
              "momentum_capacity": (1, 2, -1), "torque_limit": (1, 2, -2), "inertia": (1, 2, 0)}
LEG_UNITS = {"hinge": (0, 1, 0), "stiffness": (1, 2, -2), "critical": (1, 2, -2), "unstable": (0, 0, -1), "mode": (0, 0, -1),
             "damping": (0, 0, 0)}
TURNING_UNITS = {"rate": (0, 0, -1), "level": (1, 2, -2), "stops": (1, 2, -2), "share": (0, 0, 0)}


def behind(machine: Machine, plant: Plant) -> list[tuple[str, float, tuple[int, int, int]]]:
    """Return (what, number, its units) of what stands behind a plant: units by themselves, legs, statics."""
    found = [(f"{u.name}.{n}", getattr(u, n), powers) for u in plant.units for n, powers in UNIT_UNITS.items()]
    for i, row in enumerate(plant.unit_parameters):
        found.append((f"holds {i}", holds_lean_rate(row), (0, 0, -1)))
        table = turning(plant, i)
        found += [] if table is None else [(f"turning {i} {n}", getattr(table, n), p) for n, p in TURNING_UNITS.items()]
    found += [] if plant.legs is None else [(f"legs {n}", getattr(plant.legs, n), p) for n, p in LEG_UNITS.items()]
    rest = statics_of(machine, plant.stance)
    found += [(f"{leg} joints", np.array(angles), (0, 0, 0)) for leg, angles in plant.stance.joints.items()]
    found += [] if not rest.shift.reached else [("shift", rest.shift.distance, (0, 1, 0))]
    edges = rest.support.edges if rest.support else ()
    return found + [(f"edge {e.foot_from} {e.foot_to}", e.margin, (0, 1, 0)) for e in edges]


def behind_apart(a: tuple[Machine, Plant], b: tuple[Machine, Plant], units: Units) -> list[str]:
    """Return what of the second machine is not the first's in other units."""
    ours, theirs = behind(*a), behind(*b)
    assert [name for name, *_ in ours] == [name for name, *_ in theirs]
    return [name for (name, value, powers), (_, other, _) in zip(ours, theirs, strict=True)
            if not np.allclose(np.asarray(value) * units.factor(*powers), other, rtol=LOOSE,
                               atol=LOOSE * units.factor(*powers), equal_nan=True)]


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
    assert behind_apart((machine, s), (twin, t), units) == []
    wrong = replace(twin, gravity=1.01 * twin.gravity)
    assert "stiffness" in disagreements(s, build_plant(wrong, build_stance(wrong, "s")), units)


@pytest.mark.parametrize("seed", range(20))
def test_legs_that_give_scale_with_the_units(seed: int) -> None:
    machine, s = random_plant_on_legs(seed)
    units = Units(*(float(x) for x in 10.0 ** np.random.default_rng(seed).uniform(-2.0, 2.0, 4)))
    twin = rescaled(machine, units)
    t = build_plant(twin, build_stance(twin, "s"))
    assert disagreements(s, t, units) == []
    assert behind_apart((machine, s), (twin, t), units) == []
    give = machine.leg_compliance
    wrong = rescaled(replace(machine, leg_compliance=replace(give, stiffness=1.01 * give.stiffness)), units)
    assert "legs stiffness" in behind_apart((machine, s), (wrong, build_plant(wrong, build_stance(wrong, "s"))), units)
