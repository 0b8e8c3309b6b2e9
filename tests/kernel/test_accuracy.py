"""How exact a run is: order of the integrator, an independent integrator period by period, closed-form capture limits."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.integrate import longest_step
from tests.kernel.rigs import body, events, law, pair, run, wheel

GAINS = [-30.0, -5.0, -6e-3]


def real_motor():
    """A wheel that meets voltage, current and speed limits, with drag."""
    return wheel(inertia=1.5e-3, lag=2 * np.pi * 300, torque=np.inf, speed=160.0, volts=12.0, ohms=0.4, amps=14.0,
                 coulomb=4e-3, viscous=1e-5)


def order_of(steps, errors):
    """Return the slope of log error over log step."""
    return np.polyfit(np.log(steps), np.log(errors), 1)[0]


def test_the_integrator_is_of_order_four():
    """Regression over five halvings on a smooth run (constant command, gravity, current lag); 4.0 ± 0.15."""
    units, b, control = wheel(lag=200.0), body(), law(hold=True, sample_time=0.04)
    start = [0.05, 0.1, 5.0, 0.0]
    steps = np.array([0.04 / k for k in (10, 14, 20, 28, 40)])
    ends = [run(b, units, control, events(0.4, longest=h), X=start, memory=0.3).X for h in steps]
    best = run(b, units, control, events(0.4, longest=0.04 / 1000), X=start, memory=0.3).X
    errors = [np.abs(X - best).max() for X in ends]
    assert order_of(steps, errors) == pytest.approx(4.0, abs=0.15)


def test_a_first_order_method_is_told_apart():
    """The twin: explicit Euler on the same kind of problem shows a slope of one."""
    def euler(h):
        x = np.array([0.05, 0.1])
        for _ in range(round(0.4 / h)):
            x = x + h * np.array([x[1], 34.0 * np.sin(x[0])])
        return x
    steps = np.array([0.04 / k for k in (10, 14, 20, 28, 40)])
    errors = [np.abs(euler(h) - euler(0.04 / 4000)).max() for h in steps]
    assert order_of(steps, errors) < 1.5


def by_period(b, units, X, gains, T, late, kick_at, kick, lasts):
    """Run the same sampled law with DOP853 at 1e-12, restarted at every sample and command switch."""
    row, J = units[0], b[at.INERTIA]
    e, c = row[at.OWN_INERTIA], row[at.COUPLING]
    free = J - c * c / e

    def rate(_, x, command):
        lean, lean_rate, speed, current = x
        room = row[at.SPEED_LIMIT] - speed if command > 0 else row[at.SPEED_LIMIT] + speed
        cap = max(e * min(0.25 * row[at.CURRENT_LAG], 500.0) * room, 0.0)
        target = np.clip(command, -cap, cap) / row[at.TORQUE_PER_AMP]
        most = row[at.CURRENT_LIMIT]
        ends = [np.clip((s * row[at.BUS_VOLTAGE] - row[at.BACK_EMF] * speed) / row[at.RESISTANCE], -most, most)
                for s in (-1, 1)]
        target = np.clip(target, *ends)
        net = row[at.TORQUE_PER_AMP] * current - row[at.COULOMB] * np.clip(speed, -1, 1) - row[at.VISCOUS] * speed
        acceleration = (b[at.STIFF_SIN] * np.sin(lean) - c / e * net) / free
        return [lean_rate, acceleration, (net - c * acceleration) / e, row[at.CURRENT_LAG] * (target - current)]

    X, queue, out, kicked = np.array(X, float), [0.0, 0.0], [], False
    whole, part = int(late // T), late % T
    queue = [0.0] * (whole + 2)
    for k in range(round(lasts / T)):
        t = k * T
        queue = [-float(np.dot(gains, X[:3])), *queue[:-1]]
        if not kicked and t >= kick_at - 1e-12:
            kicked = True
            X[1] += kick / free
            X[2] -= c / e * kick / free
        out.append(X.copy())                                     # like the trace: what is there after the instant
        pieces = [(part, queue[whole + 1]), (T - part, queue[whole])]
        for span, command in pieces:
            if span > 1e-15:
                X = solve_ivp(rate, (0, span), X, "DOP853", args=(command,), rtol=1e-12, atol=1e-13).y[:, -1]
    return np.array([*out, X])


@pytest.mark.parametrize("kick", [0.02, 0.12, 0.24])
def test_against_dop853_with_current_voltage_and_speed_limits(kick):
    """Issue 5's bounds: lean within 5e-9 rad; wheel speed within 1e-5 of its peak (kinks of the limits are not smooth)."""
    b, units, T, late = body(inertia=0.35, stiffness=9.0), real_motor(), 0.002, 0.0027
    ours = run(b, units, law(GAINS, T, late), events(0.5, jumps=[[0.02, kick, 0.0, math.inf]], longest=longest_step(units)))
    other = by_period(b, units, [0, 0, 0, 0], GAINS, T, late, 0.02, kick, 0.5)
    met = np.isfinite(ours.first[0, :, 0])
    assert met[outcome.CURRENT] == (kick > 0.1)                   # the hard push saturates, the soft one does not
    assert (met[outcome.SPEED] or met[outcome.VOLTAGE]) == (kick > 0.1)
    rows = len(ours.trace) - 1                                    # the last may be the instant of the fall
    assert np.abs(ours.trace[:rows, outcome.LEAN] - other[:rows, 0]).max() < 5e-9
    speed = ours.trace[:rows, outcome.TRACE_SIZE]
    assert np.abs(speed - other[:rows, 2]).max() < 1e-5 * np.abs(other[:, 2]).max()


