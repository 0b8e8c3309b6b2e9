"""Ground forces of a body about its line: at rest, under a wheel, and against the weights' balance on two feet."""

from __future__ import annotations

from math import cos, inf, sin

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.equations import derivative
from balance.kernel.feet import each_foot, foot_forces, friction_needed, turning
from tests.kernel.rigs import body, events, law, pair, run, wheel

MASS, HEIGHT, LONG = 3.0, 0.4, 0.5


def standing(along=0.2, slope=0.0):
    """Return a body with feet LONG apart, its centre of mass `along` from foot a, the line rising by `slope`."""
    row = body(mass=MASS, height=HEIGHT, stiffness=MASS * 9.81 * cos(slope) * HEIGHT)
    row[at.LENGTH], row[at.COM_ALONG], row[at.GRAVITY_ALONG] = LONG, along, -9.81 * sin(slope)
    return row


def moved(X, units, inputs, row):
    dX = np.zeros_like(X)
    derivative(X, np.array(inputs, float), 0.0, row, units, dX)
    return dX


NONE = np.zeros((0, at.UNIT_SIZE))
STILL = np.zeros(2)


def test_at_rest_the_feet_carry_the_weight_by_the_lever():
    """Statics: the share of each foot is the other's lever arm."""
    a, b, *rest = each_foot(STILL, STILL, 0.0, standing(0.2), NONE)
    assert (a, b) == pytest.approx((MASS * 9.81 * 0.6, MASS * 9.81 * 0.4), rel=1e-12)
    assert rest == pytest.approx([0.0, 0.0, 0.0], abs=1e-12)
    beyond = each_foot(STILL, STILL, 0.0, standing(0.6), NONE)                  # the twin: the centre of mass beyond foot b
    assert beyond[0] < 0.0
    assert friction_needed(beyond[0], 0.0, 0.0, MASS * 9.81) == inf


def test_a_rising_line_loads_the_lower_foot():
    """Statics on a slope: each foot's weight by the plumb line of the centre of mass, friction tan β on both."""
    slope = 0.2
    a, b, across_a, across_b, along = each_foot(STILL, STILL, 0.0, standing(0.25, slope), NONE)
    lever = 0.25 - HEIGHT * np.tan(slope)
    assert b == pytest.approx(MASS * 9.81 * cos(slope) * lever / LONG, rel=1e-12)
    assert a + b == pytest.approx(MASS * 9.81 * cos(slope), rel=1e-12)
    assert along == pytest.approx(MASS * 9.81 * sin(slope), rel=1e-12)
    for normal, across in ((a, across_a), (b, across_b)):
        assert friction_needed(normal, across, along, a + b) == pytest.approx(np.tan(slope), rel=1e-12)


def test_the_feet_together_are_the_whole():
    row, units = standing(0.17), wheel()
    row[at.PRODUCT_U], row[at.PRODUCT_W] = 0.01, -0.02
    units[0, at.COUPLING_U] = 3e-3
    X = np.array([0.2, 1.3, 150.0, 0.0])
    dX = moved(X, units, [0.5], row)
    a, b, across_a, across_b, _ = each_foot(X, dX, 0.0, row, units)
    across, normal = foot_forces(X, dX, 0.0, row, units)
    assert (a + b, across_a + across_b) == pytest.approx((normal, across), rel=1e-12)


def test_a_wheel_across_the_line_moves_load_between_the_feet():
    """Torque τ on a wheel along w takes τ/LONG from one foot and gives it to the other; along u it twists them apart."""
    row, units = standing(0.25), wheel(share=0.0)
    X, torque = np.zeros(4), 0.6
    for slot, sign in ((at.COUPLING_W, 1.0), (at.COUPLING_U, 0.0)):
        turned = units.copy()
        turned[0, slot] = turned[0, at.OWN_INERTIA]
        dX = moved(X, turned, [torque], row)
        assert dX[1] == 0.0                                               # it does nothing about the line
        a, b, across_a, across_b, _ = each_foot(X, dX, 0.0, row, turned)
        assert b - a == pytest.approx(sign * 2 * torque / LONG, abs=1e-12)
        assert across_a - across_b == pytest.approx((1.0 - sign) * 2 * torque / LONG, abs=1e-12)


