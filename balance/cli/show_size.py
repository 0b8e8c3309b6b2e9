"""What `balance size` prints: what is needed, what does it, what limits it, what a little more would change, cautions."""

from __future__ import annotations

from balance.base.tables import text_table
from balance.cli.words import folded
from balance.report.sizing import (
    BEST,
    LEDGER,
    NEEDS,
    best_rows,
    ledger_rows,
    ledger_words,
    need_rows,
    nothing_lines,
    overpowered,
    power_rows,
    push_rows,
    rotor_lines,
)
from balance.size.answer import SizeAnswer
from balance.size.cautions import cautions


def show_size(found: SizeAnswer, page: str = "") -> str:
    """Return the text of the answer; `page`: where its report was written."""
    goal = found.question.goal
    head = f"{found.question.machine.machine}: the smallest stabiliser for {goal.design}"
    count = sum(len(s.grid) for s in found.surveys)
    searched = "; ".join(f"{s.grid.family} {len(s.enough)} of {len(s.grid)}" for s in found.surveys)
    parts = [folded(head), _needs(found), folded(f"{count} candidates; able by the closed forms: {searched}")]
    if found.passed:
        parts += [text_table(BEST, best_rows(found), "llrrrl"), *_details(found), *_fronts(found),
                  "\n".join(folded(s.words()) for s in found.sensitivities)]
    else:
        parts.append("\n".join(folded(line) for line in nothing_lines(found)))
    parts.append("\n".join(folded(f"Caution: {line}") for line in cautions(found)))
    return "\n\n".join([*parts, *([f"report: {page}"] if page else [])])


def _needs(found: SizeAnswer) -> str:
    table = text_table(NEEDS, need_rows(found), "lrrrrr")
    hardest = max(found.needs, key=lambda n: n.momentum)
    words = ("torque", "momentum", "power", "bandwidth")
    return table + "\n" + "\n".join(folded(f"{w}: {r}") for w, r in zip(words, hardest.reasons, strict=True))


def _details(found: SizeAnswer) -> list[str]:
    """Return a paragraph for each of the best, with its ledger."""
    parts = []
    for c, r in zip(found.best, found.rotors, strict=True):
        first, *others = rotor_lines(c, r, found)
        lines = [folded(f"{c.candidate.family}: {first}"), *(folded(line) for line in others)]
        if c.ledger is not None:
            lines += [text_table(LEDGER, ledger_rows(c.ledger), "lrrr"), folded(ledger_words(c.ledger))]
        parts.append("\n".join(lines))
    return parts


def _fronts(found: SizeAnswer) -> list[str]:
    push = text_table(["adds", "worst-case push", "family", "front of mass and push"], push_rows(found), "rrll")
    power = text_table(["adds", "peak power", "family", "front of mass and power"], power_rows(found), "rrll")
    told = overpowered(found)
    return [push + ("\n" + folded(told) if told else ""), power]