def test_a_step_three_times_too_long_is_seen():
    """The twin: the same comparison fails with sub-steps the current loop does not allow."""
    b, units = body(inertia=0.35, stiffness=9.0), real_motor()
    ours = run(b, units, law(GAINS, 0.002, 0.0027), events(0.5, jumps=[[0.02, 0.24, 0.0, math.inf]], longest=1e-3))
    other = by_period(b, units, [0, 0, 0, 0], GAINS, 0.002, 0.0027, 0.02, 0.24, 0.5)
    rows = len(ours.trace) - 1
    assert np.abs(ours.trace[:rows, outcome.LEAN] - other[:rows, 0]).max() > 5e-9


# --- capture limits: references 4.02 and 4.04 -----------------------------------------------------------------------
# "own derivation (null-controllable set of one unstable mode with bounded input and bounded momentum)", DERIVED +
# simulated; 4.04 "own derivation", DERIVED. I = 0.35 kg·m² is the inertia with the wheel free to spin.
POLE = 5.8554004
FREE = 0.35


def captured(b, units, all_out, xi, lasts=2.5, late=0.0):
    """Return whether ξ = lean + lean rate/ω still falls when everything is spent: the all-out law from the lean xi/2 on."""
    start = [0.5 * xi, 0.5 * xi * POLE] + [0.0] * 2
    places = (0, 1, 2, 3)
    ran = run(b, units, law(sample_time=lasts, latency=late, places=places, gains=(0,) * 4, hold=True),
              events(lasts, longest=1e-4), X=start, memory=all_out)
    return ran.X[0] + ran.X[1] / POLE < 0.0


def largest_captured(b, units, all_out, late=0.0):
    """Bisect ξ to 1e-7."""
    low, high = 0.0, 0.5
    while high - low > 1e-7:
        middle = 0.5 * (low + high)
        low, high = (middle, high) if captured(b, units, all_out, middle, late=late) else (low, middle)
    return low


def small_angle(inertia):
    """A body of stiffness 12 N·m/rad whose sine is its angle: the closed forms are linear.

    G_s sin θ with a thousandth of the angle would need a scale; instead the angles stay below 0.06 rad, where sin θ
    differs from θ by 6e-4: the tolerance below says so.
    """
    return body(inertia=inertia, stiffness=12.0)


@pytest.mark.parametrize(("speed", "xi"), [(20.0, 0.0295463), (50.0, 0.0512437), (400.0, 0.0666661)])
def test_wheel_with_torque_and_speed_limit_catches_what_4_02_says(speed, xi):
    """Reference 4.02. The limiter holds the speed relative to the body, the closed form the absolute one.

    At the end θ̇ is about -0.09 rad/s: 0.5 % of 20 rad/s, 0.2 % of 50; sin θ < θ adds 1e-3.
    """
    units = wheel(inertia=4e-3, torque=0.8, speed=speed)
    b = small_angle(FREE + 4e-3)
    assert b[at.STIFF_SIN] / FREE == pytest.approx(POLE**2, rel=1e-6)
    assert largest_captured(b, units, 10.0) == pytest.approx(xi, rel=0.1 / speed + 1e-3)


