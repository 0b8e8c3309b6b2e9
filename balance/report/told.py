"""What a trial does to the machine, in words."""

from __future__ import annotations

from balance.goal.trials import Trial, Varies
from balance.goal.troubles import Missed
from balance.report.amounts import amount, share


def told(trial: Trial | None) -> str:
    """Say what a trial does to the machine."""
    if trial is None:
        return ""
    return "; ".join([*_torques(trial), *_beginnings(trial), *_changes(trial), *_troubles(trial)])


def _torques(trial: Trial) -> list[str]:
    said = []
    if trial.push:
        said.append(f"a push of {amount(trial.push.impulse, 'N*s')} at {amount(trial.push.height, 'm')}")
    if trial.torque:
        said.append(f"a torque of {amount(trial.torque.step, 'N*m')}{_for(trial.torque.lasts)}")
    if trial.ramp:
        said.append(f"a torque that grows to {amount(trial.ramp.to, 'N*m')} in {amount(trial.ramp.lasts, 's')}, and stays")
    if trial.gusts:
        most = max(abs(torque) for _, torque in trial.gusts.points)
        said.append(f"gusts of up to {amount(most, 'N*m')}{_for(trial.gusts.points[-1][0])} ({trial.gusts.file})")
    return said


def _beginnings(trial: Trial) -> list[str]:
    said = []
    for begin, words in ((trial.start, "starts"), (trial.lift_off, "the third foot lets go")):
        if begin:
            stored = f" and {amount(begin.stored, 'N*m*s')} stored" if begin.stored else ""
            said.append(f"{words} at {amount(begin.lean, 'rad')}, {amount(begin.lean_rate, 'rad/s')}{stored}")
    return said


def _changes(trial: Trial) -> list[str]:
    said = []
    if trial.offset:
        said.append(f"the centre of mass shifts {amount(trial.offset.shift, 'm')} and stays")
    if trial.payload:
        way = "put on" if trial.payload.mass > 0.0 else "taken off"
        across = f", {amount(trial.payload.across, 'm')} across" if trial.payload.across else ""
        load, height = amount(abs(trial.payload.mass), "kg"), amount(trial.payload.height, "m")
        said.append(f"a load of {load} is {way} at {height}{across}")
    if trial.slope:
        ways = ((trial.slope.along, "along the line"), (trial.slope.across, "across it"))
        said += [f"the ground tilts {amount(angle, 'rad')} {way}" for angle, way in ways if angle]
    if trial.swing:
        peak = f", ±{amount(trial.swing.peak, 'N*m')} out and back" if trial.swing.peak is not None else ""
        said.append(f"a leg swings{peak}")
    if trial.varies:
        said.append(f"{' and '.join(_varied(trial.varies))} over time by a table")
    return said


def _varied(varies: Varies) -> list[str]:
    words = {"inertia": "the inertia", "height_moment": "the moment of height", "offset_moment": "the moment of offset",
             "torque": "a torque"}
    return [words[word] for word in words if getattr(varies, word) is not None]


def _troubles(trial: Trial) -> list[str]:
    said = []
    if trial.supply:
        said.append(f"the supply falls to {share(trial.supply.falls_to)}{_for(trial.supply.lasts)}")
    if trial.missed:
        said.append(_missed(trial.missed))
    if trial.jitter:
        said.append(f"commands up to {amount(trial.jitter.up_to, 's')} late")
    return said


def _missed(missed: Missed) -> str:
    if missed.samples is not None:
        return f"{missed.samples} samples missed from {amount(missed.start, 's')} on"
    return f"{share(missed.share or 0.0)} of the samples missed{_for(missed.lasts)}"


def _for(lasts: float | None) -> str:
    return f" for {amount(lasts, 's')}" if lasts is not None else ""
