"""The worst case within the tolerances, retuned weights and one gain set for all stances, as tables of words."""

from __future__ import annotations

import math

from balance.design.records import Design, Retuning, Robustness, WorstCase
from balance.design.robustness.one_law import OneLaw
from balance.design.robustness.ranges import told
from balance.kernel.layout import ANGLE_STOP, MOMENTUM, RATE_LIMIT
from balance.machine.tolerances import Tolerances
from balance.plant.record import Plant
from balance.report.amounts import amount, figure, share
from balance.report.margins import factor
from balance.report.tables import Row, Table

WORDS = {"disk": "disk margin", "modulus": "modulus margin", "phase": "phase margin", "gain_lower": "gain may fall to",
         "gain_upper": "gain may rise to", "delay": "delay margin"}

NOTE = ("The law is held as it is; the machine and the delay are moved within the tolerances, each number for itself. The "
        "worst case was searched (corners, faces, seeded points inside, then step by step downhill from the lowest): that "
        "finds cases and proves none absent. Named are the deviations that cost the margin, dearest first. Tolerances are "
        "seen by the linear loop alone: what they do to limits, voltage above all, is not in it.")


def worst_table(design: Design) -> Table | None:
    """One stance's margins as stated and at their worst; None where no tolerances are stated."""
    found = design.robustness
    if found is None:
        return None
    rows = tuple(Row(words[0], words[1:]) for words in (case_words(case, found) for case in found.cases))
    title = f"Worst case of {found.evaluations} loops tried: " + ("all stable" if found.stable else "NOT all stable")
    return Table(title, ("Margin", "As stated", "Worst", "At"), rows, f"{within(found)} {NOTE}", wordy=True)


def case_words(case: WorstCase, found: Robustness) -> tuple[str, str, str, str]:
    """Write one worst case: margin, as stated, worst, where."""
    worst = "unstable" if math.isnan(case.value) else margin_words(case.margin, case.value)
    return WORDS[case.margin], margin_words(case.margin, case.nominal), worst, told(case.at, found.ranges)


def margin_words(name: str, value: float) -> str:
    """Write one margin in the unit a person reads it in."""
    if name == "phase":
        return amount(value, "rad")
    if name == "delay":
        return amount(value, "s")
    if name.startswith("gain"):
        return factor(value, 0.0 if name == "gain_lower" else math.inf)
    return figure(value)


def within(found: Robustness) -> str:
    """Say the tolerances, as `Within mass ±3 %, latency −0.5 ms to +1 ms`."""
    words = []
    for one in found.ranges:
        high = told({one.name: one.high}, found.ranges)
        if one.low == -one.high:
            words.append(high.replace("+", "±"))
        else:
            low = told({one.name: one.low}, found.ranges).rpartition(f"{one.name} ")[2]
            words.append(high.replace(f"{one.name} ", f"{one.name} {low} to ") if one.low else high.replace("+", "up to +"))
    return f"Within {', '.join(words)}."


def across_words(plant: Plant, tolerances: Tolerances | None) -> str:
    """Say what a mismatched pair does across the line, or nothing where there is none.

    Momentum of ±H(1 ± m) at angles ε ± γ: 2 H (m cos γ − sin γ sin ε) stands along s₀, whose rate of change is at most
    2 H γ̇ (m sin γ_max + sin ε).
    """
    mismatch = tolerances.pair_mismatch if tolerances else None
    if mismatch is None or not (mismatch.momentum or mismatch.angle):
        return ""
    worst = 0.0
    for unit, row in zip(plant.units, plant.unit_parameters, strict=True):
        if unit.kind == "scissored pair":
            part = mismatch.momentum * math.sin(row[ANGLE_STOP]) + math.sin(mismatch.angle)
            worst += 2.0 * float(row[MOMENTUM] * row[RATE_LIMIT]) * part
    if not worst:
        return ""
    return (f"The pair's mismatch leaves up to {amount(worst, 'N*m')} about the spin axis at the gimbals' rate limit, for "
            "the feet to carry; a difference of momentum between the two does nothing about the line.")


def one_law_table(found: OneLaw) -> Table:
    """Disk, phase and delay margin of each stance with its own gains and with one set for all."""
    rows = []
    for stance, own, one in zip(found.stances, found.own, found.shared, strict=True):
        cells = []
        for name in ("disk", "phase", "delay"):
            cells += [margin_words(name, float(getattr(own, name))), margin_words(name, float(getattr(one, name)))]
        rows.append(Row(stance, tuple(cells if one.stable else [*cells[:1], "unstable", *["–"] * 4])))
    head = ("Stance", "Disk, own", "one", "Phase, own", "one", "Delay, own", "one")
    return Table("One gain set for all stances beside one per stance", head, tuple(rows), one_law_words(found))


def one_law_words(found: OneLaw) -> str:
    """Say which is better, and by how much."""
    own = min(m.disk for m in found.own)
    said = f"The one set is that of {found.source}; how several units share the command follows each line. "
    if not all(m.stable for m in found.shared):
        return said + "It does not hold every stance: keep one set per stance."
    gained = min(m.disk for m in found.shared) / own - 1.0
    if abs(gained) < 0.01:
        return said + "The smallest disk margin is the same within 1 %: one set is enough, with nothing to switch."
    better = "larger" if gained > 0.0 else "smaller"
    return said + f"With it the smallest disk margin over the stances is {share(abs(gained))} {better}."


def retuned_words(changed: Retuning) -> str:
    """Say what retuning did to the weights and to the worst case."""
    before = "unstable" if math.isnan(changed.before) else figure(changed.before)
    if changed.part == 0.0:
        return (f"Retuned for the worst case: of {changed.tried} weights tried none is better than those given and passes "
                f"the trials they pass (worst disk margin {before}).")
    scales = ", ".join(f"{name.replace('_', ' ')} × {figure(value)}" for name, value in changed.scales.items())
    part = f" That is {share(changed.part)} of the way (in octaves) to the best: the trials bear no more."
    held = "" if changed.part == 1.0 else part
    return (f"Retuned for the worst case, {changed.tried} weights tried: what is accepted became {scales}; the worst disk "
            f"margin went from {before} to {figure(changed.after)}.{held}")
