"""What the answer takes for granted, what nobody asked for, and what was not looked at."""

from __future__ import annotations

from dataclasses import fields

from balance.check.records import CheckResult
from balance.goal.goal import NoEstimator
from balance.report.amounts import amount, listed
from balance.report.verdicts import spoken


def assumed(result: CheckResult) -> tuple[str, ...]:
    """Say what the model takes for granted."""
    machine = result.machine
    legs = ("The trunk is rigid, the legs give at one massless hinge; margins and trials know of it, the law does not."
            if machine.leg_compliance else "Trunk and legs are rigid: nothing gives, nothing rings.")
    said = [f"{legs} The two feet stay where they are: what makes one slip or lift is reported, not what comes after it.",
            "The margins are those of the linear model at the balanced lean; the trials run the full one, with sine gravity "
            "and every stated limit.",
            "A push acts square to the contact line, level with the centre of mass as seen along the line.",
            "Backlash of gears, stiction of bearings, sag of the supply and what its capacitor does with braking energy are "
            "in the trials where the machine file states them, and nowhere else."]
    if isinstance(result.goal.estimator, NoEstimator):
        said.insert(0, "Lean and lean rate are measured as they are: no noise, bias or estimator is in the loop.")
    if machine.lumped is not None:
        said.append("The machine is given by mass, height and inertia alone: nothing is known of its feet, legs or shape, "
                    "and the length of the line in the drawing means nothing.")
    if any(one.mount and one.mount.turntable for one in machine.stabilisers.values()):
        said.append("A turntable already faces the line when the trial begins; the time it takes to turn is not in it.")
    if any(design.plant.stance.outward_is_fall_only for design in result.designs):
        said.append("Nothing lifted catches an inward fall.")
    return tuple(said)


def unchecked(result: CheckResult) -> tuple[str, ...]:
    """Say what was not looked at, first what the design file could have asked for and did not."""
    require = result.goal.require
    silent = tuple(spoken(one.name) for one in fields(require)
                   if getattr(require, one.name) is None and not one.name.startswith("worst_"))
    said = [f"Not asked for in the design file, so not judged: {listed(silent)}."] if silent else []
    said += ["Strength of rotors, shafts, bearings, legs and gimbals; heat in motors and drives beyond the current limits.",
             "Walking itself: how the machine gets onto these feet, and off them again.",
             tolerances(result),
             f"Anything after the trials' {amount(longest(result), 's')}: a slow drift that fills the stabiliser later is "
             "only seen if the trial lasts long enough." if result.trials else "No trial was run."]
    return tuple(said)


def tolerances(result: CheckResult) -> str:
    """Say how far what was judged is the machine as stated."""
    built = "A machine as built differs from its file; weigh it, swing it, and run the check again with what was measured."
    if not any(design.robustness for design in result.designs):
        return f"Tolerances: every number is the stated one. {built}"
    asked = any(getattr(result.goal.require, one.name) is not None for one in fields(result.goal.require)
                if one.name.startswith("worst_"))
    limit = "" if asked else " No limit on the worst margins is asked for: only that the loop stays stable."
    return f"Tolerances in the trials: they run the machine as stated; only the margins saw the tolerances.{limit} {built}"


def longest(result: CheckResult) -> float:
    """The longest simulated time, s."""
    return max((trial.lasts for trial in result.goal.trials.values()), default=0.0)
