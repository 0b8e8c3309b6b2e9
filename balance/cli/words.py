"""Tables of several stances side by side, and the few phrases that more than one command says."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Callable, Sequence
from typing import TypeVar

from balance.base.tables import text_table
from balance.check.records import Verdict
from balance.cli.colour import NOT_MET
from balance.report.subjects import grouped
from balance.report.verdicts import limit_words, spoken, value_words

Thing = TypeVar("Thing")

AT_ONCE = 20
"""Requirements that a screen shows one by one; beyond that they are grouped (`--json` and the report have every one)."""

BESIDE = 3
"""Stances that fit beside each other on 80 columns."""


def side_by_side(
    title: str,
    things: Sequence[Thing],
    name: Callable[[Thing], str],
    rows: Sequence[tuple[str, Callable[[Thing], str]]],
) -> str:
    """Return a table with one column per thing and one row per question, three things at a time.

    Rows whose cells are all empty are left out.
    """
    blocks = []
    for first in range(0, len(things), BESIDE):
        shown = things[first : first + BESIDE]
        cells = [[label, *(ask(thing) for thing in shown)] for label, ask in rows]
        kept = [line for line in cells if any(line[1:])]
        blocks.append(text_table([title, *(name(thing) for thing in shown)], kept, "l" + "r" * len(shown)))
    return "\n\n".join(blocks)


def verdict_table(verdicts: Sequence[Verdict]) -> str:
    """Return every requirement with stance, value, limit and whether it is met.

    Where there are more than a screen shows: those not met, then how many are met by stance and subject.
    """
    if len(verdicts) <= AT_ONCE:
        return _each(verdicts)
    unmet = [v for v in verdicts if not v.passed]
    rows = [[g.stance, g.subject, f"{g.met}/{g.count}", g.tightest] for g in grouped(verdicts)]
    groups = text_table(["stance", "about", "met", "tightest of those met, share left"], rows, "llrl")
    return "\n\n".join([*([_each(unmet)] if unmet else []), groups])


def _each(verdicts: Sequence[Verdict]) -> str:
    rows = [[spoken(v.name), v.stance, _value(v), limit_words(v), "yes" if v.passed else NOT_MET] for v in verdicts]
    return text_table(["requirement", "stance", "value", "limit", "met?"], rows, "llrrl")


def _value(verdict: Verdict) -> str:
    """Write a value; a time without end is one that never comes."""
    if verdict.unit == "s" and verdict.value == math.inf and not verdict.passed:
        return "never"
    return value_words(verdict.value, verdict.limit, verdict.unit)


def failures(verdicts: Sequence[Verdict]) -> str:
    """Return one sentence for each requirement not met; empty when there is none."""
    lines = [
        f"{NOT_MET}: {spoken(v.name)} ({v.stance})" + (f": {v.reason}" if v.reason else "") for v in verdicts if not v.passed
    ]
    return "\n".join(folded(line) for line in lines)


def folded(line: str) -> str:
    """Break a sentence at 80 columns, the lines after the first indented."""
    return "\n".join(textwrap.wrap(line, 80, subsequent_indent="  "))


def closing(verdicts: Sequence[Verdict]) -> str:
    """Return the last line: how many requirements are met."""
    met = sum(v.passed for v in verdicts)
    if not verdicts:
        return "nothing was required, so nothing was judged"
    if met == len(verdicts):
        return f"all {met} requirements met" if met > 1 else "the one requirement is met"
    return f"{len(verdicts) - met} of {len(verdicts)} requirements {NOT_MET}"
