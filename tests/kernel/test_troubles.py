"""Bodies that change, samples that are missed, commands that are late or coarse: against closed forms and plain Python."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from balance.kernel import layout as at
from balance.kernel import outcome
from balance.kernel.sensing import scrambled
from tests.kernel.rigs import body, events, law, run, wheel

ROUNDING = 1e-11
"""Relative: thousands of additions in double precision."""
LEVEL = {"inertia": 0.354, "stiffness": 1e-300, "mass": 1.0, "height": 1.0}
"""A body without gravity: torque alone moves it."""
FREE = 0.354 - 4e-3
T = 0.002


def row(begin, end, column, level, slope):
    """Return a row of torques that changes the body."""
    out = [0.0] * outcome.TORQUE_SIZE
    out[outcome.LEVER] = np.inf
    out[outcome.START], out[outcome.END], out[column], out[column + 1] = begin, end, level, slope
    return out


def test_a_growing_inertia_keeps_the_angular_momentum():
    """d/dt(J θ̇) = τ: θ̇ = τ t/J(t). Without J̇ θ̇ it would be τ ln(J/J₀)/J̇, 8 % more (the twin)."""
    grows, torque = 0.3, 0.2
    happens = events(0.2, [[0.0, 0.2, torque], row(0.0, 0.2, outcome.OF_INERTIA, 0.0, grows)])
    ran = run(body(**LEVEL), wheel(), law(), happens)
    assert ran.X[1] == pytest.approx(torque * 0.2 / (FREE + 0.2 * grows), rel=1e-9)   # RK4, 0.1 ms steps
    assert torque * np.log(1.0 + 0.2 * grows / FREE) / grows > 1.08 * ran.X[1]


def test_a_growing_offset_pulls_with_its_moment():
    """M = ġ t cos θ: θ̇ = ġ t²/(2 J), cos θ within 1e-6 of 1; the feet's offset follows."""
    b = body(**LEVEL)
    b[at.GRAVITY] = 10.0
    ran = run(b, wheel(), law(), events(0.1, [row(0.0, np.inf, outcome.OF_STIFF_COS, 0.0, 2.0)]))
    assert ran.X[1] == pytest.approx(2.0 * 0.1**2 / 2.0 / FREE, rel=2e-6)
    assert run(b, wheel(), law(), events(0.1)).X[1] == 0.0


def test_a_growing_height_topples_faster():
    """Linear: θ̈ = (G + ġ t) θ/J, an Airy equation; integrated here by a fine midpoint rule of its own."""
    start, grows = 1e-3, 40.0
    ran = run(body(), wheel(), law(), events(0.3, [row(0.0, 0.3, outcome.OF_STIFF_SIN, 0.0, grows)]), X=[start, 0, 0, 0])
    x, v, h = start, 0.0, 1e-5
    for k in range(30000):
        a = (12.0 + grows * k * h) * x / FREE
        m, n = x + 0.5 * h * v, v + 0.5 * h * a
        x, v = x + h * n, v + h * (12.0 + grows * (k + 0.5) * h) * m / FREE
    assert ran.X[0] == pytest.approx(x, rel=2e-6)                 # sin θ at 3 mrad: θ²/6 = 1.5e-6
    plain = run(body(), wheel(), law(), events(0.3), X=[start, 0, 0, 0])
    assert ran.X[0] > 1.1 * plain.X[0]


def change(when, at_rest, **parts):
    """Return a row that adds `parts` to the body."""
    out = np.zeros(outcome.CHANGED + at.BODY_SIZE)
    out[outcome.AT], out[outcome.AT_REST] = when, at_rest
    for name, value in parts.items():
        out[outcome.CHANGED + getattr(at, name)] = value
    return out


def test_a_load_that_comes_at_rest_shares_the_momentum_and_one_that_goes_keeps_its_speed():
    start, units = [0.0, 0.5, 0.0, 0.0], wheel()
    comes = run(body(**LEVEL), units, law(), events(0.02, changes=[change(0.01, 0.1, INERTIA=0.1)]), X=start)
    goes = run(body(**LEVEL), units, law(), events(0.02, changes=[change(0.01, 0.0, INERTIA=-0.1)]), X=start)
    own = units[0, at.COUPLING] * (units[0, at.COUPLING] / units[0, at.OWN_INERTIA] * 0.5)   # the wheel's part stays
    assert 0.454 * comes.X[1] + 4e-3 * comes.X[2] == pytest.approx(0.354 * 0.5, rel=ROUNDING)
    assert comes.X[1] == pytest.approx((0.354 * 0.5 - own) / (0.454 - 4e-3), rel=ROUNDING)
    assert goes.X[1] == 0.5