def test_a_tenth_of_the_torque_does_not_catch_it():
    """The twin: 0.9 of reference 4.02's ξ is caught with 0.8 N·m, and lost with a tenth of it."""
    b = small_angle(FREE + 4e-3)
    assert captured(b, wheel(inertia=4e-3, torque=0.8, speed=50.0), 10.0, 0.9 * 0.0512437)
    assert not captured(b, wheel(inertia=4e-3, torque=0.08, speed=50.0), 10.0, 0.9 * 0.0512437)


def test_xi_left_when_the_wheel_is_spent_is_nothing():
    """Reference 4.02, Ω = 50: from the closed form's ξ, ξ reaches 0 as the wheel is spent (linear, exact; 1e-8).

    A thousandth of torque, momentum and ξ keeps sin θ = θ to 1e-10, and Ω̇ + θ̈ is what the closed form counts.
    """
    small = 1e-3
    units = wheel(inertia=4e-3, torque=0.8 * small, speed=np.inf)
    spent = 4e-3 * 50.0 / 0.8
    xi = small * 0.8 / 12.0 * (1.0 - np.exp(-POLE * spent))
    assert xi / small == pytest.approx(0.0512437, rel=1e-5)
    ran = run(small_angle(FREE + 4e-3), units, law(sample_time=spent, hold=True), events(spent, longest=1e-4),
              X=[xi, 0, 0, 0], memory=1.0)
    assert (ran.X[0] + ran.X[1] / POLE) / small == pytest.approx(0.0, abs=1e-8 / small * 1e-3 * 30)


def test_pair_with_rate_and_angle_limit_catches_what_4_04_says():
    """Reference 4.04: 0.2317678 in the linear closed form; sin θ at 0.12-0.23 rad helps by up to 1 %."""
    units = pair(momentum=0.5, stop=np.pi / 3, rate=4.0, lag=4000.0)
    assert largest_captured(small_angle(FREE), units, 4.0) == pytest.approx(0.2317678, rel=1e-2)


def test_a_late_command_catches_less_by_the_growth_meanwhile():
    """Reference 14.01: 10 ms of delay multiply the set that can be caught by e^{-ωτ} (DERIVED)."""
    units, b = wheel(inertia=4e-3, torque=0.8, speed=np.inf), small_angle(FREE + 4e-3)
    at_once, late = largest_captured(b, units, 10.0), largest_captured(b, units, 10.0, late=0.010)
    assert late / at_once == pytest.approx(np.exp(-POLE * 0.010), rel=1e-3)       # sin θ < θ


def fall(lean, until):
    """Return the time a free fall takes from one lean to another, read between samples."""
    b = body(inertia=FREE + 4e-3, stiffness=12.0, fell=2 * until)
    trace = run(b, wheel(inertia=4e-3), law(), events(1.0, longest=2e-4), X=[lean, 0, 0, 0]).trace
    return np.interp(until, trace[:, outcome.LEAN], trace[:, outcome.TIME])


def test_free_fall_takes_its_time():
    """Reference 4.02: 0.629889 s from 1° to 20° (DERIVED; linear, so run at a thousandth of the angles).

    Read linearly between samples of 2 ms: p²T²/8 of the angle there, 3e-6 s.
    """
    small = 1e-3
    assert fall(small * np.radians(1.0), small * np.radians(20.0)) == pytest.approx(0.629889, rel=1e-5)
    assert fall(np.radians(1.0), np.radians(20.0)) > 0.6302       # the twin: the sine is slower


def test_holding_a_degree_fills_the_wheel_when_reference_4_02_says():
    """0.2094395 N·m hold 1° (linear); 400 rad/s are reached after 7.63944 s (DERIVED). Held on a still body."""
    hold = 12.0 * np.radians(1.0)
    assert hold == pytest.approx(0.2094395, rel=1e-6)
    balance = [[0.0, np.inf, hold, 0, 0, 0]]                      # in gravity's place, on a body without weight
    b = body(inertia=FREE + 4e-3, stiffness=1e-300, mass=1.0, height=1.0)
    ran = run(b, wheel(inertia=4e-3, speed=np.inf), law(hold=True), events(8.0, balance), memory=hold)
    speed, time = ran.trace[:, outcome.TRACE_SIZE], ran.trace[:, outcome.TIME]
    assert np.abs(ran.trace[:, outcome.LEAN]).max() < 1e-9        # it stands
    assert np.interp(400.0, speed, time) == pytest.approx(7.63944, rel=1e-5)
