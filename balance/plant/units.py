"""The stabilisers as the contact line sees them: the record for people and the kernel's row of numbers."""

from __future__ import annotations

from math import inf, log, nan, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from balance.kernel import layout as at
from balance.machine.machine import Machine
from balance.machine.motors import Gear
from balance.machine.stabilisers import GimballedFlywheel, ReactionWheel, ScissoredPair, Stabiliser
from balance.maths.inertia import rotated
from balance.plant.limits import gimbal_discounted, wheel_discounted
from balance.plant.motors import Drive, drive_of
from balance.plant.record import Unit
from balance.stance.facing import faced_axes, faced_wheel, table_rate
from balance.stance.rotors import WheelDrive, frame_tensor, rotor_mass, wheel_drive

Array = NDArray[np.float64]

SQUARE = 1e-9
"""Shares of an axis along the line below this are rounding: the unit is square to the line."""


def on_line(machine: Machine, name: str, stabiliser: Stabiliser, e_T: Array) -> tuple[Unit, Array]:
    """Return one stabiliser's record and kernel row (UNIT_SIZE,) for the line direction `e_T` (3,), trunk frame."""
    if isinstance(stabiliser, ReactionWheel):
        return _wheel(machine, name, stabiliser, e_T)
    return _gimballed(machine, name, stabiliser, e_T)


def _wheel(machine: Machine, name: str, wheel: ReactionWheel, e_T: Array) -> tuple[Unit, Array]:
    inertia = wheel_drive(wheel, machine.motors)
    drive = drive_of((machine.motors or {})[wheel.motor], wheel.gear, machine.supply)
    axis = faced_wheel(wheel, e_T)
    share = float(axis @ e_T)
    share = share if abs(share) > SQUARE else 0.0
    row = np.zeros(at.UNIT_SIZE)
    row[at.KIND], row[at.AXIS_SHARE] = at.WHEEL, share
    row[at.COUPLING], row[at.OWN_INERTIA] = share * inertia.coupled, inertia.own
    row[at.COULOMB] = wheel.drag.coulomb if wheel.drag else 0.0
    row[at.VISCOUS] = wheel.drag.viscous if wheel.drag else 0.0
    row[at.TORQUE_PER_AMP], row[at.BACK_EMF] = drive.torque_per_amp, drive.back_emf
    row[at.RESISTANCE], row[at.BUS_VOLTAGE] = drive.resistance, drive.voltage
    row[at.CURRENT_LIMIT], row[at.CURRENT_LAG] = drive.current_limit, drive.bandwidth
    row[at.SPEED_LIMIT], row[at.TORQUE_LIMIT] = wheel.speed_limit, wheel.torque_limit
    row[at.STICTION] = wheel.drag.stiction if wheel.drag else 0.0
    most = min(drive.stall_torque, wheel.torque_limit)
    top = min(wheel.speed_limit, drive.no_load_speed)
    if wheel.gear is not None and wheel.gear.backlash > 0.0:
        put_play(row, wheel.gear, inertia, most)
    turning = inertia.wheel + inertia.motor * inertia.ratio**2
    stored = abs(float(row[at.COUPLING])) * top if row[at.COUPLING] != 0.0 else 0.0      # square, and no top speed: none
    return Unit(name, "reaction wheel", "torque", share, turning, stored,
                abs(row[at.COUPLING]) / inertia.own * most, most, top, drive.bandwidth, axis, None, np.array(wheel.at),
                wheel.bias_speed, energy=0.5 * turning * top**2, turn_rate=table_rate(wheel.mount)), row


FLANK_DAMPING = 0.3
"""Damping ratio of flanks that meet: they bounce once or twice (common practice; nobody states it)."""


def put_play(row: Array, gear: Gear, inertia: WheelDrive, most: float) -> None:
    """Put a gear's play into a wheel's row. Without a stated stiffness the peak torque winds up a tenth of the play."""
    rotor = inertia.ratio**2 * inertia.motor
    stiffness = gear.tooth_stiffness or most / (0.1 * gear.backlash)
    row[at.PLAY], row[at.TOOTH_STIFFNESS] = gear.backlash, stiffness
    row[at.TOOTH_DAMPING] = 2.0 * FLANK_DAMPING * sqrt(stiffness * rotor * inertia.wheel / (rotor + inertia.wheel))
    row[at.ROTOR_INERTIA] = rotor
    row[at.ROTOR_PART] = inertia.sense * inertia.ratio * inertia.motor / inertia.coupled


def supply_row(machine: Machine) -> Array | None:
    """Return the kernel's row of the supply, (UNIT_SIZE,); None without a supply or without a wheel that draws on it."""
    supply = machine.supply
    if supply is None or not any(isinstance(unit_, ReactionWheel) for unit_ in machine.stabilisers.values()):
        return None
    row = np.zeros(at.UNIT_SIZE)
    row[at.KIND], row[at.ROLE], row[at.OWN_INERTIA] = at.WHEEL, at.BUS, 1.0
    row[at.BUS_VOLTAGE], row[at.SOURCE_OHMS], row[at.SOURCE_AMPS] = supply.voltage, supply.resistance, supply.peak_current
    row[at.TAKES_BACK], row[at.CAPACITANCE] = float(supply.regenerates), supply.capacitance
    row[at.OVERVOLTAGE], row[at.BRAKE_OHMS] = supply.overvoltage, supply.brake_resistor
    return row


