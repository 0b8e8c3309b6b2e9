"""The trial loop against closed forms: what happens, when it acts, and how it ends."""

from __future__ import annotations

import math

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel import outcome
from tests.kernel.rigs import body, events, law, pair, run, wheel

ROUNDING = 1e-11
"""Relative: thousands of additions in double precision."""
LEVEL = {"inertia": 0.354, "stiffness": 1e-300, "mass": 1.0, "height": 1.0}
"""A body without gravity: constant torque gives constant acceleration, which Runge-Kutta integrates exactly."""


def free_inertia(units):
    """J - C²/O of the rig's body and one wheel."""
    return 0.354 - units[0, at.COUPLING] ** 2 / units[0, at.OWN_INERTIA]


def test_a_command_acts_after_its_latency_to_the_instant():
    """Latency of 1.37 periods: nothing before, the full torque after, not rounded to samples or sub-steps."""
    units, T, late, torque = wheel(), 0.002, 1.37 * 0.002, 0.5
    ran = run(body(**LEVEL), units, law(latency=late, hold=True), events(0.02, longest=3e-4), memory=torque)
    own = torque * (0.02 - late)
    assert units[0, at.OWN_INERTIA] * ran.X[2] + units[0, at.COUPLING] * ran.X[1] == pytest.approx(own, rel=ROUNDING)
    assert ran.X[1] == pytest.approx(-own / free_inertia(units), rel=ROUNDING)
    assert late % T != 0.0


def test_a_whole_period_more_of_latency_is_told_apart():
    """The twin: one period more is seen at once."""
    on_time, late = (run(body(**LEVEL), wheel(), law(latency=x, hold=True), events(0.02), memory=0.5).X[1]
                     for x in (0.002, 0.004))
    assert late == pytest.approx(on_time * 16.0 / 18.0, rel=ROUNDING)


def test_a_step_between_samples_acts_for_exactly_its_time():
    step = [0.00337, 0.01119, 0.7, 0.0, 0.0, 0.0]
    ran = run(body(**LEVEL), wheel(), law(), events(0.02, [step]))
    assert ran.X[1] == pytest.approx(0.7 * (0.01119 - 0.00337) / free_inertia(wheel()), rel=ROUNDING)


def test_a_full_sine_leaves_no_momentum_but_a_turn():
    """∫∫ A sin(2πt/T) dt dt over one period is A T²/(2π)."""
    lasts, peak = 0.05, 0.9
    ran = run(body(**LEVEL), wheel(), law(), events(0.05, [[0.0, lasts, 0.0, 0.0, peak, 2 * np.pi / lasts]]))
    assert ran.X[1] == pytest.approx(0.0, abs=1e-9)               # Runge-Kutta of order four at 0.1 ms on a 50 ms sine
    assert ran.X[0] == pytest.approx(peak * lasts**2 / (2 * np.pi) / free_inertia(wheel()), rel=1e-8)


def test_a_ramp_of_torque():
    ran = run(body(**LEVEL), wheel(), law(), events(0.03, [[0.01, 0.03, 0.2, 5.0, 0.0, 0.0]]))
    assert ran.X[1] == pytest.approx((0.2 * 0.02 + 0.5 * 5.0 * 0.02**2) / free_inertia(wheel()), rel=ROUNDING)


def test_a_push_jumps_by_the_free_inertia_and_spares_the_wheel():
    """P ℓ/J_rest, and the wheel's own rotation I(Ω + αθ̇) is not touched (`physics.md`)."""
    units = wheel(share=0.6)
    ran = run(body(**LEVEL), units, law(), events(0.01, jumps=[[0.005, 0.3, 0.0, math.inf]]))
    assert ran.X[1] == pytest.approx(0.3 / free_inertia(units), rel=ROUNDING)
    own = units[0, at.OWN_INERTIA] * ran.X[2] + units[0, at.COUPLING] * ran.X[1]
    assert own == pytest.approx(0.0, abs=1e-12)


