"""Random machines of the whole variety the equations know, with their plants; Coulomb drag left out."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from balance.base.errors import InputError
from balance.machine.legs import LegCompliance
from balance.machine.machine import Machine
from balance.machine.solids import Tensor
from balance.machine.stabilisers import Drag, ReactionWheel, Stabiliser
from balance.plant.build import build_plant
from balance.plant.record import Plant
from balance.stance.build import build_stance
from balance.stance.rotors import rotor_mass
from tests.property.machines import random_machine


def random_drive(rng: np.random.Generator, unit: Stabiliser) -> Stabiliser:
    """Give a wheel viscous drag; give a gimbal damping, a spring of either sign and one of the two drives."""
    if isinstance(unit, ReactionWheel):
        return replace(unit, drag=Drag(viscous=float(rng.uniform(0.0, 1e-3))))
    drive = str(rng.choice(["position servo", "torque motor"]))
    gimbal = replace(unit.gimbal, drive=drive, damping=float(rng.uniform(0.0, 0.1)), spring=float(rng.uniform(-2.0, 2.0)),
                     bandwidth=float(rng.uniform(2.0, 30.0)), torque_limit=1e6)
    if rng.random() < 0.5:
        return replace(unit, gimbal=gimbal)
    g, s = np.array(unit.gimbal_axis), np.array(unit.spin_axis)
    axes = np.column_stack([s, np.cross(g, s), g])                   # a frame symmetric about the planes of its axes
    F = axes @ np.diag(rng.uniform(5e-3, 9e-3, 3)) @ axes.T
    return replace(unit, gimbal=gimbal, frame_inertia=Tensor(F[0, 0], F[1, 1], F[2, 2], F[0, 1], F[0, 2], F[1, 2]))


def with_its_motor(rng: np.random.Generator, machine: Machine, unit: Stabiliser) -> Stabiliser:
    """Say of some geared wheels that their inertia was measured with the motor behind the gear, where it can have been."""
    weighed = rng.random() < 0.5
    if not weighed or not isinstance(unit, ReactionWheel) or unit.gear is None:
        return unit
    behind = unit.gear.ratio**2 * machine.motors[unit.motor].rotor_inertia
    if behind > 0.7 * rotor_mass(unit.rotor).spin:
        return unit
    return replace(unit, gear=replace(unit.gear, includes_rotor=True))


def random_plant_on_legs(seed: int) -> tuple[Machine, Plant]:
    """Return such a machine on legs that give: soft ones, that have two unstable poles, to ten times that stiff."""
    machine, plant = random_plant(seed)
    rng = np.random.default_rng(5000 + seed)
    h, weight = plant.stance.height, plant.stance.mass * plant.stance.gravity
    hinge = float(rng.uniform(0.2, 0.8)) * h
    critical = weight * (h - hinge) * hinge / h
    share = float(rng.choice([rng.uniform(0.2, 0.6), rng.uniform(2.0, 20.0)]))
    feet = replace(machine.feet, radius=0.0) if machine.feet else None
    while True:
        give = LegCompliance(hinge, critical * share, float(rng.uniform(0.0, 2.0)))
        machine = replace(machine, feet=feet, leg_compliance=give)
        try:
            return machine, build_plant(machine, build_stance(machine, "s"))
        except InputError:
            share *= 3.0                                                   # a large offset bends soft legs without end


def random_plant(seed: int) -> tuple[Machine, Plant]:
    """Return a machine with one to three units of any kind, and its plant."""
    rng = np.random.default_rng(seed)
    machine = random_machine(rng)
    units = {name: random_drive(rng, unit) for name, unit in machine.stabilisers.items()}
    weighed = np.random.default_rng((seed, 1))
    units = {name: with_its_motor(weighed, machine, unit) for name, unit in units.items()}
    machine = replace(machine, stabilisers=units)
    return machine, build_plant(machine, build_stance(machine, "s"))
