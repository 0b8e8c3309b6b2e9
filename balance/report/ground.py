"""What the ground had to give each foot over all trials of one stance."""

from __future__ import annotations

import math
from dataclasses import dataclass

from balance.report.amounts import amount, figure
from balance.report.tables import Row, Table
from balance.simulate.records import FootLoad, TrialResult

Found = tuple[TrialResult, FootLoad]


@dataclass(frozen=True)
class Foot:
    """One foot's worst numbers, each with the trial it came from."""

    foot: str
    least: Found
    friction: Found
    lifted: Found | None       # the earliest; None: never
    slipped: Found | None

    @property
    def words(self) -> tuple[str, str, str]:
        """Return least load, friction needed, and whether it stayed where it was; in which trial each."""
        left = [f"{what} at {amount(when, 's')} ({_which(found[0])})" for what, found, when in (
            ("lifts", self.lifted, self.lifted[1].lift_off if self.lifted else 0.0),
            ("slips", self.slipped, self.slipped[1].slip if self.slipped else 0.0)) if found]
        return (f"{amount(self.least[1].least_load, 'N')} ({_which(self.least[0])})",
                f"{figure(self.friction[1].friction_needed, 2)} ({_which(self.friction[0])})", ", ".join(left) or "stays")


def each_foot(trials: tuple[TrialResult, ...]) -> tuple[Foot, ...]:
    """Return both feet of one stance; none where the machine's feet are not known."""
    if not trials or not trials[0].feet:
        return ()
    return tuple(_over(tuple((trial, trial.feet[i]) for trial in trials)) for i in range(len(trials[0].feet)))


def foot_table(trials: tuple[TrialResult, ...]) -> Table | None:
    """Return each foot's loads of one stance; None where the machine's feet are not known."""
    feet = each_foot(trials)
    if not feet:
        return None
    return Table("What the ground has to give each foot", ("Foot", "Least load", "Friction needed", "On the ground"),
                 tuple(Row(one.foot, one.words, "unmet" if one.lifted or one.slipped else "") for one in feet),
                 "Over all trials; wheels off the line, gyroscopic couples and pushes that last are in it. A blow that "
                 "takes no time is not: state how long it lasts with `for`. After a foot has lifted or slipped the motion "
                 "shown is no longer true.")


def _over(found: tuple[Found, ...]) -> Foot:
    """Return the worst of one foot."""
    up = [f for f in found if math.isfinite(f[1].lift_off)]
    moved = [f for f in found if math.isfinite(f[1].slip)]
    return Foot(found[0][1].foot, min(found, key=lambda f: f[1].least_load), max(found, key=lambda f: f[1].friction_needed),
                min(up, key=lambda f: f[1].lift_off, default=None), min(moved, key=lambda f: f[1].slip, default=None))


def _which(trial: TrialResult) -> str:
    return f"{trial.name} {trial.toward}"
