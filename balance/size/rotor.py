"""One candidate's rotor at its top speed: strength, burst, energy, unbalance, bearings, heat, battery. SI.

Cautions, not decoration: nothing here replaces a spin test behind a guard.  Fillets, keys, glue, balancing holes and the
hub or spider that must carry a ring are not counted.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf

import numpy as np
from numpy.typing import NDArray

from balance.goal.sizing import GRADES
from balance.machine.machine import Machine
from balance.maths.discs import mean_hoop, speed_at, stresses
from balance.maths.unbalance import aliased, offset_allowed, residual, shaking_force
from balance.maths.windings import COPPER, rise
from balance.plant.motors import Drive
from balance.size.candidate import BORE, PAIR, WHEEL, Candidate, rotor_of
from balance.size.question import Question
from balance.stance.rotors import rotor_mass

Array = NDArray[np.float64]

AIR, VISCOSITY = 1.204, 1.825e-5
"""kg/m³ and Pa·s: air at 20 °C and sea level (standard tables, from memory)."""
NEAR_TOP = 0.98
"""Spin-up is timed to this share of the top speed, where the motor's own line would never quite reach it."""
EFFICIENCY = 0.8
"""Of a small drive that only overcomes windage (common practice)."""


@dataclass(frozen=True)
class RotorCheck:
    """What a candidate's rotor does at its top speed; each of two alike where there are two."""

    stress: float             # Pa, largest principal, at overspeed
    strength_safety: float    # yield strength ÷ stress
    burst_speed: float        # rad/s where the peak reaches the ultimate strength (brittle)
    burst_ductile: float      # rad/s where the mean over a cut does (Robinson)
    energy: float             # J
    rim_speed: float          # m/s
    offset: float             # m: permissible offset of the centre of mass
    unbalance: float          # kg·m
    shaking: float            # N, turning force it still makes
    vibration: float          # m/s², of the whole machine by that force
    imu_share: float          # of the accelerometer's range
    seen_at: float            # Hz at which the loop sees the rotation, aliased by its sampling
    bearing_load: float       # N·m: H × rate of the gimbal frame (wheel: of the body)
    spin_up: float            # s to 98 % of the top speed
    windage: float            # W at the top speed
    winding_rise: float       # K, steady, at the RMS torque of the hardest trial
    winding_allowed: float    # K
    runtime: float            # s on the battery, at that RMS torque without end; inf: no battery stated
    crossing: float           # rad/s of the wheel at which unbalance meets the flexible mode; inf: none stated


def rotor_check(question: Question, candidate: Candidate, rms_torque: float, lean_rate: float,
                mode: float = inf) -> RotorCheck:
    """Return the checks of one candidate.

    `rms_torque`: N·m about the line in the hardest trial; `lean_rate`: rad/s the body may turn at; `mode`: rad/s of the
    leg-compliance mode, inf where the legs are rigid.
    """
    sizing = question.sizing
    stock = (question.parts.materials or {})[candidate.material]
    own, motor = rotor_mass(rotor_of(candidate, question.parts)), (question.parts.motors or {})[candidate.motor]
    edges, heights = profile(candidate)
    peak, mean = stresses(edges, heights, stock.density, stock.poisson).peak, mean_hoop(edges, heights, stock.density)
    top, grade = candidate.speed, GRADES[sizing.balance_grade]
    stress = peak * (sizing.overspeed * top) ** 2
    shaking = shaking_force(grade, top, own.mass)
    mass = min(line.mass for line in question.lines)
    imu = question.machine.imu
    rate = lean_rate if candidate.family == WHEEL else (question.parts.drives or {})[candidate.drive].rate
    air = windage(candidate.diameter, top)
    heat, power = _heat(question, candidate, rms_torque, air)
    return RotorCheck(
        stress=stress, strength_safety=stock.strength / stress, burst_speed=speed_at(peak, stock.ultimate),
        burst_ductile=speed_at(mean, stock.ultimate), energy=0.5 * own.spin * top**2,
        rim_speed=0.5 * candidate.diameter * top,
        offset=offset_allowed(grade, top), unbalance=residual(grade, top, own.mass), shaking=shaking,
        vibration=shaking / mass, imu_share=shaking / mass / imu.accel_range if imu is not None else 0.0,
        seen_at=aliased(top, question.goal.loop.rate), bearing_load=own.spin * top * rate,
        spin_up=_spin_up(question, candidate, own.spin), windage=air, winding_rise=heat, winding_allowed=motor.hottest,
        runtime=_runtime(question.machine, sizing.battery, power), crossing=mode if mode < top else inf)


def profile(candidate: Candidate) -> tuple[Array, Array]:
    """Return (edges in m, thicknesses in m) of a candidate's rotor as `maths.discs` reads them."""
    R = 0.5 * candidate.diameter
    if candidate.shape == "rim and web":
        return np.array([BORE * R, candidate.hollow * R, R]), np.array([candidate.web, candidate.length])
    inner = candidate.hollow if candidate.shape == "ring" else BORE
    return np.array([inner * R, R]), np.array([candidate.length])


def windage(diameter: float, speed: float) -> float:
    """Return the power air takes from a free disc in W, both faces (Schlichting, "Boundary-Layer Theory", from memory).

    M = C ρ ω² R⁵/2 with C = 3.87/√Re below Re = ρωR²/μ of 3e5 and 0.146/Re^0.2 above; a guard may double it.
    """
    R = 0.5 * diameter
    reynolds = AIR * speed * R * R / VISCOSITY
    if reynolds == 0.0:
        return 0.0
    coefficient = 3.87 / reynolds**0.5 if reynolds < 3e5 else 0.146 / reynolds**0.2
    return float(0.5 * coefficient * AIR * speed**3 * R**5)


def _drive(question: Question, candidate: Candidate) -> Drive:
    motor = (question.parts.motors or {})[candidate.motor]
    return question.drive(motor, candidate.ratio)


def _spin_up(question: Question, candidate: Candidate, spin: float) -> float:
    """Return the time to 98 % of the top speed in s: constant torque, then the motor's line; inf where it cannot."""
    drive, motor = _drive(question, candidate), (question.parts.motors or {})[candidate.motor]
    return drive.spin_up(spin + candidate.ratio**2 * motor.rotor_inertia, NEAR_TOP * candidate.speed)


def _heat(question: Question, candidate: Candidate, rms_torque: float, air: float) -> tuple[float, float]:
    """Return (steady rise of the winding in K, power drawn in W); a gyro's spin motor only overcomes the air."""
    drive, motor = _drive(question, candidate), (question.parts.motors or {})[candidate.motor]
    if candidate.family == WHEEL:
        amps = rms_torque / drive.torque_per_amp             # one wheel bears it all: the hardest line of two crossed ones
        return rise(amps, drive.resistance, motor.thermal, COPPER), amps**2 * drive.resistance
    amps = air / candidate.speed / drive.torque_per_amp
    each = air / EFFICIENCY + amps**2 * drive.resistance
    return rise(amps, drive.resistance, motor.thermal, COPPER), each * (2 if candidate.family == PAIR else 1)


def _runtime(machine: Machine, charge: float, power: float) -> float:
    """Return how long the battery lasts for the stabiliser alone in s."""
    if machine.supply is None or power <= 0.0:
        return inf
    return charge * machine.supply.voltage / power


def dropped(energy: float) -> float:
    """Return the height in m from which one kilogram would have to drop to bring as much energy."""
    return energy / 9.80665


