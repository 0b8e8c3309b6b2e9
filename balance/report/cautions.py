"""What can hurt someone, with this machine's own numbers where they are known. Common practice; local codes prevail."""

from __future__ import annotations

import math

from balance.machine.machine import Machine
from balance.machine.stabilisers import ReactionWheel
from balance.plant.record import Plant
from balance.report.amounts import amount, figure, speed
from balance.report.shapes import rotor_diameter

HAMMER = 0.5 * 9.80665
"""J: a 0.5 kg hammer dropped from 1 m, to compare with."""


def cautions(machine: Machine, plant: Plant) -> tuple[tuple[str, str], ...]:
    """Return (what it is about, sentence) pairs."""
    return (*_rotors(machine, plant), *GENERAL)


def _rotors(machine: Machine, plant: Plant) -> list[tuple[str, str]]:
    found = []
    for unit in plant.units:
        stated = machine.stabilisers[unit.name]
        top = unit.speed_limit if isinstance(stated, ReactionWheel) else stated.spin_speed
        count = 2 if unit.kind == "scissored pair" else 1
        energy = 0.5 * unit.inertia * top**2
        words = (f"{unit.name}: each rotor stores {amount(energy, 'J')} at {speed(top)}"
                 f"{', and there are two' if count == 2 else ''}, as much as {figure(energy / HAMMER, 2)} blows of a "
                 "0.5 kg hammer dropped from 1 m.")
        diameter = rotor_diameter(stated.rotor)
        if diameter is not None:
            words += f" Its rim runs at {amount(0.5 * diameter * top, 'm/s')}."
        found.append(("Stored energy", words))
        if not isinstance(stated, ReactionWheel):
            push = unit.inertia * top * math.radians(60.0)
            found.append(("Gimbal", f"{unit.name}: a spinning rotor whose frame is turned at 60 deg/s pushes back with "
                                    f"{amount(push, 'N*m')}, square to the turn: do not handle it while it spins."))
    return found


GENERAL = (
    ("Burst and containment", "Rotor stress is not checked here. Prove every rotor by calculation and a guarded spin test "
                              "above its largest speed before a person stands near it, and contain it in use."),
    ("Unbalance", "Balance rotors to a grade fit for their speed (ISO 21940-11); unbalance shakes the bearings and blinds "
                  "the gyroscope."),
    ("Pinch and entanglement", "Legs, gimbals and wheels pinch, and pull in cables, hair and cloth; a wheel at rest may "
                                 "start."),
    ("First tests", "Tether the machine from above so that it cannot reach the floor or a person; keep a stop within reach "
                    "that cuts the drive and lets the wheel run down."),
    ("Battery", "Fuse it, charge it under watch, and leave room for the energy a braking wheel returns: a full battery or a "
                "power supply cannot take it."),
    ("Law", "Local codes and licensed practice prevail over anything printed here."),
)
