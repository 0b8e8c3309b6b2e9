"""What must hold between the values of one section of a design file."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from balance.base.words import listed
from balance.files.walk import Fault, Rules
from balance.goal.goal import Allow, Complementary, Goal, Loop, LqrControl
from balance.goal.trials import Payload, Slope, Swing, Trial, Varies
from balance.goal.troubles import Missed

LONGEST_DELAY = 200
"""Samples of latency: each is a state of the loop, and beyond this no machine balances."""
LONGEST_TRIAL = 600.0
"""s of simulated time."""
LONGEST_JITTER = 20
"""Samples a command may be late beyond its latency."""
EVENTS = ("push", "torque", "ramp", "gusts", "start", "offset", "payload", "slope", "lift_off", "swing", "varies")
TROUBLES = ("supply", "missed", "jitter")


def check_loop(loop: Loop) -> Iterator[Fault]:
    """A latency that the loop can hold in memory."""
    if loop.latency * loop.rate > LONGEST_DELAY:
        yield Fault("latency", f"{loop.latency:g} s, {loop.latency * loop.rate:.0f} samples",
                    f"at most {LONGEST_DELAY} samples, {LONGEST_DELAY / loop.rate:g} s at this rate")
    yield from _jitter("latency_tolerance", loop.latency_tolerance, loop.rate)
    yield from _jitter("jitter", loop.jitter, loop.rate)


def _jitter(key: str, jitter: float, rate: float) -> Iterator[Fault]:
    if jitter * rate > LONGEST_JITTER:
        yield Fault(key, f"{jitter:g} s, {jitter * rate:.0f} samples",
                    f"at most {LONGEST_JITTER} samples, {LONGEST_JITTER / rate:g} s at this rate")


def check_lqr(control: LqrControl) -> Iterator[Fault]:
    """Weights come from one place."""
    given = [word for word in ("allow", "weights") if getattr(control, word) is not None]
    if len(given) != 1:
        yield Fault("weights" if given else "", " and ".join(f"`{word}`" for word in given) or "neither",
                    "exactly one of `allow` and `weights`",
                    "`allow` states the largest acceptable excursions, as `{lean: 3 deg, …}`")
    if control.trim_time is not None and control.allow is None:
        yield Fault("trim_time", "`trim_time` with `weights`", "`trim_time` with `allow`",
                    "its weight follows from the allowed momentum")


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
    yield from _rising("points", swing.points)


def _rising(key: str, points: tuple[tuple[float, float], ...]) -> Iterator[Fault]:
    """Times go forward."""
    times = [time for time, _ in points]
    if len(times) < 2 or any(later <= earlier for earlier, later in pairwise(times)):
        yield Fault(key, f"times {', '.join(f'{time:g}' for time in times)} s",
                    "two or more times, each later than the last")


def check_varies(varies: Varies) -> Iterator[Fault]:
    """Each table goes forward in time and begins with no change: a body's inertia does not jump."""
    words = ("inertia", "height_moment", "offset_moment", "torque")
    if all(getattr(varies, word) is None for word in words):
        yield Fault("", "nothing that varies", f"at least one of {listed(words)}")
    for word in words:
        points = getattr(varies, word)
        if points is not None:
            yield from _rising(word, points)
            if points[0][1] != 0.0 and word != "torque":
                yield Fault(word, f"a first change of {points[0][1]:g}", "a first value of 0 with its unit",
                            "values are added to the stance's own; a load that comes at once is `payload`")


def check_payload(payload: Payload) -> Iterator[Fault]:
    """Something comes or goes."""
    if payload.mass == 0.0:
        yield Fault("mass", "a load without mass", "a mass put on (above 0) or taken off (below 0)")


def check_slope(slope: Slope) -> Iterator[Fault]:
    """A slope has an angle."""
    if slope.along == 0.0 and slope.across == 0.0:
        yield Fault("", "neither `along` nor `across`", "at least one of them, not 0 deg")


def check_missed(missed: Missed) -> Iterator[Fault]:
    """So many in a row, or a share of all."""
    given = [word for word in ("samples", "share") if getattr(missed, word) is not None]
    if len(given) != 1:
        yield Fault(given[1] if given else "", " and ".join(f"`{word}`" for word in given) or "neither",
                    "exactly one of `samples` and `share`")
    elif missed.samples is not None and missed.lasts is not None:
        yield Fault("for", "`for` beside `samples`", "`for` only with `share`", "`samples` says how long it lasts")


def check_trial(trial: Trial) -> Iterator[Fault]:
    """Something happens, once, before the trial ends."""
    if all(getattr(trial, event) is None for event in EVENTS):
        only = [f"`{word}`" for word in TROUBLES if getattr(trial, word) is not None]
        yield Fault("", "a trial in which nothing happens", f"at least one of {listed(EVENTS)}",
                    f"{listed(only)} makes a trial harder but moves nothing" if only else "")
    if trial.start is not None and trial.lift_off is not None:
        yield Fault("lift_off", "`start` beside `lift_off`", "one of them: both say how the trial begins")
    if trial.lasts > LONGEST_TRIAL:
        yield Fault("for", f"{trial.lasts:g} s", f"at most {LONGEST_TRIAL:g} s")
    timed = ((event, getattr(trial, event)) for event in (*EVENTS, *TROUBLES) if event != "start")
    for event, section in timed:
        word, key = ("at", "at") if hasattr(section, "at") else ("start", "from")
        begins = 0.0 if section is None else getattr(section, word)
        if begins >= trial.lasts:
            yield Fault(f"{event}.{key}", f"{begins:g} s", f"less than the trial's length, {trial.lasts:g} s")


def check_goal(goal: Goal) -> Iterator[Fault]:
    """The filter's crossover lies below half the sampling rate; no command is later than the queue is long."""
    if isinstance(goal.estimator, Complementary) and goal.estimator.crossover >= goal.loop.rate / 2:
        yield Fault("estimator.crossover", f"{goal.estimator.crossover:g} Hz",
                    f"less than half the loop's rate, {goal.loop.rate / 2:g} Hz")
    for name, trial in goal.trials.items():
        if trial.jitter is not None:
            yield from _jitter(f"trials.{name}.jitter.up_to", trial.jitter.up_to, goal.loop.rate)


RULES: Rules = {
    Loop: check_loop, LqrControl: check_lqr, Allow: check_allow, Swing: check_swing, Trial: check_trial,
    Goal: check_goal, Varies: check_varies, Payload: check_payload, Slope: check_slope, Missed: check_missed,
}
