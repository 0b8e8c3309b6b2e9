"""Curves of the trials: thinned without losing a peak, events where they happen, an uneventful end left out."""

from __future__ import annotations

import numpy as np
import pytest

from balance.goal.trials import LiftOff, OffsetShift, Push, Start, Swing, TorqueStep, Trial
from balance.report.figures.recovery import cut_short
from balance.report.histories import MOST_POINTS, Curves, TrialPicture, events_of, kept, picture_trials, still_after
from balance.simulate.records import Trace


def trace(lean: np.ndarray) -> Trace:
    flat = np.zeros_like(lean)
    return Trace(np.arange(lean.size) * 0.002, lean, flat, 0.3 * lean, flat + 1, 0.1 * lean, flat, flat, flat[:, None])


def test_thinning_keeps_one_sample_spikes():
    rng = np.random.default_rng(7)
    for _ in range(20):
        lean = np.sin(np.linspace(0, 30, 5000))
        spike = int(rng.integers(1, 4999))
        lean[spike] = 9.0
        keep = kept(trace(lean))
        assert spike in keep
        assert keep.size <= MOST_POINTS + 2
        assert keep[0] == 0
        assert keep[-1] == 4999


def test_short_records_are_kept_whole():
    assert kept(trace(np.zeros(50))).size == 50


def test_events_in_order_of_time():
    whole = Trial(push=Push(1.0, 0.3, start=0.4, lasts=0.1), torque=TorqueStep(0.2, start=0.3), start=Start(0.01),
                  offset=OffsetShift(0.003, at=0.2), lift_off=LiftOff(at=0.1), swing=Swing(points=((0.5, 0.0), (0.9, 0.0))))
    said = [(e.since, e.until, e.words) for e in events_of(whole)]
    assert said == [(0.0, 0.0, "start"), (0.1, 0.1, "lift-off"), (0.2, 0.2, "load shifts"), (0.3, 5.0, "torque"),
                    (0.4, 0.5, "push"), (0.6, 1.0, "leg swings")]    # points count from `from`, 0.1 s
    assert events_of(None) == ()


def curves(until: float, moves: float) -> Curves:
    time = np.linspace(0.0, until, 1001)
    curve = np.where(time < moves, np.cos(40 * time), 0.5)
    return Curves("outward", "recovered", time, curve, curve, np.ones_like(time), curve)


@pytest.mark.parametrize(("moves", "shown"), [(0.9, 1.5), (3.0, 5.0), (4.9, 8.0)])
def test_the_still_end_is_left_out(moves, shown):
    """Half as much again as the time it moves, in steps of 0.5 s below 2 s and of 1 s above; never beyond the end."""
    assert still_after((curves(8.0, moves),), (), 8.0) == shown


def test_a_fall_is_shown_to_its_end():
    fallen = curves(1.2, 1.3)
    picture = TrialPicture("shove", "line", (fallen,), 1.0, 30.0, np.nan, (), 5.0, still_after((fallen,), (), 5.0))
    assert picture.shown == 2.0
    assert not cut_short(picture)
    still = curves(5.0, 0.5)
    assert cut_short(TrialPicture("shove", "line", (still,), 1.0, 30.0, np.nan, (), 5.0, still_after((still,), (), 5.0)))


def test_peaks_drawn_are_peaks_measured(answered):
    result = answered("scout-wheels", "on-fore-left")
    for picture in picture_trials(result.designs[0], result.trials, result.goal.trials):
        for one in picture.curves:
            (trial,) = (t for t in result.trials if (t.name, t.toward) == (picture.name, one.toward))
            # the simulator measures between samples, the drawing at them: 500 Hz against a pole of 5 1/s
            assert np.max(np.abs(one.lean)) == pytest.approx(np.degrees(trial.peak_lean), rel=1e-3)
            assert np.max(np.abs(one.momentum)) == pytest.approx(trial.peak_momentum, rel=5e-3)
