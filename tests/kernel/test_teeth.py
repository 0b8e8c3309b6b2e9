"""Play in a gear, and servos with steps and a dead band: closed forms and balances."""

from __future__ import annotations

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.integrate import longest_step
from balance.kernel.teeth import tooth_torque
from balance.kernel.tick import servo_steps
from tests.kernel.rigs import body, events, law, run, wheel

STILL = {"inertia": 1e6, "stiffness": 1e-300, "mass": 1.0, "height": 1.0}
ROTOR, WHEEL, PLAY, STIFF = 4e-4, 2e-3, 0.02, 800.0


def geared(damping=0.0, coupling=0.0):
    """Return a motor's rotor and a wheel behind play."""
    motor = wheel(inertia=ROTOR, torque=10.0, speed=1e6)
    behind = np.zeros((1, at.UNIT_SIZE))
    row = behind[0]
    row[at.KIND], row[at.ROLE], row[at.PARTNER], row[at.OWN_INERTIA] = at.WHEEL, at.TOOTHED, 0, WHEEL
    row[at.PLAY], row[at.TOOTH_STIFFNESS], row[at.TOOTH_DAMPING] = PLAY, STIFF, damping
    units = np.vstack([motor, behind])
    units[:, at.COUPLING] = coupling * units[:, at.OWN_INERTIA]
    return units


def test_flanks_push_and_never_pull():
    assert tooth_torque(0.009, 50.0, PLAY, STIFF, 1.0) == 0.0
    assert tooth_torque(0.011, 0.0, PLAY, STIFF, 1.0) == pytest.approx(0.8)
    assert tooth_torque(-0.011, 0.0, PLAY, STIFF, 1.0) == pytest.approx(-0.8)
    assert tooth_torque(0.011, 0.5, PLAY, STIFF, 1.0) == pytest.approx(1.3)
    assert tooth_torque(0.011, -9.0, PLAY, STIFF, 1.0) == 0.0      # parting faster than the spring pushes


def test_the_motor_crosses_half_the_play_alone():
    """½ (τ/J) t² = play/2 from the middle; until then the wheel does not know."""
    units, torque = geared(), 0.2
    meets = np.sqrt(PLAY * ROTOR / torque)
    for t, moved in ((0.98 * meets, False), (1.05 * meets, True)):
        ran = run(body(**STILL), units, law(hold=True), events(t, longest=2e-6), memory=torque)
        assert bool(ran.X[4] > 0.0) is moved
    assert ran.X[2] < torque * t / ROTOR
    before = run(body(**STILL), units, law(hold=True), events(0.98 * meets, longest=2e-5), memory=torque)
    assert before.X[5] == pytest.approx(0.5 * torque / ROTOR * (0.98 * meets) ** 2, rel=1e-9)


def test_momentum_goes_through_and_energy_stays_without_damping():
    """J Ω_m + I Ω = ∫τ dt at any time; ½JΩ_m² + ½IΩ² + ½k x² is kept once the torque is off."""
    units = geared()
    ran = run(body(**STILL), units, law(), events(0.2, longest=5e-6), X=[0, 0, 30.0, 0, 0.0, 0.0])
    motor, own, gap = ran.X[2], ran.X[4], abs(ran.X[5])
    assert ROTOR * motor + WHEEL * own == pytest.approx(ROTOR * 30.0, rel=1e-10)
    spring = 0.5 * STIFF * max(gap - PLAY / 2, 0.0) ** 2
    kept = 0.5 * ROTOR * motor**2 + 0.5 * WHEEL * own**2 + spring
    assert kept == pytest.approx(0.5 * ROTOR * 900.0, rel=3e-5)    # 22 kinks at the flanks, RK4 at 5 µs: measured 1.1e-5
    lossy = run(body(**STILL), geared(0.3), law(), events(0.2, longest=5e-6), X=[0, 0, 30.0, 0, 0.0, 0.0])
    assert lossy.X[2] == pytest.approx(lossy.X[4], abs=0.3)         # the twin: with damping they soon turn together


def test_pushed_for_long_they_turn_as_one():
    units = geared(0.4)
    ran = run(body(**STILL), units, law(hold=True), events(0.5, longest=longest_step(units)), memory=0.2)
    assert ran.X[2] == pytest.approx(ran.X[4], rel=1e-3)
    assert ran.X[4] == pytest.approx(0.2 * 0.5 / (ROTOR + WHEEL), rel=5e-3)
    assert ran.X[5] == pytest.approx(PLAY / 2 + 0.2 * WHEEL / (ROTOR + WHEEL) / STIFF, rel=1e-3)


def test_both_parts_push_the_body():
    """The body feels what rotor and wheel store about the line: nothing is made or lost across the play."""
    units, b = geared(0.4, coupling=0.7), body(inertia=0.3, stiffness=1e-300, mass=1.0, height=1.0)
    ran = run(b, units, law(hold=True), events(0.3, longest=longest_step(units)), memory=0.2)
    stored = sum(units[i, at.COUPLING] * ran.X[2 + 2 * i] for i in (0, 1))
    assert 0.3 * ran.X[1] + stored == pytest.approx(0.0, abs=1e-12)
    assert ran.metrics[outcome.PEAK_MOMENTUM] > 0.04


def test_a_servo_follows_in_steps_and_rests_in_its_dead_band():
    """0.3 rad/s over 2 s in steps of 0.01 rad: every angle sent is a whole number of steps, 0.6 rad in all."""
    asked = sent = 0.0
    seen = []
    for _ in range(1000):
        _, asked, sent = servo_steps(0.3, 0.002, asked, sent, 0.01, 0.0, 100.0)
        seen.append(sent)
    np.testing.assert_allclose(np.array(seen) / 0.01, np.round(np.array(seen) / 0.01), atol=1e-9)
    assert seen[-1] == pytest.approx(0.6, abs=1e-9)
    back = [servo_steps(-0.3, 0.002, 0.0, 0.0, 0.0, 0.005, 100.0)[0]]
    assert back == [0.0]                                          # 0.6 mrad asked: within the band of 5
    _, asked, sent = servo_steps(-3.0, 0.002, 0.0, 0.0, 0.0, 0.005, 100.0)
    assert (asked, sent) == (pytest.approx(-0.006), pytest.approx(-0.001))
    rate, _, sent = servo_steps(3.0, 0.002, 0.0, 0.0, 0.0, 0.0, 100.0)
    assert (rate, sent) == (pytest.approx(3.0), pytest.approx(0.006))   # the twin: a perfect servo does as it is told


def test_a_servo_catches_up_no_faster_than_it_can():
    asked = sent = 0.0
    rates = []
    for rate in (4.0, 0.0, 0.0, 0.0):
        given, asked, sent = servo_steps(rate, 0.002, asked, sent, 0.0, 0.0, 1.5)
        rates.append(given)
    assert rates == [1.5, 1.5, pytest.approx(1.0), pytest.approx(0.0, abs=1e-9)]
