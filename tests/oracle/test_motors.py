"""Motors against worked problems and data sheets (references 12.01, 12.02)."""

from __future__ import annotations

from math import inf, log

import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from balance.base.units import factor_of, to_si
from balance.machine.motors import Gear, Motor, Supply
from balance.plant.motors import Drive, drive_of

RPM = factor_of("rpm")


def drive(constant, resistance, voltage, current=inf, emf=None):
    return Drive(constant, constant if emf is None else emf, resistance, voltage, current, inf)


def test_the_same_constant_three_ways():
    """12.01: a thesis's 285 rpm/V and a firmware header's 33.5e-3 N·m/A of the same motor (read)."""
    constant = to_si("285 rpm/V", "torque constant")
    assert constant == pytest.approx(0.0335, rel=5e-4)
    assert pytest.approx(285.0, rel=5e-4) == 1.0 / 33.5e-3 / RPM
    per_krpm = 1.0 / (1000.0 * RPM)                              # V/krpm in V·s/rad = N·m/A
    assert per_krpm / to_si("1 ozf*in", "torque") == pytest.approx(1.3524 / 1.0, rel=1e-4)
    # read from two terminals by the plant: a motor without a gear keeps its constant in both senses of the word
    motor = Motor(torque_constant=constant, resistance=1.03, peak_current=30.0, continuous_current=5.0)
    direct = drive_of(motor, None, Supply(24.0))
    assert direct.torque_per_amp == direct.back_emf == constant


def test_motor_of_a_class_problem():
    """12.01, motor A: 12 V, 3800 rpm no-load, 30 mN·m stall (read)."""
    constant = 12.0 / (3800.0 * RPM)
    motor = drive(constant, 12.0 * constant / 0.03, 12.0)
    assert motor.no_load_speed / RPM == pytest.approx(3800.0, rel=1e-12)
    assert motor.stall_torque == pytest.approx(0.03, rel=1e-12)
    torque = motor.torque_at(2500.0 * RPM)
    assert torque * 1e3 == pytest.approx(10.263, rel=1e-4)
    assert torque * 2500.0 * RPM == pytest.approx(2.687, rel=1e-3)
    assert motor.most_power == pytest.approx(2.985, rel=1e-3)
    powers = [motor.torque_at(f * motor.no_load_speed) * f * motor.no_load_speed for f in (0.49, 0.5, 0.51)]
    assert powers[1] == pytest.approx(motor.most_power, rel=1e-12)
    assert max(powers[0], powers[2]) < powers[1]


def test_motor_with_two_constants():
    """12.01, motor B: K_t = 0.12 N·m/A but 12 V/krpm, as in the source (read)."""
    emf = 12.0 / (1000.0 * RPM)
    assert emf == pytest.approx(0.114592, rel=1e-5)
    motor = drive(0.12, 1.5, 10.0, emf=emf)
    assert motor.no_load_speed / RPM == pytest.approx(833.3, rel=1e-4)
    assert motor.stall_torque / motor.torque_per_amp == pytest.approx(6.667, rel=1e-4)
    assert motor.stall_torque == pytest.approx(0.8, rel=1e-6)
    load = 0.6 / motor.torque_per_amp
    assert load == pytest.approx(5.0, rel=1e-9)
    # the speed up to which 5 A flow is the corner of the same motor with its current limited there
    assert drive(0.12, 1.5, 10.0, load, emf).corner_speed / RPM == pytest.approx(208.33, rel=1e-4)
    assert brentq(lambda w: motor.torque_at(w) - 0.6, 0.0, motor.no_load_speed) / RPM == pytest.approx(208.33, rel=1e-4)


def test_winding_data():
    """12.02: a research cube's parameter file (read); results derived."""
    motor = drive(0.0335, 1.03, 24.0)
    assert motor.voltage / motor.resistance == pytest.approx(23.30097, rel=1e-6)
    assert motor.stall_torque == pytest.approx(0.7805825, rel=1e-6)
    assert motor.no_load_speed / RPM == pytest.approx(6841.287, rel=1e-6)
    assert motor.slope / RPM / 1e3 == pytest.approx(8.764335, rel=1e-6)
    assert motor.most_power == pytest.approx(139.8058, rel=1e-6)
    assert motor.motor_constant == pytest.approx(0.0330085, rel=1e-5)
    assert motor.time_constant(1.25e-4) == pytest.approx(0.1147249, rel=1e-6)
    half = lambda _, w: w[0] - 0.5 * motor.no_load_speed                       # noqa: E731
    run = solve_ivp(lambda _, w: [motor.torque_at(w[0]) / 1.25e-4], (0.0, 1.0), [0.0], events=half, rtol=1e-9, atol=1e-9)
    assert run.t_events[0][0] == pytest.approx(0.0795212, rel=1e-5)
    assert motor.time_constant(1.25e-4) * log(2.0) == pytest.approx(0.0795212, rel=1e-5)


def test_no_load_point_with_friction():
    """12.02: the friction polynomial of the same file; its own stated no-load speed, 6710 rpm, agrees to 0.4 %."""
    motor = drive(0.0335, 1.03, 24.0)
    friction = lambda w: 2.46e-3 + 1.06e-5 * w + 1.7e-8 * w**2                 # noqa: E731
    speed = brentq(lambda w: motor.torque_at(w) - friction(w), 0.0, motor.no_load_speed, xtol=1e-9)
    assert speed / RPM == pytest.approx(6681.77, rel=1e-5)
    assert speed / RPM == pytest.approx(6710.0, rel=5e-3)
    assert friction(speed) / motor.torque_per_amp == pytest.approx(0.543288, rel=1e-5)


def test_gear_and_winding_conventions():
    """Trap: values per phase or RMS. √3, 2 and √2 of a star-wound motor; the gear multiplies torque, divides speed."""
    plain = Motor(torque_constant=0.05, resistance=0.3, peak_current=10.0, continuous_current=4.0)
    phase = Motor(torque_constant=0.05 / 3**0.5, resistance=0.15, peak_current=10.0, continuous_current=4.0, values="phase")
    rms = Motor(torque_constant=0.05 * 2**0.5, resistance=0.3, peak_current=10.0 / 2**0.5, continuous_current=4.0,
                amplitude="rms")
    gear = Gear(ratio=4.0, sense="reversed", efficiency=0.9)
    ours = drive_of(plain, gear, Supply(24.0, peak_current=8.0))
    for other in (phase, rms):
        twin = drive_of(other, gear, Supply(24.0, peak_current=8.0))
        assert (twin.torque_per_amp, twin.back_emf, twin.resistance, twin.current_limit) == pytest.approx(
            (ours.torque_per_amp, ours.back_emf, ours.resistance, ours.current_limit), rel=1e-12)
    assert (ours.torque_per_amp, ours.back_emf) == pytest.approx((0.9 * 4 * 0.05, 4 * 0.05), rel=1e-12)
    assert ours.current_limit == 10.0                # the battery's 8 A bound the bus, not the winding (`kernel.supply`)
    assert drive_of(plain, gear, None).current_limit == 10.0
    # torque is held by the current up to the corner, by the voltage beyond, and gone at no load
    corner = ours.corner_speed
    assert ours.torque_at(0.999 * corner) == pytest.approx(ours.stall_torque, rel=1e-12)
    assert ours.torque_at(1.001 * corner) < ours.stall_torque
    assert ours.torque_at(ours.no_load_speed) == pytest.approx(0.0, abs=1e-12)
