"""What a sizing says of each candidate, in rows and sentences: the terminal and the page print the same."""

from __future__ import annotations

from math import inf, isinf, pi

from balance.report.amounts import amount, figure, speed
from balance.size.answer import SizeAnswer
from balance.size.candidate import WHEEL
from balance.size.confirm import Confirmed
from balance.size.ledger import Ledger
from balance.size.rotor import RotorCheck

Rows = list[list[str]]

NEEDS = ["needed about", "torque", "momentum", "at 2 × torque", "power", "bandwidth"]
BEST = ["family", "the lightest", "adds", "push", "power", "limited by"]
LEDGER = ["least momentum, as a factor", "closed forms", "simulated", "ratio"]
"""Heads of tables."""


def need_rows(found: SizeAnswer) -> Rows:
    """Return what each contact line needs."""
    return [[n.stance, amount(n.torque, "N*m"), amount(n.momentum, "N*m*s"), amount(n.both, "N*m*s"), amount(n.power, "W"),
             amount(n.bandwidth, "Hz")] for n in found.needs]


def best_rows(found: SizeAnswer) -> Rows:
    """Return the lightest of each family with what limits it."""
    return [[c.candidate.family, c.candidate.words(), amount(c.added, "kg"), amount(c.push, "N*s"), amount(c.power, "W"),
             f"{c.binding}: {c.limited_by}"] for c in found.best]


def push_rows(found: SizeAnswer) -> Rows:
    """Return the front of mass and push."""
    return [[amount(c.added, "kg"), amount(c.push, "N*s") + (" *" if c.given_way else ""), c.candidate.family,
             c.candidate.words()] for c in found.by_push]


def power_rows(found: SizeAnswer) -> Rows:
    """Return the front of mass and power."""
    return [[amount(c.added, "kg"), amount(c.power, "W"), c.candidate.family, c.candidate.words()] for c in found.by_power]


def overpowered(found: SizeAnswer) -> str:
    """Say which pushes overpower a gimbal drive; "" where none does."""
    given = [c for c in found.by_push if c.given_way]
    if not given:
        return ""
    worst = max(c.push_back for c in given)
    return (f"* at this push the flywheel presses its gimbal back with up to {worst:.2g} times what the drive has: the "
            "gimbal gives way faster than it turns by itself, which helps, and can do more than the closed forms call "
            "possible. Count on it only if the gear bears it.")


def ledger_rows(told: Ledger) -> Rows:
    """Return the lines of a ledger with their product."""
    rows = [[e.what, f"{e.closed:.3f}", f"{e.simulated:.3f}", f"{e.ratio:.3f}"] for e in told.entries]
    closed, simulated = told.closed, told.simulated
    return [*rows, ["together (1: all of it)", f"{closed:.3f}", f"{simulated:.3f}", f"{told.ratio:.3f}"]]


def ledger_words(told: Ledger) -> str:
    """Say in a sentence or two where simulation and closed forms part for the hardest trial."""
    most = max(told.entries, key=lambda e: abs(e.ratio - 1.0))
    where = f"{told.trial}, {told.toward}, {told.stance}"
    best = f"The best that any law of this rate and latency can do needs {_more(told.possible)} the closed forms say"
    if abs(most.ratio - 1.0) < 0.01:
        return f"{best}, and this law does as well ({where})."
    return (f"{best}; what the trials ask of this law needs {_more(told.ratio)} they say. Most of the difference: "
            f"{most.what}, {_percent(most.ratio)} ({where}).")


def _more(ratio: float) -> str:
    return "just the momentum" if abs(ratio - 1.0) < 0.005 else f"{_percent(ratio)} {'more' if ratio > 1 else 'less'} than"


def _percent(ratio: float) -> str:
    return f"{100.0 * abs(ratio - 1.0):.1f} %"


def rotor_lines(c: Confirmed, r: RotorCheck, found: SizeAnswer) -> list[str]:
    """Return what there is to say of one candidate's rotor, a sentence or two each."""
    return [f"{speed(c.candidate.speed)}, momentum {amount(c.capacity, 'N*m*s')}, torque {amount(c.torque, 'N*m')} about "
            "the line",
            f"stress {figure(r.stress / 1e6)} MPa at overspeed, yield is {r.strength_safety:.2f} times that; bursts "
            f"near {speed(min(r.burst_speed, r.burst_ductile))}; stores {amount(r.energy, 'J')}; rim "
            f"{amount(r.rim_speed, 'm/s')}",
            f"unbalance {figure(1e6 * r.unbalance)} g·mm allowed, shakes with {amount(r.shaking, 'N')}, bearings "
            f"carry {amount(r.bearing_load, 'N*m')}",
            shaken(c, r, found), crossed(c, r),
            f"spins up in {amount(r.spin_up, 's')}; windage {amount(r.windage, 'W')}; winding {figure(r.winding_rise)} K "
            f"of {figure(r.winding_allowed)} K; runtime {_hours(r.runtime)}"]


def shaken(c: Confirmed, r: RotorCheck, found: SizeAnswer) -> str:
    """Say what the residual unbalance does to the IMU: its share of the range, and the frequency the loop sees."""
    turning, nyquist = c.candidate.speed / (2.0 * pi), 0.5 * found.question.goal.loop.rate
    seen = (f"at {figure(turning)} Hz, below half the sampling rate" if turning <= nyquist else
            f"at {figure(turning)} Hz, which sampling shows as {figure(r.seen_at)} Hz: filter before sampling")
    share = f", {_share(r.imu_share)} of the accelerometer's range" if r.imu_share else ""
    return f"that shakes the machine by {figure(r.vibration, 2)} m/s²{share}, {seen}"


def crossed(c: Confirmed, r: RotorCheck) -> str:
    """Say whether the rotor's speed meets the swing of legs that give."""
    if isinf(c.mode):
        return "legs are taken as stiff: no mode for the unbalance to meet"
    if r.crossing == inf:
        return f"turns below the legs' own swing ({amount(c.mode / (2.0 * pi), 'Hz')}) always"
    when = "whenever it passes that speed" if c.candidate.family == WHEEL else "on the way up and down"
    return f"meets the legs' own swing at {speed(r.crossing)}: {when}, its unbalance drives it"


def nothing_lines(found: SizeAnswer) -> list[str]:
    """Say that nothing fits, what each of the tried ones missed, and what to relax."""
    lines = ["NOTHING FITS: no stabiliser within these limits passes."]
    lines += [f"{c.candidate.words()}: {c.refused}" for c in found.confirmed if c.refused][:6]
    if found.relax:
        lines.append("By the closed forms one of these would do: " + "; ".join(r.words() for r in found.relax) + ".")
    return lines


def _share(part: float) -> str:
    return f"{100.0 * part:.2g} %"


def _hours(seconds: float) -> str:
    return "not known, no battery stated" if seconds == inf else f"{seconds / 3600.0:.3g} h"
