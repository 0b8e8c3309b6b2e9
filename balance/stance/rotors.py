"""Masses and inertias of the stabilisers, rotors locked and gimbals at angle zero."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError
from balance.machine.machine import Machine
from balance.machine.materials import density_of
from balance.machine.motors import Motor
from balance.machine.stabilisers import GimballedFlywheel, ReactionWheel, Rotor, ScissoredPair, Stabiliser
from balance.maths.inertia import axial, rotated
from balance.stance.bodies import Body
from balance.stance.facing import faced_axes, faced_wheel
from balance.stance.parts import solid_mass, stated_tensor
from balance.stance.problems import problem

Array = NDArray[np.float64]


@dataclass(frozen=True)
class RotorMass:
    """A spinning part: mass, inertia about its axis and square to it."""

    mass: float         # kg
    spin: float         # kg·m²
    transverse: float   # kg·m²


@dataclass(frozen=True)
class WheelDrive:
    """A reaction wheel with its motor: the mass matrix of (θ, Ω) is [[J, α·coupled], [α·coupled, own]]."""

    wheel: float    # kg·m²: I, without the motor's rotor
    motor: float    # kg·m²: J_r
    ratio: float    # N, motor turns per turn of the wheel
    sense: float    # s: +1 same, −1 reversed

    @property
    def coupled(self) -> float:
        """I + s N J_r in kg·m²."""
        return self.wheel + self.sense * self.ratio * self.motor

    @property
    def own(self) -> float:
        """I + N² J_r in kg·m²."""
        return self.wheel + self.ratio**2 * self.motor

    @property
    def locked(self) -> float:
        """I + J_r in kg·m²: what both add about the wheel's axis when nothing turns against the body."""
        return self.wheel + self.motor


def rotor_mass(rotor: Rotor) -> RotorMass:
    """Return a rotor's mass and inertias: stated ones first, else its solid's (whose axis is z).

    A stated spin inertia without a transverse one is taken as a thin disc's: half of it.
    """
    mass, I_own = solid_mass(rotor.solid, rotor.mass, density_of(rotor.density, rotor.material))
    spin = rotor.spin if rotor.spin is not None else float(I_own[2, 2])
    if rotor.transverse is not None:
        return RotorMass(mass, spin, rotor.transverse)
    across = float(I_own[0, 0] + I_own[1, 1]) / 2.0
    return RotorMass(mass, spin, across if rotor.spin is None or across > 0.0 else spin / 2.0)


def wheel_drive(wheel: ReactionWheel, motors: Mapping[str, Motor] | None) -> WheelDrive:
    """Return a wheel's inertias with its motor's.

    Where the file says that the wheel's inertia already holds the motor's rotor, it holds it as the wheel
    feels it: N² J_r.
    """
    motor = (motors or {}).get(wheel.motor)
    rotor = motor.rotor_inertia if motor is not None else 0.0
    spin = rotor_mass(wheel.rotor).spin
    if wheel.gear is None:
        return WheelDrive(spin, rotor, 1.0, 1.0)
    ratio, sense = wheel.gear.ratio, 1.0 if wheel.gear.sense == "same" else -1.0
    return WheelDrive(spin - ratio**2 * rotor if wheel.gear.includes_rotor else spin, rotor, ratio, sense)


def stabiliser_bodies(name: str, unit_: Stabiliser, motors: Mapping[str, Motor] | None,
                      e_T: Array) -> list[Body]:
    """Return a stabiliser's bodies in the trunk's axes; turntables face the line's direction `e_T` (3,)."""
    rotor = rotor_mass(unit_.rotor)
    at = np.array(unit_.at)
    if isinstance(unit_, ReactionWheel):
        drive = wheel_drive(unit_, motors)
        across = rotor.transverse + drive.motor / 2.0        # the motor's rotor as a thin disc: a tensor a body can have
        return [Body(name, rotor.mass, at, axial(drive.locked, across, faced_wheel(unit_, e_T)))]
    s_T, g_T, R = faced_axes(unit_, e_T)
    I_own = axial(rotor.spin, rotor.transverse, s_T) + rotated(frame_tensor(unit_), R)
    mass = rotor.mass + unit_.frame_mass
    if isinstance(unit_, ScissoredPair):
        arm = unit_.spacing / 2.0 * g_T
        return [Body(name, mass, at - arm, I_own), Body(name, mass, at + arm, I_own)]
    return [Body(name, mass, at, I_own)]


def spin_about_line(machine: Machine, e_T: Array) -> float:
    """Return what locking the rotors adds to an inertia about the line `e_T` (3,) with them free to spin (kg·m²).

    A wheel α²(I + sN J_r)²/(I + N² J_r) — I α² where nothing is geared — and I_s σ² per gimballed rotor.
    """
    added = 0.0
    for unit_ in machine.stabilisers.values():
        if isinstance(unit_, ReactionWheel):
            drive = wheel_drive(unit_, machine.motors)
            added += float(faced_wheel(unit_, e_T) @ e_T) ** 2 * drive.coupled**2 / drive.own
        else:
            s_T, _, _ = faced_axes(unit_, e_T)
            count = 2 if isinstance(unit_, ScissoredPair) else 1
            added += count * rotor_mass(unit_.rotor).spin * float(s_T @ e_T) ** 2
    return added


def frame_tensor(unit_: GimballedFlywheel) -> Array:
    """Return one gimbal frame's tensor (3, 3) at angle zero, in the axes of the file.

    Only the inertia about the gimbal axis stated: taken alike about all axes, the one choice that does not
    vary with the gimbal's angle whatever the line's direction.
    """
    if unit_.frame_inertia is not None:
        return stated_tensor(unit_.frame_inertia)
    return unit_.gimbal.inertia * np.eye(3)


def check_rotors(machine: Machine) -> None:
    """Raise InputError for a wheel of less inertia than the motor's rotor it is said to hold."""
    found = []
    for name, unit_ in machine.stabilisers.items():
        if isinstance(unit_, ReactionWheel):
            drive = wheel_drive(unit_, machine.motors)
            if drive.wheel <= 0.0:
                held = drive.ratio**2 * drive.motor
                found.append(problem(
                    machine, f"stabilisers.{name}.gear.includes_rotor",
                    f"a spin inertia of {drive.wheel + held:.4g} kg*m^2",
                    f"more than the rotor as the wheel feels it, ratio² × rotor_inertia = {held:.4g} kg*m^2",
                    "leave includes_rotor out if the wheel was weighed without its motor"))
            if unit_.gear is not None and unit_.gear.backlash > 0.0 and drive.motor <= 0.0:
                found.append(problem(machine, f"stabilisers.{name}.gear.backlash",
                                     f"play behind the motor `{unit_.motor}`, which has no `rotor_inertia`",
                                     "a motor with `rotor_inertia`", "it is what crosses the play"))
    if found:
        raise InputError(found)