def test_missed_samples_leave_the_last_command_and_the_memory():
    """The memory doubles at each sample taken: three missed samples leave three doublings out."""
    control = law(hold=True)._replace(A=np.full((1, 1), 2.0))
    spell = [4 * T, 4 * T + 2.5 * T, outcome.MISSED, 1.0]
    ran = run(body(**LEVEL), wheel(torque=1e9), control, events(10 * T, spells=[spell]), memory=1e-3)
    np.testing.assert_allclose(ran.trace[:10, outcome.COMMAND] / 1e-3, [1, 2, 4, 8, 8, 8, 8, 16, 32, 64], rtol=ROUNDING)


def test_a_share_of_the_samples_is_missed_at_random_but_always_the_same():
    control = law(hold=True)._replace(A=np.full((1, 1), 1.001))
    spell = [0.0, np.inf, outcome.MISSED, 0.3]
    runs = [run(body(**LEVEL), wheel(torque=1e9), control, events(2.0, spells=[spell], seed=seed), memory=1e-9).trace
            for seed in (1, 1, 2)]
    runs = [trace[:1000, outcome.COMMAND] for trace in runs]
    held = np.mean(np.diff(runs[0]) == 0.0)
    assert held == pytest.approx(0.3, abs=0.05)                   # 3.4 standard deviations of 1000 draws
    np.testing.assert_array_equal(runs[0], runs[1])
    assert np.any(runs[0] != runs[2])


@pytest.mark.parametrize("most", [0.0007, 0.0113])
def test_late_commands_act_when_they_are_due_and_never_after_a_newer_one(most):
    """Against plain Python: at each instant the newest command that is due; 1.9e-3 and 5 periods of jitter."""
    late, n, seed = 0.0015, 40, 3
    control = law(hold=True, latency=late)._replace(A=np.full((1, 1), -1.2))
    happens = events(n * T, spells=[[0.0, np.inf, outcome.LATE, most]], seed=seed)
    units = wheel(torque=1e9, speed=1e9)
    units[0, at.COUPLING] = 0.0                                   # a wheel that does not move the body: Ω = ∫τ/I
    ran = run(body(**LEVEL), units, control, happens, memory=1e-3)
    due = [k * T + late + most * scrambled(seed + 1, 2 * k + 1) for k in range(n)]
    edges = np.unique([0.0, n * T, *[t for t in due if t < n * T]])
    total = 0.0
    for a, b in pairwise(edges):
        newest = [k for k in range(n) if due[k] <= a + 1e-12]
        total += (b - a) * (1e-3 * (-1.2) ** max(newest) if newest else 0.0)
    assert ran.X[2] == pytest.approx(total / 4e-3, rel=1e-8)
    plain = run(body(**LEVEL), units, control, events(n * T), memory=1e-3)
    assert abs(plain.X[2] / ran.X[2] - 1.0) > 1e-3                # the twin: without jitter it is another speed


def test_a_coarse_command_stands_on_its_steps():
    """Steps of 0.1 N·m: every torque is a whole number of them; 0.24 becomes 0.2."""
    control = law([0.0, 1.0, 0.0])._replace(input_steps=np.array([0.1]))
    ran = run(body(**LEVEL), wheel(), control, events(0.5, [[0.0, 0.5, 0.3]]))
    torque = ran.trace[1:-1, outcome.LINE_TORQUE]
    np.testing.assert_allclose(torque / 0.1, np.round(torque / 0.1), atol=1e-9)
    assert len(np.unique(np.round(torque / 0.1))) > 2
    once = run(body(**LEVEL), wheel(), law(hold=True)._replace(input_steps=np.array([0.1])), events(0.02), memory=0.24)
    assert once.trace[5, outcome.LINE_TORQUE] == pytest.approx(0.2, rel=ROUNDING)