@pytest.mark.parametrize("sense", [1.0, -1.0])
def test_a_push_on_a_geared_wheel_goes_through_the_mass_matrix(sense):
    """[[J, α(I + sNJ_r)], [·, I + N²J_r]]: the jump is M⁻¹[P, 0]."""
    share, inertia, ratio, rotor = 0.8, 4e-3, 5.0, 6e-5
    units = wheel()
    units[0, at.COUPLING] = share * (inertia + sense * ratio * rotor)
    units[0, at.OWN_INERTIA] = inertia + ratio**2 * rotor
    mass = np.array([[0.354, units[0, at.COUPLING]], [units[0, at.COUPLING], units[0, at.OWN_INERTIA]]])
    expected = np.linalg.solve(mass, [0.3, 0.0])
    ran = run(body(**LEVEL), units, law(), events(0.01, jumps=[[0.005, 0.3, 0.0, math.inf]]))
    np.testing.assert_allclose(ran.X[1:3], expected, rtol=ROUNDING)


def test_a_push_at_a_sampling_instant_is_seen_one_sample_later():
    """v = -Ω·0 - 1·θ̇: the command follows at the next sample, not at the push."""
    control = law([0.0, 1.0, 0.0])
    ran = run(body(**LEVEL), wheel(), control, events(0.008, jumps=[[0.004, 0.3, 0.0, math.inf]]))
    np.testing.assert_array_equal(ran.trace[:3, outcome.COMMAND], 0.0)
    assert ran.trace[3, outcome.COMMAND] < -0.5


def test_a_moved_centre_of_mass_pulls_with_its_weight():
    """M = m g s cos θ more, from its instant on; the law is not told, and lean counts from the old balance."""
    b = body(stiffness=12.0, mass=3.0, height=0.4)
    ran = run(b, wheel(), law(), events(0.011, jumps=[[0.01, 0.0, 0.005, math.inf]], longest=1e-5))
    weight = 3.0 * b[at.GRAVITY] * 0.005
    assert ran.X[1] == pytest.approx(weight * 1e-3 / free_inertia(wheel()), rel=1e-4)   # gravity's own turn: p²t² = 3e-5


def test_until_lift_off_nothing_moves_and_nothing_is_commanded():
    control = law([-40.0, -6.0, 0.0])
    happens = events(0.2, release=(0.1, 0.3))
    ran = run(body(), wheel(), control, happens, X=[0.02, 0.0, 50.0, 0.0])
    held = ran.trace[:, outcome.TIME] < 0.1 - 1e-9
    assert held.sum() == 50
    for column, value in ((outcome.LEAN, 0.02), (outcome.LEAN_RATE, 0.0), (outcome.COMMAND, 0.0)):
        np.testing.assert_array_equal(ran.trace[held, column], value)
    np.testing.assert_array_equal(ran.trace[held, outcome.TRACE_SIZE], 50.0)
    first = ran.trace[50]
    assert first[outcome.LEAN_RATE] == 0.3
    assert abs(first[outcome.COMMAND]) > 0.5


@pytest.mark.parametrize(("lean", "touch", "end"), [
    (0.05, np.inf, outcome.FELL_OUTWARD), (-0.05, np.inf, outcome.FELL_INWARD), (-0.05, 0.2, outcome.TOUCHED_DOWN),
    (0.05, 0.2, outcome.FELL_OUTWARD)])
def test_how_a_fall_ends(lean, touch, end):
    ran = run(body(touch_down=touch), wheel(), law(), events(3.0), X=[lean, 0.0, 0.0, 0.0])
    assert ran.end == end
    limit = 0.2 if end == outcome.TOUCHED_DOWN else 0.6
    assert abs(ran.X[0]) == pytest.approx(limit, abs=5e-4)         # found at the end of a 0.1 ms sub-step
    assert ran.metrics[outcome.END_TIME] == ran.trace[-1, outcome.TIME]


def test_what_is_no_number_is_never_a_recovery():
    ran = run(body(), wheel(), law(), events(0.1), X=[np.nan, 0.0, 0.0, 0.0])
    assert ran.end != outcome.RAN


def test_a_foot_lifted_outward_catches_there_and_only_there():
    ran = run(body(lands_outward=0.2), wheel(), law(), events(3.0), X=[0.05, 0.0, 0.0, 0.0])
    assert ran.end == outcome.TOUCHED_DOWN
    assert ran.X[0] == pytest.approx(0.2, abs=1e-3)
    ran = run(body(lands_outward=0.2), wheel(), law(), events(3.0), X=[-0.05, 0.0, 0.0, 0.0])
    assert ran.end == outcome.FELL_INWARD


