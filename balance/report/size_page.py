"""The page of `balance size`: what is needed, what does it, where simulation asks for more, cautions."""

from __future__ import annotations

from balance.report import page as html
from balance.report.figures.palette import as_bytes
from balance.report.figures.sizing import draw_sizing
from balance.report.seal import put
from balance.report.sizing import (
    BEST,
    LEDGER,
    NEEDS,
    Rows,
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
from balance.report.tables import Row, Table
from balance.size.answer import SizeAnswer
from balance.size.cautions import cautions

PAGE = "sizing.html"


def write_size_page(found: SizeAnswer, folder: str) -> str:
    """Write the page into `folder` (made if it is not there), whole or not at all; return its path.

    An earlier page is replaced, but not one that somebody has edited since.
    Raises OSError where the folder cannot be written.
    """
    return put(compose(found), folder, PAGE)


def compose(found: SizeAnswer) -> str:
    """Return the whole page as text."""
    goal, machine = found.question.goal, found.question.machine.machine
    sections = [("needed", "What is needed", _needed(found))]
    if found.passed:
        sections += [("fronts", "What does it", _fronts(found)), ("chosen", "The lightest of each family", _best(found)),
                     ("changes", "What a little more or less would change",
                      [html.bullets(tuple(s.words() for s in found.sensitivities))])]
    else:
        sections.append(("nothing", "What was missed, and what to relax", [html.bullets(tuple(nothing_lines(found)[1:]))]))
    sections.append(("cautions", "Cautions", [html.bullets(cautions(found))]))
    parts = [html.paragraph(_headline(found), f"answer {'met' if found.passed else 'unmet'}")]
    for anchor, words, inside in sections:
        parts += [html.heading(words, anchor), *inside]
    return html.page(f"{goal.design}: the smallest balance assist for {machine}", parts, [(a, w) for a, w, _ in sections])


def _headline(found: SizeAnswer) -> str:
    if not found.passed:
        return nothing_lines(found)[0]
    c = found.best[0]
    return (f"The lightest that passes: a {c.candidate.family}, {c.candidate.words()}, adds {1e3 * c.added:.0f} g; "
            f"{c.binding} binds.")


def _needed(found: SizeAnswer) -> list[str]:
    hardest = max(found.needs, key=lambda n: n.momentum)
    words = ("Torque", "Momentum", "Power", "Bandwidth")
    return [html.table(_table("Least of any stabiliser, safety factor left out", NEEDS, need_rows(found))),
            html.bullets(tuple(f"{w}: {r}." for w, r in zip(words, hardest.reasons, strict=True)))]


def _fronts(found: SizeAnswer) -> list[str]:
    count = sum(len(s.grid) for s in found.surveys)
    drawn = html.picture(as_bytes(draw_sizing(found), "svg"), "added mass against push and against power, by family",
                         f"{count} candidates; these were confirmed by simulation, those without a ring as they are, "
                         "safety factor left out")
    push = _table("Front of added mass and worst-case push", ["adds", "push", "family", "made of"], push_rows(found))
    power = _table("Front of added mass and power", ["adds", "peak power", "family", "made of"], power_rows(found))
    told = overpowered(found)
    note = [html.paragraph(told, "note")] if told else []
    return [f'<div class="broad">{drawn}</div>', html.table(push), *note, html.table(power)]


def _best(found: SizeAnswer) -> list[str]:
    parts = [html.table(_table("With its binding quantity over the safety factor it only just passes", BEST,
                               best_rows(found)))]
    for c, r in zip(found.best, found.rotors, strict=True):
        lines = tuple(f"{line[0].upper()}{line[1:]}." for line in rotor_lines(c, r, found))
        parts += [html.sub_heading(c.candidate.family), html.bullets(lines)]
        if c.ledger is not None:
            caption = "Least momentum by simulation against the closed forms, one effect after the other"
            parts += [html.table(_table(caption, LEDGER, ledger_rows(c.ledger))), html.paragraph(ledger_words(c.ledger))]
    return parts


def _table(caption: str, head: list[str], rows: Rows) -> Table:
    return Table(caption, tuple(head), tuple(Row(row[0], tuple(row[1:])) for row in rows), wordy=True)
