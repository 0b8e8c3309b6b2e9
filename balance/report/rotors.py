"""Each rotor at its top speed: energy, rim speed, an upper bound of its stress, permissible unbalance."""

from __future__ import annotations

import math
from dataclasses import dataclass

from balance.machine.machine import Machine
from balance.machine.materials import density_of
from balance.machine.stabilisers import ReactionWheel
from balance.plant.record import Plant, Unit
from balance.report.shapes import rotor_diameter
from balance.stance.parts import solid_mass, solid_shape

GRADES = (2.5e-3, 6.3e-3)
"""m/s: e·ω of the balance grades G2.5 and G6.3 of ISO 21940-11."""


@dataclass(frozen=True)
class RotorFact:
    """One unit's rotor at its top speed, SI; NaN where the machine file does not state enough."""

    name: str
    gimballed: bool
    count: int
    top_speed: float       # rad/s
    spin: float            # kg·m²
    mass: float            # kg
    energy: float          # J, each: I ω²/2
    rim_speed: float       # m/s
    ring_stress: float     # Pa: ρ v², the hoop stress of a thin free ring; no plain disc or rim of one material has more

    def eccentricity(self, grade: float) -> float:
        """Permissible offset of the rotor's centre of mass from its axis, m: e = G/ω (ISO 21940-11)."""
        return grade / self.top_speed

    def shaking(self, grade: float) -> float:
        """The turning force of that offset, N: m e ω² = m G ω."""
        return self.mass * grade * self.top_speed


def rotor_fact(machine: Machine, unit: Unit) -> RotorFact:
    """Gather one unit's rotor."""
    stated = machine.stabilisers[unit.name]
    top = unit.speed_limit if isinstance(stated, ReactionWheel) else stated.spin_speed
    rotor, diameter = stated.rotor, rotor_diameter(stated.rotor)
    mass = solid_mass(rotor.solid, rotor.mass, density_of(rotor.density, rotor.material))[0] or math.nan
    volume = solid_shape(rotor.solid)[0] if rotor.solid is not None else 0.0
    rim = 0.5 * diameter * top if diameter is not None else math.nan
    density = mass / volume if volume > 0.0 else math.nan
    return RotorFact(
        name=unit.name, gimballed=not isinstance(stated, ReactionWheel), count=2 if unit.kind == "scissored pair" else 1,
        top_speed=top, spin=unit.inertia, mass=mass, energy=0.5 * unit.inertia * top**2, rim_speed=rim,
        ring_stress=density * rim**2)


def rotor_facts(machine: Machine, plant: Plant) -> tuple[RotorFact, ...]:
    """Gather every rotor whose top speed is known."""
    facts = (rotor_fact(machine, unit) for unit in plant.units)
    return tuple(fact for fact in facts if math.isfinite(fact.top_speed) and fact.top_speed > 0.0)
