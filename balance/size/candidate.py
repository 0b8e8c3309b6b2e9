"""One stabiliser that could be built, and the machine that carries it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf

import numpy as np

from balance.goal.sizing import Sizing
from balance.machine.machine import Machine
from balance.machine.motors import Gear
from balance.machine.solids import Disc, Part, PointMass, RimAndWeb, RimWebSize, Ring, RoundSize, Solid, TubeSize, Vector
from balance.machine.stabilisers import (
    Gimbal,
    GimballedFlywheel,
    Mount,
    ReactionWheel,
    Rotor,
    ScissoredPair,
    Stabiliser,
    Turntable,
)
from balance.size.parts import Parts, bare
from balance.stance.rotors import rotor_mass

WHEEL, PAIR, SINGLE = "reaction wheel", "scissored pair", "gimballed flywheel"
BORE = 0.08
"""Bore as a share of the outer diameter (assumed: a shaft and its hub)."""
FRAME = 0.35
"""Gimbal frame, bearings and guard as a share of what they carry: rotor, spin motor (assumed)."""
TABLE = 0.25
"""Turntable as a share of what it carries (assumed); its rate is the file's or 2 rad/s."""
TABLE_RATE = 2.0
"""rad/s."""


@dataclass(frozen=True)
class Candidate:
    """One stabiliser; all rotors of it are alike. SI."""

    family: str
    shape: str            # "disc" | "ring" | "rim and web"
    material: str
    diameter: float       # m
    hollow: float         # inner over outer diameter of ring or rim; 0 for a disc
    length: float         # m
    web: float            # m, of a rim and web
    motor: str            # drives the wheel, or spins the flywheel
    ratio: float          # gear between motor and wheel
    drive: str            # gimbal drive; "" for wheels
    speed: float          # rad/s: the wheel's speed limit, the flywheel's spin speed
    torque_limit: float = inf     # N·m: at the wheel; at the gimbal
    rate_limit: float = inf       # rad/s of the gimbal

    @property
    def solid(self) -> Solid:
        """The rotor's shape."""
        if self.shape == "disc":
            return Disc(RoundSize(self.length, self.diameter))
        inner = self.hollow * self.diameter
        if self.shape == "ring":
            return Ring(TubeSize(self.length, self.diameter, inner))
        return RimAndWeb(RimWebSize(self.diameter, inner, self.length, self.web, BORE * self.diameter))

    def words(self) -> str:
        """Say what it is in a few words."""
        rotor = f"{self.material} {self.shape} {1e3 * self.diameter:.0f} × {1e3 * self.length:.1f} mm"
        geared = f", gear {self.ratio:g}" if self.ratio != 1.0 else ""
        return f"{rotor}, {self.motor}{geared}" + (f", {self.drive}" if self.drive else "")


def rotor_of(candidate: Candidate, parts: Parts) -> Rotor:
    """Return the rotor of a candidate, by the density of its material."""
    assert parts.materials is not None
    return Rotor(density=parts.materials[candidate.material].density, solid=candidate.solid)


def added_mass(candidate: Candidate, parts: Parts, lines: int) -> float:
    """Return what the whole stabiliser adds in kg; `lines`: 1 where all contact lines are parallel."""
    assert parts.motors is not None
    rotor = rotor_mass(rotor_of(candidate, parts)).mass + parts.motors[candidate.motor].mass
    if candidate.family == WHEEL:
        return rotor * (1 if lines == 1 else 2)
    unit = frame_mass(candidate, parts) + rotor_mass(rotor_of(candidate, parts)).mass
    whole = unit * (2 if candidate.family == PAIR else 1)
    return whole * (1.0 if lines == 1 else 1.0 + TABLE)


def frame_mass(candidate: Candidate, parts: Parts) -> float:
    """Return all of one gimbal but its rotor in kg: spin motor, gimbal drive, and the frame that carries them."""
    assert parts.motors is not None and parts.drives is not None                                       # noqa: PT018
    carried = rotor_mass(rotor_of(candidate, parts)).mass + parts.motors[candidate.motor].mass
    return parts.motors[candidate.motor].mass + parts.drives[candidate.drive].mass + FRAME * carried


def centre(machine: Machine, sizing: Sizing) -> Vector:
    """Return where the stabiliser sits: as the design file says, else the middle of the present ones."""
    if sizing.at is not None:
        return sizing.at
    places = np.array([s.at for s in machine.stabilisers.values()])
    middle = places.mean(axis=0)
    return (float(middle[0]), float(middle[1]), float(middle[2]))


