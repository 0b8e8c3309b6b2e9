"""What `balance size` prints: what is needed, what does it, what limits it, what a little more would change, cautions."""

from __future__ import annotations

from balance.base.tables import text_table
from balance.cli.words import folded
from balance.report.amounts import amount, figure, speed
from balance.size.answer import SizeAnswer
from balance.size.cautions import cautions
from balance.size.confirm import Confirmed
from balance.size.rotor import RotorCheck


def show_size(found: SizeAnswer) -> str:
    """Return the text of the answer."""
    goal = found.question.goal
    head = f"{found.question.machine.machine}: the smallest stabiliser for {goal.design}"
    count = sum(len(s.grid) for s in found.surveys)
    searched = "; ".join(f"{s.grid.family} {len(s.enough)} of {len(s.grid)}" for s in found.surveys)
    parts = [folded(head), _needs(found), folded(f"{count} candidates; able by the closed forms: {searched}")]
    if found.passed:
        parts += [_best(found), *(_details(c, r) for c, r in zip(found.best, found.rotors, strict=True)), _front(found),
                  "\n".join(folded(s.words()) for s in found.sensitivities), WHENCE]
    else:
        parts.append(_nothing(found))
    return "\n\n".join([*parts, "\n".join(folded(f"Caution: {line}") for line in cautions(found))])


WHENCE = folded("Where simulation needs more than the closed forms: the law does not use all its torque at once, keeps some "
                "momentum to come back, and acts late; where it needs less: the closed forms hold the worst moment of each "
                "trial for ever.")


def _needs(found: SizeAnswer) -> str:
    rows = [[n.stance, amount(n.torque, "N*m"), amount(n.momentum, "N*m*s"), amount(n.both, "N*m*s"), amount(n.power, "W"),
             amount(n.bandwidth, "Hz")] for n in found.needs]
    table = text_table(["needed about", "torque", "momentum", "at 2 × torque", "power", "bandwidth"], rows, "lrrrrr")
    hardest = max(found.needs, key=lambda n: n.momentum)
    words = ("torque", "momentum", "power", "bandwidth")
    return table + "\n" + "\n".join(folded(f"{w}: {r}") for w, r in zip(words, hardest.reasons, strict=True))


def _best(found: SizeAnswer) -> str:
    rows = [[c.candidate.family, c.candidate.words(), amount(c.added, "kg"), amount(c.push, "N*s"), amount(c.power, "W"),
             f"{c.binding}: {c.limited_by}"] for c in found.best]
    return text_table(["family", "the lightest", "adds", "push", "power", "limited by"], rows, "llrrrl")


def _details(c: Confirmed, r: RotorCheck) -> str:
    ratio = f"; least momentum by simulation over the closed forms': {c.ratio:.2f}" if c.ratio else ""
    lines = [f"{c.candidate.family}: {speed(c.candidate.speed)}, momentum {amount(c.capacity, 'N*m*s')}, torque "
             f"{amount(c.torque, 'N*m')} about the line{ratio}",
             f"stress {figure(r.stress / 1e6)} MPa at overspeed, yield is {r.strength_safety:.2f} times that; bursts "
             f"near {speed(min(r.burst_speed, r.burst_ductile))}; stores {amount(r.energy, 'J')}; rim "
             f"{amount(r.rim_speed, 'm/s')}",
             f"unbalance {figure(1e6 * r.unbalance)} g·mm allowed, shakes with {amount(r.shaking, 'N')}: "
             f"{figure(r.vibration, 2)} m/s² of the machine, which the loop sees at {figure(r.seen_at)} Hz; bearings "
             f"carry {amount(r.bearing_load, 'N*m')}",
             f"spins up in {amount(r.spin_up, 's')}; windage {amount(r.windage, 'W')}; winding {figure(r.winding_rise)} K "
             f"of {figure(r.winding_allowed)} K; runtime {_hours(r.runtime)}"]
    return "\n".join(folded(line) for line in lines)


def _hours(seconds: float) -> str:
    return "not known, no battery stated" if seconds == float("inf") else f"{seconds / 3600.0:.3g} h"


def _front(found: SizeAnswer) -> str:
    rows = [[amount(c.added, "kg"), amount(c.push, "N*s"), c.candidate.family, c.candidate.words()] for c in found.by_push]
    power = [[amount(c.added, "kg"), amount(c.power, "W"), c.candidate.family, c.candidate.words()] for c in found.by_power]
    return (text_table(["adds", "worst-case push", "family", "front of mass and push"], rows, "rrll") + "\n\n"
            + text_table(["adds", "peak power", "family", "front of mass and power"], power, "rrll"))


def _nothing(found: SizeAnswer) -> str:
    """Say that nothing fits, what each of the tried ones missed, and what to relax."""
    lines = ["NOTHING FITS: no stabiliser within these limits passes."]
    lines += [f"{c.candidate.words()}: {c.refused}" for c in found.confirmed if c.refused][:6]
    if found.relax:
        lines.append("By the closed forms one of these would do: " + "; ".join(r.words() for r in found.relax) + ".")
    return "\n".join(folded(line) for line in lines)