def test_touch_down_counts_from_the_pose_not_from_the_balanced_lean():
    b = body(side=1.2, touch_down=0.2)                            # balanced at -0.0997 rad
    ran = run(b, wheel(), law(), events(3.0), X=[b[at.BALANCED] - 0.02, 0.0, 0.0, 0.0])
    assert ran.end == outcome.TOUCHED_DOWN
    assert ran.X[0] == pytest.approx(-0.2, abs=5e-4)


def test_free_fall_keeps_its_energy():
    """½J θ̇² + G cos θ is constant; with a drag on the wheel it is not (the twin)."""
    b, units = body(), wheel(speed=np.inf)

    def energy(X, units):
        return 0.5 * free_inertia(units) * X[1] ** 2 + 12.0 * np.cos(X[0])

    start = [0.05, 0.0, 0.0, 0.0]
    ran = run(b, units, law(), events(0.5), X=start)
    assert energy(ran.X, units) == pytest.approx(energy(start, units), rel=1e-11)
    dragged = wheel(viscous=1e-3)
    ran = run(b, dragged, law(), events(0.5), X=start)
    assert abs(energy(ran.X, dragged) / energy(start, dragged) - 1.0) > 1e-8


def test_metrics_of_a_constant_torque():
    """T = 0.5 N·m for 18 of 20 ms: RMS, momentum, current and power from their definitions."""
    units = wheel(ohms=0.4)
    ran = run(body(**LEVEL), units, law(latency=0.002, hold=True), events(0.02), memory=0.5)
    m = ran.metrics
    assert m[outcome.PEAK_TORQUE] == pytest.approx(0.5, rel=ROUNDING)
    assert m[outcome.TORQUE_SQUARED] == pytest.approx(0.25 * 0.018, rel=ROUNDING)
    assert m[outcome.PEAK_MOMENTUM] == pytest.approx(0.5 * 0.018, rel=ROUNDING)
    assert m[outcome.PEAK_CURRENT] == pytest.approx(0.5 / 0.06, rel=ROUNDING)
    speed = ran.trace[-1, outcome.TRACE_SIZE]
    current = 0.5 / 0.06
    power = current * (0.4 * current + 0.06 * speed)
    assert m[outcome.PEAK_POWER] == pytest.approx(power, rel=0.01)  # measured at sub-step starts: 0.1 of 18 ms early
    assert m[outcome.SATURATED] == 0.0


def test_time_at_the_torque_limit():
    """1 N·m asked of a motor of 0.8: limited from 2 ms to the end, not counted twice when the law limits too."""
    for limit in (np.inf, 0.9):
        ran = run(body(**LEVEL), wheel(torque=0.8), law(latency=0.002, hold=True, limit=limit), events(0.02), memory=1.0)
        longer = 0.02 if limit == 0.9 else 0.018
        assert ran.metrics[outcome.SATURATED] == pytest.approx(longer, rel=1e-9)
        assert ran.first[0, outcome.TORQUE, 0] == pytest.approx(0.002, abs=1e-12)
        assert np.isfinite(ran.first[1, outcome.OUTPUT, 0]) == (limit == 0.9)


def test_a_wheel_stops_gaining_speed_at_its_limit():
    units = wheel(speed=50.0, torque=0.8)
    ran = run(body(**LEVEL), units, law(hold=True), events(0.5, longest=5e-4), memory=0.8)
    assert ran.trace[:, outcome.TRACE_SIZE].max() <= 50.0
    assert ran.X[2] == pytest.approx(50.0, abs=1e-3)
    # the limiter starts 0.4 rad/s early
    assert ran.first[0, outcome.SPEED, 0] == pytest.approx(50.0 * 4e-3 / 0.8, rel=0.02)