def stabilisers_of(candidate: Candidate, machine: Machine, sizing: Sizing, parts: Parts,
                   lines: int) -> dict[str, Stabiliser]:
    """Return the stabilisers by name: one wheel along a single line, two crossed for several; gyros on a turntable then."""
    at, rotor = centre(machine, sizing), rotor_of(candidate, parts)
    if candidate.family == WHEEL:
        return _wheels(candidate, machine, at, rotor, lines)
    assert parts.drives is not None
    drive, weight = parts.drives[candidate.drive], frame_mass(candidate, parts)
    gimbal = Gimbal(angle_limit=drive.angle, rate_limit=min(drive.rate, candidate.rate_limit),
                    torque_limit=min(drive.torque, candidate.torque_limit), bandwidth=drive.bandwidth,
                    inertia=0.5 * FRAME * weight * (0.5 * candidate.diameter) ** 2)
    mount = Mount(Turntable(TABLE_RATE)) if lines > 1 else None
    if candidate.family == PAIR:
        return {"gyros": ScissoredPair(rotor=rotor, spin_speed=candidate.speed, gimbal=gimbal, at=at, mount=mount,
                                       spin_motor=candidate.motor, frame_mass=weight, spacing=1.15 * candidate.diameter)}
    return {"gyro": GimballedFlywheel(rotor=rotor, spin_speed=candidate.speed, gimbal=gimbal, at=at, mount=mount,
                                      spin_motor=candidate.motor, frame_mass=weight)}


def _wheels(candidate: Candidate, machine: Machine, at: Vector, rotor: Rotor, lines: int) -> dict[str, Stabiliser]:
    """Return one wheel or two crossed ones, in the places of the present wheels where those are as many."""
    now = {n: s for n, s in machine.stabilisers.items() if isinstance(s, ReactionWheel)}
    count = 1 if lines == 1 else 2
    gear = Gear(ratio=candidate.ratio, efficiency=GEARED) if candidate.ratio != 1.0 else None
    made = ReactionWheel(rotor=rotor, motor=candidate.motor, gear=gear, speed_limit=candidate.speed,
                         torque_limit=candidate.torque_limit)
    if len(now) == count and len(now) == len(machine.stabilisers):
        return {n: replace(made, axis=s.axis, at=s.at if count > 1 else at, drag=s.drag) for n, s in now.items()}
    if count == 1:
        return {"wheel": replace(made, at=at)}
    lift = 0.55 * candidate.diameter                         # crossed wheels stand one above the other
    return {"long-wheel": replace(made, at=(at[0], at[1], at[2] + lift)),
            "side-wheel": replace(made, at=(at[0], at[1], at[2] - lift), axis=(0.0, 1.0, 0.0))}


GEARED = 0.9
"""Efficiency of one planetary or belt stage (common practice)."""


def fitted(machine: Machine, candidate: Candidate, sizing: Sizing, parts: Parts, lines: int) -> Machine:
    """Return the machine with this stabiliser in place of its own: parts, masses, motors and all."""
    assert parts.motors is not None
    units = stabilisers_of(candidate, machine, sizing, parts, lines)
    motors = {candidate.motor: bare(parts.motors[candidate.motor])}
    kept = without(machine, sizing)
    changed = replace(kept, stabilisers=units, motors=motors, marks={})
    if machine.lumped is not None:
        return _lumped(changed, candidate, sizing, parts, lines)
    body = dict(kept.body or {})
    if candidate.family == WHEEL:
        # the motor's rotor is in the wheel's inertia; its mass stays with the stator, at the wheel's centre
        body |= {f"{name}-motor": Part(mass=parts.motors[candidate.motor].mass, solid=PointMass(), at=unit.at)
                 for name, unit in units.items()}
    elif lines > 1:
        carried = added_mass(candidate, parts, lines)
        body["turntable"] = Part(mass=carried * TABLE / (1.0 + TABLE), at=centre(machine, sizing),
                                 solid=Disc(RoundSize(0.018, 1.5 * candidate.diameter)))
    return replace(changed, body=body)


def without(machine: Machine, sizing: Sizing) -> Machine:
    """Return the machine without the parts that come out; a lumped one without the replaced mass."""
    if machine.lumped is None:
        return replace(machine, body={n: p for n, p in (machine.body or {}).items() if n not in sizing.replaces})
    z, out, now = centre(machine, sizing)[2], sizing.replaced_mass, machine.lumped
    mass = now.mass - out
    return replace(machine, lumped=replace(now, mass=mass, height=(now.mass * now.height - out * z) / mass,
                                           inertia=now.inertia - out * z * z))


def _lumped(machine: Machine, candidate: Candidate, sizing: Sizing, parts: Parts, lines: int) -> Machine:
    """Return the lumped machine with the stabiliser's mass, height and inertia (spin left out) added."""
    assert machine.lumped is not None
    now, z = machine.lumped, centre(machine, sizing)[2]
    more = added_mass(candidate, parts, lines)
    mass = now.mass + more
    own = 0.0
    if candidate.family != WHEEL:
        count = 2 if candidate.family == PAIR else 1
        own = count * rotor_mass(rotor_of(candidate, parts)).transverse
    return replace(machine, lumped=replace(now, mass=mass, height=(now.mass * now.height + more * z) / mass,
                                           inertia=now.inertia + more * z * z + own))


def web_of(length: float) -> float:
    """Return the web's thickness for a rim of this length: a fifth, at least 2 mm (assumed: what can be turned)."""
    return max(0.2 * length, min(2e-3, length))


