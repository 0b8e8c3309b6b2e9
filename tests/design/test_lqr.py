"""The LQR law knows its delay: equivalence, optimality, and where the loop is broken."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.design.build import design_stance
from balance.design.loop import close, command_break, sample_plant
from balance.design.lqr import lqr_gain, weights
from balance.design.margins import margins_of
from balance.design.sampled_margins import at_actuator, view
from balance.goal.goal import LqrControl, Weights
from balance.machine.stabilisers import ReactionWheel
from tests.design.machines import goal, plant_of, shipped, wheel_machine


def test_the_memory_reproduces_full_state_feedback():
    """Law with its own copy of lag and past commands = K on the whole augmented state: same closed-loop poles."""
    plant = plant_of(wheel_machine())
    design = design_stance(plant, goal(latency=0.0033))
    sampled = sample_plant(plant, 0.002, 0.0033)
    full = np.linalg.eigvals(sampled.A - np.outer(sampled.B, design.law.K))
    law = np.linalg.eigvals(close(sampled, design.law))
    for pole in full:
        assert np.abs(law - pole).min() < 1e-6                         # eigenvalues near z = 0 are known to about this
    assert design.law.memory == design.law.states[3:]
    assert {"torque_1_ago", "torque_2_ago"} <= set(design.law.states)


def test_no_other_gains_cost_less():
    """The defining property: the summed cost from random starts is least at K."""
    plant = plant_of(wheel_machine())
    g = goal()
    design, sampled = design_stance(plant, g), sample_plant(plant, 0.002, 0.002)
    n = len(plant.model.states)
    Q, R = weights(plant, g.control)
    rng = np.random.default_rng(5)

    def cost(K):
        total = 0.0
        for start in np.eye(n):
            x = np.concatenate([start * [0.02, 0.1, 20.0], np.zeros(len(sampled.A) - n)])
            for _ in range(4000):
                v = -K @ x
                total += x[:n] @ Q @ x[:n] + R * v * v
                x = sampled.A @ x + sampled.B * v
        return total

    best = cost(design.law.K)
    for _ in range(8):
        assert cost(design.law.K * (1 + 0.03 * rng.standard_normal(len(design.law.K)))) > best


def test_explicit_weights_and_allowed_excursions_agree():
    plant = plant_of(wheel_machine())
    row = plant.momentum_row
    allow = goal().control.allow
    Q, R = weights(plant, goal().control)
    assert np.diag(Q)[0] == pytest.approx(allow.lean**-2)
    assert Q[2, 2] == pytest.approx((row[2] / allow.momentum) ** 2)
    own = LqrControl(weights=Weights((100.0, 0.059, 50.0), 1e7))
    Q, R = weights(plant, own)
    assert (np.diag(Q).tolist(), R) == ([100.0, 0.059, 50.0], 1e7)
    assert design_stance(plant, goal(control=own)).margins.stable


def test_knowing_the_delay_is_worth_something():
    """The same weights without knowledge of a 100 ms latency fall over; with it they hold."""
    plant = plant_of(wheel_machine())
    late = design_stance(plant, goal(rate=200.0, latency=0.1))
    Q, R = weights(plant, goal().control)
    ideal = sample_plant(plant, 0.005, 0.0)
    n = len(plant.model.states)
    padded = np.zeros((len(ideal.A), len(ideal.A)))
    padded[:n, :n] = Q
    K = lqr_gain(ideal.A, ideal.B[:, None], padded, np.array([[R]]))[0][0]
    law = replace(late.law, C=np.zeros_like(late.law.C), D=-K[:n])
    blind = margins_of(at_actuator(sample_plant(plant, 0.005, 0.1), law))
    assert late.margins.stable
    assert not blind.stable


def test_broken_at_the_command_the_margin_is_another():
    """physics page, "Loop": with 10 ms of latency the computed command is off by degrees; the torque is what counts."""
    plant = plant_of(wheel_machine())
    design = design_stance(plant, goal(rate=500.0, latency=0.01))
    sampled = sample_plant(plant, 0.002, 0.01)
    law = design.law
    paper = margins_of(view(command_break(sampled, law), lambda d: command_break(sampled.with_extra_delay(d), law)))
    assert np.rad2deg(abs(paper.phase - design.margins.phase)) > 2.0
    physical = design.margins.gain_upper
    assert np.abs(np.linalg.eigvals(close(sampled.with_gain(1.01 * physical), design.law))).max() > 1.0
    assert np.abs(np.linalg.eigvals(close(sampled.with_gain(0.99 * physical), design.law))).max() < 1.0


@pytest.mark.parametrize("stance", ["on-left-right", "on-fore-right", "on-fore-left"])
def test_two_wheels_share_and_level(stance):
    """All states are stable, the difference of the two wheels' speeds included; the line sees none of the levelling."""
    plant, g = shipped("scout-wheels", stance)
    design = design_stance(plant, g)
    sampled = sample_plant(plant, design.law.sample_time, design.law.latency)
    poles = np.linalg.eigvals(close(sampled, design.law))
    assert np.abs(poles).max() < 1.0
    assert plant.momentum_row @ plant.model.B @ plant.allotment == pytest.approx(1.0, rel=1e-9)
    moved = plant.momentum_row @ plant.model.B @ plant.levelling
    assert np.abs(moved).max() < 1e-12
    unlevelled = replace(plant, levelling=np.zeros_like(plant.levelling))
    free = np.linalg.eigvals(close(sample_plant(unlevelled, design.law.sample_time, design.law.latency), design.law))
    assert np.abs(free).max() > np.abs(poles).max()                    # the twin: without levelling the slowest is slower


def test_square_to_the_line_is_an_answer():
    machine = wheel_machine()
    wheel = machine.stabilisers["wheel"]
    assert isinstance(wheel, ReactionWheel)
    square = replace(machine, stabilisers={"wheel": replace(wheel, axis=(0.0, 1.0, 0.0))})
    design = design_stance(plant_of(square), goal())
    assert "cannot act about this line" in design.refused
    assert not design.margins.stable


def test_a_hopeless_delay_is_answered_by_the_limit():
    """p·t_d far beyond 1: LQR still finds gains on paper, but Mt ≥ e^{p t_d} says what they are worth."""
    plant = plant_of(wheel_machine())
    design = design_stance(plant, goal(rate=500.0, latency=0.12))
    assert design.limits.least_peak_complementary == pytest.approx(np.exp(plant.unstable_pole * 0.12))
    assert design.refused or design.margins.peak_complementary >= design.limits.least_peak_complementary * (1 - 1e-6)


def test_weights_that_do_not_fit_the_states_are_an_input_error():
    own = LqrControl(weights=Weights((1.0, 1.0), 1.0))
    marks = {"control.weights.states": (7, 3)}
    with pytest.raises(InputError) as caught:
        design_stance(plant_of(wheel_machine()), goal(control=own, source="d.yaml", marks=marks))
    (problem,) = caught.value.problems
    assert (problem.where, problem.line, problem.column) == ("d.yaml", 7, 3)
    assert "lean, lean_rate, wheel_speed" in problem.allowed


def test_the_residual_of_the_riccati_equation_is_told():
    """Relative to the largest weight: rounding of a well-posed equation; the plain and the trimming law."""
    plant = plant_of(wheel_machine())
    for control in (goal().control, replace(goal().control, trim_time=2.0)):
        law = design_stance(plant, goal(control=control)).law
        assert 0.0 <= law.residual < 1e-6