def _gimballed(machine: Machine, name: str, flywheel: GimballedFlywheel, e_T: Array) -> tuple[Unit, Array]:
    """Return a gimballed unit; its frame's principal axes are taken along gimbal axis, spin axis and their normal."""
    s_T, g_T, R = faced_axes(flywheel, e_T)
    rotor, gimbal = rotor_mass(flywheel.rotor), flywheel.gimbal
    pair = isinstance(flywheel, ScissoredPair)
    servo = gimbal.drive == "position servo"
    acting = float(e_T @ np.cross(g_T, s_T))
    acting = acting if abs(acting) > SQUARE else 0.0
    row = np.zeros(at.UNIT_SIZE)
    row[at.KIND] = at.GIMBAL_SERVO if servo else at.GIMBAL_TORQUE
    row[at.E_S0], row[at.E_GXS0], row[at.KAPPA] = float(e_T @ s_T), acting, float(e_T @ g_T)
    row[at.MOMENTUM], row[at.TRANSVERSE] = rotor.spin * flywheel.spin_speed, rotor.transverse
    F = rotated(frame_tensor(flywheel), R)                                   # (3, 3)
    row[at.GIMBAL_INERTIA] = float(g_T @ F @ g_T) + rotor.transverse
    if flywheel.frame_inertia is not None:                                   # else alike about all axes
        across = np.cross(g_T, s_T)
        row[at.SPIN_HELD] = float(s_T @ F @ s_T - across @ F @ across)
    row[at.GIMBAL_DAMPING], row[at.GIMBAL_SPRING] = gimbal.damping, gimbal.spring
    row[at.ANGLE_STOP], row[at.RATE_LIMIT] = gimbal.angle_limit, gimbal.rate_limit
    row[at.DRIVE_TORQUE], row[at.RATE_LAG] = gimbal.torque_limit, 2.0 * np.pi * gimbal.bandwidth
    row[at.COUNT] = 2 if pair else 1
    if servo:
        row[at.RESOLUTION], row[at.DEAD_BAND] = gimbal.resolution, gimbal.dead_band
    row[at.SPIN] = rotor.spin
    spin_up, spin_share = _spinning(machine, flywheel, rotor.spin)
    line_momentum = row[at.COUNT] * row[at.MOMENTUM] * abs(acting)
    return Unit(name, "scissored pair" if pair else "gimballed flywheel", "rate" if servo else "torque", acting,
                rotor.spin, line_momentum * sin(gimbal.angle_limit), line_momentum * gimbal.rate_limit,
                gimbal.rate_limit if servo else gimbal.torque_limit, gimbal.angle_limit,
                row[at.RATE_LAG] if servo else inf, s_T, g_T, np.array(flywheel.at),
                energy=0.5 * row[at.COUNT] * rotor.spin * flywheel.spin_speed**2,
                spin_up=spin_up, spin_share=spin_share, turn_rate=table_rate(flywheel.mount),
                linked=isinstance(flywheel, ScissoredPair) and flywheel.linked), row


def _spinning(machine: Machine, flywheel: GimballedFlywheel, spin: float) -> tuple[float, float]:
    """Return the time in s in which its own motor spins up one flywheel, and its speed ÷ the motor's no-load speed.

    NaN where no motor is stated.
    """
    motor = (machine.motors or {}).get(flywheel.spin_motor or "")
    if motor is None:
        return nan, nan
    drive = drive_of(motor, None, machine.supply)
    return drive.spin_up(spin + motor.rotor_inertia, flywheel.spin_speed), flywheel.spin_speed / drive.no_load_speed


def discounted(row: Array, pole: float) -> float:
    """Return ∫ e^{−ps} T(s) ds in N·m·s of one unit's all-out manoeuvre from rest (drag left out)."""
    if row[at.KIND] != at.WHEEL:
        momentum = row[at.COUNT] * row[at.MOMENTUM] * abs(row[at.E_GXS0])
        return gimbal_discounted(momentum, row[at.RATE_LIMIT], row[at.ANGLE_STOP], pole)
    drive = Drive(row[at.TORQUE_PER_AMP], row[at.BACK_EMF], row[at.RESISTANCE], row[at.BUS_VOLTAGE],
                  row[at.CURRENT_LIMIT], row[at.CURRENT_LAG])
    most = min(drive.stall_torque, row[at.TORQUE_LIMIT])
    kink = (drive.voltage - drive.resistance * most / drive.torque_per_amp) / drive.back_emf
    corner = kink * row[at.OWN_INERTIA] / most
    decay = drive.time_constant(row[at.OWN_INERTIA])
    end = _end(row, drive, most, kink, corner, decay)
    share = float(abs(row[at.COUPLING]) / row[at.OWN_INERTIA])
    return share * wheel_discounted(most, corner, decay, end, pole)


def _end(row: Array, drive: Drive, most: float, kink: float, corner: float, decay: float) -> float:
    """Return when the all-out wheel reaches its speed limit in s; inf where the voltage stops it first."""
    top = row[at.SPEED_LIMIT]
    if top <= kink:
        return float(top * row[at.OWN_INERTIA] / most)
    if top >= drive.no_load_speed:
        return inf
    return float(corner - decay * log(1.0 - (top - kink) / (drive.no_load_speed - kink)))