def test_the_torque_fades_on_the_motor_line():
    """Against back-EMF the speed rises to (V/K_e)(1 - e^{-t/τ}), τ = I R/(K_t K_e): a DC motor's step response."""
    units = wheel(volts=6.0, ohms=0.4, torque=np.inf, speed=np.inf)
    b = body(inertia=1e6, stiffness=1e-300, mass=1.0, height=1.0)    # a body that does not move
    ran = run(b, units, law(hold=True), events(0.4, longest=5e-4), memory=1e3)
    tau = 4e-3 * 0.4 / 0.06**2
    assert ran.X[2] == pytest.approx(100.0 * (1 - np.exp(-0.4 / tau)), rel=1e-6)
    assert np.isfinite(ran.first[0, outcome.VOLTAGE, 0])


def test_a_gimbal_meets_its_stop_at_its_own_instant():
    """Rate held at 4 rad/s from the start: the stop at 60° after π/12 s, then no motion; the body keeps 2H sin 60°."""
    units = pair(stop=np.pi / 3, rate=4.0, momentum=0.5)
    b = body(inertia=0.35, stiffness=1e-300, mass=1.0, height=1.0)
    ran = run(b, units, law(places=(0, 1, 2, 3), gains=(0,) * 4, hold=True), events(0.4, longest=5e-4),
              X=[0, 0, 0, 4.0], memory=4.0)
    assert ran.first[0, outcome.STOP, 0] == pytest.approx(np.pi / 12, rel=1e-9)
    assert tuple(ran.X[2:]) == (np.pi / 3, 0.0)
    assert ran.X[1] == pytest.approx(-2 * 0.5 * np.sin(np.pi / 3) / 0.35, rel=1e-9)
    assert ran.metrics[outcome.PEAK_MOMENTUM] == pytest.approx(np.sin(np.pi / 3), rel=1e-9)
    after = ran.trace[:, outcome.TIME] > np.pi / 12 + 1e-3
    np.testing.assert_array_equal(ran.trace[after, outcome.LINE_TORQUE], 0.0)


def test_a_gimbal_leaves_its_stop_when_it_is_told_to():
    """Feedback on lean rate drives it onto the stop, an inward torque later calls it back."""
    units = pair(stop=0.3, rate=4.0, momentum=0.5)
    b = body(inertia=0.35, stiffness=1e-300, mass=1.0, height=1.0)
    push = [[0.0, 0.2, 3.0, 0, 0, 0], [0.3, 0.6, -9.0, 0, 0, 0]]
    ran = run(b, units, law(places=(0, 1, 2, 3), gains=(0, -40.0, 0, 0)), events(0.6, push, longest=5e-4))
    angle = ran.trace[:, outcome.TRACE_SIZE]
    assert np.abs(angle).max() == pytest.approx(0.3, abs=1e-12)
    assert angle[100] == pytest.approx(0.3, abs=1e-12)
    assert angle[-1] < 0.29


def test_a_stop_keeps_the_momentum_of_a_skewed_gimbal():
    """κ ≠ 0: J θ̇ + κ I_γ γ̇ + H σ is kept while the gimbal hits its stop, so the body jumps."""
    units = pair(at.GIMBAL_TORQUE, momentum=0.05, stop=0.3, rate=np.inf, kappa=0.4, count=1, inertia=0.01)
    b = body(inertia=0.35, stiffness=1e-300, mass=1.0, height=1.0)
    ran = run(b, units, law(places=(0, 1, 2, 3), gains=(0,) * 4, hold=True), events(0.5, longest=5e-4), memory=0.2)
    assert ran.X[2] == 0.3
    assert 0.35 * ran.X[1] + 0.05 * np.sin(0.3) == pytest.approx(0.0, abs=1e-9)
    assert abs(ran.trace[:, outcome.LEAN_RATE]).max() > 1.5 * abs(ran.X[1])      # the twin: it did jump


def test_a_weak_servo_is_turned_by_the_flywheel():
    """H σ' θ̇ above the drive's strength turns the gimbal against its command, and it is said which limit that was."""
    b = body(inertia=0.35, stiffness=1e-300, mass=1.0, height=1.0)
    for strength, met in ((0.05, True), (10.0, False)):
        units = pair(drive=strength, momentum=0.5)
        ran = run(b, units, law(places=(0, 1, 2, 3), gains=(0,) * 4), events(0.05), X=[0, 0.5, 0, 0])
        assert np.isfinite(ran.first[0, outcome.DRIVE, 0]) == met
        assert (ran.X[2] > 1e-3) == met
