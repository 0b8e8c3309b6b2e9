"""What must hold between the values of one section of a design file."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from balance.base.words import listed
from balance.files.walk import Fault, Rules
from balance.goal.goal import Allow, Complementary, Goal, Loop, LqrControl
from balance.goal.trials import Swing, Trial

LONGEST_DELAY = 200
"""Samples of latency: each is a state of the loop, and beyond this no machine balances."""
LONGEST_TRIAL = 600.0
"""s of simulated time."""
EVENTS = ("push", "torque", "start", "offset", "lift_off", "swing")


def check_loop(loop: Loop) -> Iterator[Fault]:
    """A latency that the loop can hold in memory."""
    if loop.latency * loop.rate > LONGEST_DELAY:
        yield Fault("latency", f"{loop.latency:g} s, {loop.latency * loop.rate:.0f} samples",
                    f"at most {LONGEST_DELAY} samples, {LONGEST_DELAY / loop.rate:g} s at this rate")


def check_lqr(control: LqrControl) -> Iterator[Fault]:
    """Weights come from one place."""
    given = [word for word in ("allow", "weights") if getattr(control, word) is not None]
    if len(given) != 1:
        yield Fault("weights" if given else "", " and ".join(f"`{word}`" for word in given) or "neither",
                    "exactly one of `allow` and `weights`",
                    "`allow` states the largest acceptable excursions, as `{lean: 3 deg, …}`")


def check_allow(allow: Allow) -> Iterator[Fault]:
    """The effort of the unit's own input must be named."""
    if allow.torque is None and allow.gimbal_rate is None:
        yield Fault("", "neither `torque` nor `gimbal_rate`",
                    "`torque` for wheels and torque motors, `gimbal_rate` for servos")


def check_swing(swing: Swing) -> Iterator[Fault]:
    """One full sine by peak and duration, or a table of points."""
    whole = swing.peak is not None and swing.lasts is not None
    half = swing.peak is not None or swing.lasts is not None
    allowed = "`peak` and `for`, or `points`"
    if swing.points is None:
        if not whole:
            yield Fault("", "neither a whole sine nor `points`", allowed)
        return
    if half:
        yield Fault("points", "both a sine and `points`", allowed)
    times = [time for time, _ in swing.points]
    if len(times) < 2 or any(later <= earlier for earlier, later in pairwise(times)):
        yield Fault("points", f"times {', '.join(f'{time:g}' for time in times)} s",
                    "two or more times, each later than the last")


def check_trial(trial: Trial) -> Iterator[Fault]:
    """Something happens, once, before the trial ends."""
    if all(getattr(trial, event) is None for event in EVENTS):
        yield Fault("", "a trial in which nothing happens", f"at least one of {listed(EVENTS)}")
    if trial.start is not None and trial.lift_off is not None:
        yield Fault("lift_off", "`start` beside `lift_off`", "one of them: both say how the trial begins")
    if trial.lasts > LONGEST_TRIAL:
        yield Fault("for", f"{trial.lasts:g} s", f"at most {LONGEST_TRIAL:g} s")
    for event, section in ((event, getattr(trial, event)) for event in EVENTS if event != "start"):
        word, key = ("at", "at") if event in ("offset", "lift_off") else ("start", "from")
        begins = 0.0 if section is None else getattr(section, word)
        if begins >= trial.lasts:
            yield Fault(f"{event}.{key}", f"{begins:g} s", f"less than the trial's length, {trial.lasts:g} s")


def check_goal(goal: Goal) -> Iterator[Fault]:
    """The filter's crossover lies below half the sampling rate."""
    if isinstance(goal.estimator, Complementary) and goal.estimator.crossover >= goal.loop.rate / 2:
        yield Fault("estimator.crossover", f"{goal.estimator.crossover:g} Hz",
                    f"less than half the loop's rate, {goal.loop.rate / 2:g} Hz")


RULES: Rules = {
    Loop: check_loop, LqrControl: check_lqr, Allow: check_allow, Swing: check_swing, Trial: check_trial,
    Goal: check_goal,
}
