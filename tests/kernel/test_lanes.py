"""64 trials side by side against the single trace, bit for bit against themselves, and the order of their integrator."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
import pytest

from balance.kernel import layout
from balance.kernel.integrate import longest_step
from balance.kernel.sensing import GYRO, TILT
from balance.simulate import batch as room
from balance.simulate.batch import Batch, Recoveries, recoveries
from tests.kernel import batches, rigs, test_accuracy

QUIET = 0.24
ROUNDING = 1e-10
"""Both kernels make the same steps; sums are rounded in another order and products fused (1e-16 each, 1200 steps of a plant
whose unstable pole lets 0.6 s of error grow e^3.5 times; measured: 1e-13), powers have 150 W."""


def columns(result: Recoveries) -> dict[str, np.ndarray]:
    """Return the arrays of a result by name."""
    return {f.name: getattr(result, f.name) for f in fields(result) if isinstance(getattr(result, f.name), np.ndarray)}


def alone(batch: Batch, law, events, monkeypatch) -> Recoveries:
    """Return the same batch from the single kernel."""
    with monkeypatch.context() as patched:
        patched.setattr(room, "not_covered", lambda *_: "asked for by this test")
        return recoveries(batch, law, events, QUIET)


CASES = {
    "one wheel": (1, (0, 1, 2), None, 0.0013),
    "one wheel, noise, tilt and gyro": (1, (TILT, GYRO, 2), batches.noisy_sensor(), 0.002),
    "two wheels": (2, (0, 1, 2), None, 0.0045),
}


@pytest.mark.parametrize("case", CASES)
def test_lanes_tell_what_the_single_trace_tells(case, monkeypatch) -> None:
    """Every number of 70 trials, of which some fall and all meet limits; a machine 0.1 % stiffer is told apart."""
    count, places, sensor, latency = CASES[case]
    batch, law, events = batches.many(70, count), batches.control(count, places, latency), batches.disturbed(sensor)
    side_by_side, single = recoveries(batch, law, events, QUIET), alone(batch, law, events, monkeypatch)
    assert side_by_side.in_lanes
    assert not single.in_lanes
    assert len({int(v) for v in single.verdict}) >= 3
    assert np.mean(single.torque_saturated > 0.0) > 0.9
    for name, told in columns(single).items():
        np.testing.assert_allclose(columns(side_by_side)[name], told, rtol=ROUNDING, atol=ROUNDING, err_msg=name)
    bodies = batch.bodies.copy()
    bodies[:, layout.STIFF_SIN] *= 1.001
    stiffer = recoveries(replace(batch, bodies=bodies), law, events, QUIET)
    assert np.all(np.abs(stiffer.end_lean - single.end_lean) > ROUNDING)


def test_results_are_the_same_bits_however_a_batch_is_cut() -> None:
    """One thread, two, three; whole, or in pieces that are no multiple of a block: noise included."""
    law, events = batches.control(1, (TILT, GYRO, 2)), batches.disturbed(batches.noisy_sensor(1e-4), 0.3)
    batch = batches.many(200, 1)
    whole = columns(recoveries(batch, law, events, QUIET, threads=1))
    for threads in (2, 3):
        for name, told in columns(recoveries(batch, law, events, QUIET, threads=threads)).items():
            assert told.tobytes() == whole[name].tobytes(), name
    for cut in (slice(0, 5), slice(5, 136), slice(136, 200)):
        part = Batch(**{f.name: getattr(batch, f.name)[cut] for f in fields(batch)})
        for name, told in columns(recoveries(part, law, events, QUIET)).items():
            assert told.tobytes() == whole[name][cut].tobytes(), name
    other = columns(recoveries(replace(batch, seeds=batch.seeds + 1), law, events, QUIET))
    assert other["end_lean"].tobytes() != whole["end_lean"].tobytes()


def test_runge_kutta_in_lanes_has_order_four() -> None:
    """Regression of log error over log step on a smooth fall: no limit, no drag, nothing sudden. The wheel has a lag."""
    body = rigs.body(fell=1.4)
    units = rigs.wheel(lag=100.0, torque=50.0, speed=1e6)
    law = rigs.law((3.0, 0.5, 0.0), sample_time=0.2)
    batch = Batch(body[None], units[None], np.array([[0.05, 0.1, 0.0, 0.0]]), np.zeros((1, 1)), np.ones(1),
                  np.zeros(1, dtype=np.int64), np.ones(1))
    steps = np.array([0.2 / n for n in (20, 40, 80, 160)])
    leans = [recoveries(batch, law, rigs.events(0.4, longest=h), 0.0).end_lean[0] for h in (*steps, 0.2 / 2560)]
    errors = np.abs(np.array(leans[:-1]) - leans[-1])
    slope = np.polyfit(np.log(steps), np.log(errors), 1)[0]
    assert slope == pytest.approx(4.0, abs=0.3)                      # the next order still shows at the coarse end


def after_kicks(longest, kicks=(0.02, 0.12, 0.24), lasts=0.3):
    """Return (result of lanes, DOP853's end states at 1e-12, the momenta those store): `test_accuracy`'s machine and law."""
    body, units, n = rigs.body(inertia=0.35, stiffness=9.0), test_accuracy.real_motor(), len(kicks)
    law = rigs.law(test_accuracy.GAINS, 0.002, 0.0027)
    batch = Batch(np.tile(body, (n, 1)), np.tile(units, (n, 1, 1)), np.zeros((n, 4)), np.zeros((n, 1)), np.array(kicks),
                  np.zeros(n, dtype=np.int64), np.full(n, 2.0))
    result = recoveries(batch, law, rigs.events(lasts, jumps=[(0.02, 1.0, 0.0, np.inf)], longest=longest), 0.02)
    ends = np.array([test_accuracy.by_period(body, units, [0.0] * 4, test_accuracy.GAINS, 0.002, 0.0027, 0.02, k, lasts)[-1]
                     for k in kicks])
    coupling, own = units[0, layout.COUPLING], units[0, layout.OWN_INERTIA]
    return result, ends, coupling * ends[:, 2] + coupling**2 / own * ends[:, 1]


def test_lanes_against_dop853_with_every_limit_met() -> None:
    """Issue 5's bounds: lean within 5e-9 rad, wheel speed (here its momentum) within 1e-5 of its peak."""
    result, ends, stored = after_kicks(longest_step(test_accuracy.real_motor()))
    assert np.all(result.end_time == 0.3)                            # none has fallen: the ends are of one instant
    assert result.torque_saturated[2] > result.torque_saturated[0]
    assert np.abs(result.end_lean - ends[:, 0]).max() < 5e-9
    assert np.all(np.abs(result.end_momentum - stored) < 1e-5 * result.peak_momentum)


def test_lanes_with_a_step_too_long_are_seen() -> None:
    """The twin: the same comparison fails with sub-steps the current loop does not allow."""
    result, ends, _ = after_kicks(1e-3)
    assert np.abs(result.end_lean - ends[:, 0]).max() > 5e-9


@pytest.mark.parametrize(("change", "why"), [
    (lambda b, law, e: (replace(b, units=np.tile(rigs.pair(), (3, 1, 1))), law, e), "gimbals"),
    (lambda b, law, e: (b, law, e._replace(release=0.1)), "a release"),
    (lambda b, law, e: (b, law, e._replace(spells=np.array([[0.0, 1.0, 1.0, 0.5]]))), "missed or late samples"),
])
def test_what_lanes_do_not_cover_runs_by_itself(change, why) -> None:
    """The answer has the same form and says why."""
    batch, law, events = change(batches.many(3, 1), batches.control(1), batches.disturbed(lasts=0.05))
    result = recoveries(batch, law, events, 0.04)
    assert (result.in_lanes, result.why) == (False, why)
    assert sum(result.counts.values()) == 3