def test_a_spinning_wheel_across_the_line_is_a_gyroscope():
    """θ̇ e × H: a wheel of H along u, turned about the line at θ̇, asks θ̇ H about w of the feet (sign by e × u = w)."""
    row, units = standing(0.25), wheel(share=0.0)
    units[0, at.COUPLING_U] = 4e-3
    X = np.array([0.0, 1.5, 200.0, 0.0])
    u, w = turning(X, np.zeros(4), row, units)
    assert (u, w) == pytest.approx((0.0, 1.5 * 4e-3 * 200.0), abs=1e-12)


def test_a_mirrored_pair_has_no_parasitic_couple_and_a_single_flywheel_has():
    """s₀ = u: the single turns the body about u with H sin γ γ̇ (physics page), the pair's two cancel."""
    H, angle, rate = 0.5, 0.6, 3.0
    for count, expected in ((1, -H * sin(angle) * rate), (2, 0.0)):
        units = pair(kind=at.GIMBAL_TORQUE, momentum=H, count=count)
        units[0, at.S0_U], units[0, at.AXIS_W] = 1.0, -1.0
        X = np.array([0.0, 0.0, angle, rate])
        u, _ = turning(X, np.zeros(4), standing(), units)
        assert u == pytest.approx(expected, abs=1e-12)


def test_friction_shares_the_force_along_the_line_by_load():
    assert friction_needed(10.0, 3.0, 8.0, 20.0) == pytest.approx(0.5, rel=1e-12)     # √(3² + 4²)/10
    assert friction_needed(0.0, 0.0, 0.0, 20.0) == inf


# --- in a trial: the metrics of each foot ------------------------------------------------------------------------------

A_FOOT, B_FOOT = (slice(outcome.FEET + i * outcome.FOOT_SIZE, outcome.FEET + (i + 1) * outcome.FOOT_SIZE) for i in (0, 1))
LAG, SUBSTEP = 200.0, 1e-4


def feet_of(row, units, lasts=0.03, memory=0.0, **given):
    """Run a trial under a constant command; return the metrics of both feet, (FOOT_SIZE,) each."""
    ran = run(row, units, law(hold=True), events(lasts, **given), memory=memory)
    return ran.metrics[A_FOOT], ran.metrics[B_FOOT]


def off_the_line(place, friction=inf):
    """Return a body and a wheel that turns about u or w and does nothing about the line; its current comes with LAG."""
    row, units = standing(0.25), wheel(share=0.0, lag=LAG)
    units[0, place], row[at.FRICTION] = units[0, at.OWN_INERTIA], friction
    return row, units


def test_a_foot_lifts_when_the_wheel_across_has_taken_its_load():
    """τ(1 − e^(−λt)) = m g L/2 unloads foot a just then; a tenth less torque never does (the twin)."""
    row, units = off_the_line(at.COUPLING_W)
    units[0, at.TORQUE_LIMIT] = inf
    enough = MASS * 9.81 * LONG / 2 / (1.0 - np.exp(-LAG * 0.01))
    a, b = feet_of(row, units, memory=enough)
    assert a[outcome.LIFT_OFF] == pytest.approx(0.01, abs=SUBSTEP)              # it is looked for once in a sub-step
    assert b[outcome.LIFT_OFF] == inf
    assert b[outcome.LEAST_LOAD] == pytest.approx(MASS * 9.81 / 2, rel=1e-12)    # it begins there and gains
    a, b = feet_of(row, units, memory=0.9 * MASS * 9.81 * LONG / 2)
    assert (a[outcome.LIFT_OFF], b[outcome.LIFT_OFF]) == (inf, inf)
    assert a[outcome.LEAST_LOAD] == pytest.approx(0.1 * MASS * 9.81 / 2, rel=0.03)    # at e^(−6), 0.25 % of what is taken


