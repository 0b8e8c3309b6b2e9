"""The verdicts in words: what was asked, what came out, how much is left."""

from __future__ import annotations

import math
from dataclasses import replace

from balance.check.records import CheckResult, Verdict
from balance.report.amounts import in_unit, listed, scale_for, share
from balance.report.tables import Row, Table

HEAD = ("Requirement", "Stance", "Value", "Limit", "Margin", "Result", "Why")


def spoken(name: str) -> str:
    """Turn a name of a file (`phase_margin`, `late-liftoff`) into words."""
    return name.replace("_", " ")


def left_over(verdict: Verdict) -> str:
    """Say how far the value stands from its limit, and on which side."""
    value, limit = verdict.value, verdict.limit
    if isinstance(value, str) or isinstance(limit, str) or not math.isfinite(limit):
        return "–"
    if not math.isfinite(value):
        return "–" if math.isnan(value) or not verdict.passed else "unlimited"
    room = limit - value if verdict.sense == "at most" else value - limit
    words = in_unit(abs(room), scale_for(limit, verdict.unit))
    part = f" ({share(abs(room / limit))})" if limit else ""
    return f"{words}{part} {'to spare' if room >= 0.0 else 'short'}"


def value_words(value: float | str, limit: float | str, unit: str) -> str:
    """Write a verdict's value in the same unit as its limit."""
    if isinstance(value, str):
        return value
    ruler = limit if isinstance(limit, float | int) and math.isfinite(limit) else value
    return in_unit(float(value), scale_for(float(ruler), unit))


def judged_value(verdict: Verdict) -> str:
    """Write a verdict's value; a time without end is one that never comes."""
    if verdict.unit == "s" and verdict.value == math.inf and verdict.sense == "at most":
        return "never"
    return value_words(verdict.value, verdict.limit, verdict.unit)


def limit_words(verdict: Verdict) -> str:
    """Write the limit with its sense: `≥ 35°`."""
    written = value_words(verdict.limit, verdict.limit, verdict.unit)
    return {"at most": "≤ ", "at least": "≥ "}.get(verdict.sense, "") + written


def verdict_row(verdict: Verdict) -> Row:
    """One line of the verdict table."""
    cells = (verdict.stance, judged_value(verdict), limit_words(verdict), left_over(verdict),
             "met" if verdict.passed else "NOT met", verdict.reason or "–")
    return Row(spoken(verdict.name), cells, "met" if verdict.passed else "unmet")


def verdict_table(verdicts: tuple[Verdict, ...]) -> Table:
    """All verdicts, the unmet ones first, otherwise in the order they were judged."""
    ordered = sorted(verdicts, key=lambda v: v.passed)
    return Table("Every requirement against its limit", HEAD, tuple(verdict_row(v) for v in ordered), wordy=True)


def verdict_tables(verdicts: tuple[Verdict, ...]) -> tuple[Table | None, tuple[tuple[str, Table], ...]]:
    """Return what is not met in one table (None: all is met), and all of it stance by stance, each with a title.

    The table of the unmet is there only where several stances make the whole long.
    """
    stances = tuple(dict.fromkeys(v.stance for v in verdicts))
    unmet = tuple(v for v in verdicts if not v.passed)
    parts = []
    for stance in stances:
        mine = tuple(v for v in verdicts if v.stance == stance)
        missed = sum(not v.passed for v in mine)
        title = f"{stance}: all {len(mine)} met" if not missed else f"{stance}: {missed} of {len(mine)} not met"
        parts.append((title, verdict_table(mine)))
    first = replace(verdict_table(unmet), caption="Not met") if unmet and len(stances) > 1 else None
    return first, tuple(parts)


def headline(result: CheckResult) -> str:
    """The answer in one sentence."""
    unmet = [v for v in result.verdicts if not v.passed]
    count = len(result.verdicts)
    if not count:
        return "Nothing was judged: the design file asks for nothing."
    if not unmet:
        return f"Passed: all {count} requirements are met." if count > 1 else "Passed: the one requirement is met."
    several = len({v.stance for v in result.verdicts}) > 1
    names = tuple(dict.fromkeys(spoken(v.name) + (f" ({v.stance})" if several else "") for v in unmet))
    told = listed(names[:3]) if len(names) <= 3 else f"{', '.join(names[:3])} and {len(names) - 3} more"
    if count == 1:
        return f"Not passed: the one requirement is not met: {told}."
    be = "is" if len(unmet) == 1 else "are"
    return f"Not passed: {len(unmet)} of {count} requirements {be} not met: {told}."


def tally(result: CheckResult) -> Table:
    """How many requirements each stance meets, for designs with several stances."""
    stances = tuple(dict.fromkeys(v.stance for v in result.verdicts))
    rows = []
    for stance in stances:
        mine = [v for v in result.verdicts if v.stance == stance]
        met = sum(v.passed for v in mine)
        rows.append(Row(stance, (str(met), str(len(mine) - met), str(len(mine))),
                        "met" if met == len(mine) else "unmet"))
    return Table("Requirements by stance", ("Stance", "Met", "Not met", "Judged"), tuple(rows))