def test_a_foot_slips_when_the_yaw_of_a_wheel_needs_more_than_the_ground_has():
    """A wheel of torque τ along u twists: each foot holds τ/L across, μ m g/2 is reached at 1 − e^(−λt)."""
    friction = 0.4
    torque = friction * MASS * 9.81 / 2 * LONG / (1.0 - np.exp(-LAG * 0.012))
    for slippery, expected in ((friction, 0.012), (1.5 * friction, inf)):        # the twin: rougher ground holds
        row, units = off_the_line(at.COUPLING_U, slippery)
        units[0, at.TORQUE_LIMIT] = inf
        for foot in feet_of(row, units, memory=torque):
            assert foot[outcome.SLIP] == pytest.approx(expected, abs=SUBSTEP)
            assert foot[outcome.GRIP] == pytest.approx(torque / LONG / (MASS * 9.81 / 2), rel=0.003)   # 1 − e^(−6)


def test_a_push_at_the_centre_of_percussion_needs_no_friction():
    """The ground's force is m θ̈ h − P: none for a push at J/(m h), −P/2 for one at half of that (statics of a bat)."""
    row, units, force = standing(0.25), wheel(inertia=1e-9), 5.0
    row[at.STIFF_SIN] = 1e-9                                                     # gravity would take part as it leans
    percussion = row[at.INERTIA] / (MASS * HEIGHT)
    for lever, needed in ((percussion, 0.0), (percussion / 2, force / 2), (inf, force)):
        height = percussion if lever == inf else lever                           # a couple of the same torque: all of m θ̈ h
        a, b = feet_of(row, units, 0.004, torques=[[0.0, 1.0, force * height, *[0.0] * (outcome.LEVER - 3), lever]])
        for foot in (a, b):
            assert foot[outcome.GRIP] == pytest.approx(needed / (MASS * 9.81), rel=2e-4, abs=1e-5)   # it leans 0.1 mrad


def test_feet_that_are_not_known_are_looked_at_together():
    row, units = off_the_line(at.COUPLING_W)
    row[at.LENGTH] = 0.0
    a, b = feet_of(row, units, memory=0.5)
    assert a[outcome.LEAST_LOAD] == pytest.approx(MASS * 9.81, rel=1e-12)
    assert list(b) == [inf, 0.0, inf, inf]


@pytest.mark.parametrize("rises", [0.2, -0.2])
def test_ground_that_rises_across_the_line_needs_friction_at_rest(rises):
    """Statics: tan σ whichever way it rises; each foot's load square to the ground is m g cos σ/2. The twin is level."""
    row, units = standing(0.25), wheel()
    for slope in (rises, 0.0):
        row[at.GROUND_RISES] = slope
        for foot in feet_of(row, units):
            assert foot[outcome.GRIP] == pytest.approx(abs(np.tan(slope)), rel=1e-12)
            assert foot[outcome.LEAST_LOAD] == pytest.approx(MASS * 9.81 * cos(slope) / 2, rel=1e-12)


def test_a_push_down_the_slope_needs_more_friction_than_one_up():
    """A push along w, at the height where a level floor would feel half of it, on ground that rises toward w."""
    row, units = standing(0.25), wheel(inertia=1e-9)
    row[at.STIFF_SIN] = 1e-9
    lever, slope = 0.5 * row[at.INERTIA] / (MASS * HEIGHT), 0.1
    row[at.GROUND_RISES] = slope
    for force in (5.0, -5.0):
        a, _ = feet_of(row, units, 0.002, torques=[[0.0, 1.0, force * lever, *[0.0] * (outcome.LEVER - 3), lever]])
        held = np.arctan2(-force / 2, MASS * 9.81)                               # of the ground's force toward w
        assert a[outcome.GRIP] == pytest.approx(abs(np.tan(held + slope)), rel=1e-3)     # it leans 0.1 mrad
