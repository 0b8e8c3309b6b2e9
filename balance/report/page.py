"""Lay the facts and figures out as one page of HTML. All words of a user are escaped; nothing is fetched."""

from __future__ import annotations

import base64
from html import escape

from balance.report.seal import sealed
from balance.report.sheet import OPEN_IN_PRINT, STYLE
from balance.report.tables import Row, Table

CARDS = 5
"""Columns a phone can still show side by side."""


def page(title: str, parts: list[str], contents: list[tuple[str, str]]) -> str:
    """Return the whole page; `contents` are (anchor, words). Half characters, which no file can hold, become `?`."""
    listed = "".join(f'<li><a href="#{escape(a)}">{escape(w)}</a></li>' for a, w in contents)
    body = (f'<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
            f'<meta name="viewport" content="width=device-width, initial-scale=1"><title>{escape(title)}</title>'
            f"<style>{STYLE}</style></head><body><h1>{escape(title)}</h1>{parts[0]}"
            f'<nav aria-label="contents"><ul>{listed}</ul></nav>{"".join(parts[1:])}'
            f"<script>{OPEN_IN_PRINT}</script>\n")
    return sealed(body.encode("utf-8", "replace").decode("utf-8"))


def heading(words: str, anchor: str, kind: str = "") -> str:
    """Return a section's heading; `kind` is its class where the page treats it apart."""
    return f'<h2 id="{escape(anchor)}" class="{escape(kind)}">{escape(words)}</h2>'


def sub_heading(words: str) -> str:
    """Return a heading inside a section."""
    return f"<h3>{escape(words)}</h3>"


def paragraph(words: str, kind: str = "") -> str:
    """Return a paragraph, with a class where it has a kind."""
    return f'<p class="{escape(kind)}">{escape(words)}</p>' if kind else f"<p>{escape(words)}</p>"


def bullets(sentences: tuple[str, ...]) -> str:
    """Return a list of sentences."""
    return "<ul>" + "".join(f"<li>{escape(s)}</li>" for s in sentences) + "</ul>"


def definitions(pairs: tuple[tuple[str, str], ...]) -> str:
    """Return a list of (word, what it means); the same word is said once."""
    said, before = [], ""
    for word, meaning in pairs:
        said.append(("" if word == before else f"<dt>{escape(word)}</dt>") + f"<dd>{escape(meaning)}</dd>")
        before = word
    return "<dl>" + "".join(said) + "</dl>"


def table(data: Table) -> str:
    """Return a table; on a narrow screen one of many columns becomes a card per row.

    The last column of a wordy one may wrap.
    """
    head = "".join(f'<th scope="col">{escape(word)}</th>' for word in data.head)
    body = "".join(_row(row, data) for row in data.rows)
    note = f'<p class="note">{escape(data.note)}</p>' if data.note else ""
    kind = ' class="cards"' if len(data.head) > CARDS else ""
    return (f'<div class="wide"><table{kind}><caption>{escape(data.caption)}</caption><thead><tr>{head}</tr></thead>'
            f"<tbody>{body}</tbody></table></div>{note}")


def _row(row: Row, data: Table) -> str:
    cells = ""
    for i, cell in enumerate(row.cells):
        kinds = [word for word, holds in (("words", data.wordy and i == len(row.cells) - 1), ("none", cell == "–")) if holds]
        kind = f' class="{" ".join(kinds)}"' if kinds else ""
        cells += f'<td{kind} data-head="{escape(data.head[i + 1])}">{escape(cell)}</td>'
    mark = f' class="{escape(row.mark)}"' if row.mark else ""
    return f'<tr{mark}><th scope="row">{escape(row.label)}</th>{cells}</tr>'


def picture(svg: bytes, words: str, said: str = "") -> str:
    """Return a figure; `words` for who cannot see it, `said` above it (the drawing has a title of its own)."""
    data = base64.b64encode(svg).decode("ascii")
    return (f'<figure><figcaption>{escape(said or words)}</figcaption>'
            f'<img alt="{escape(words, quote=True)}" src="data:image/svg+xml;base64,{data}"></figure>')


def figures(drawn: list[str]) -> str:
    """Return figures side by side as far as the page is wide."""
    return f'<div class="figures">{"".join(drawn)}</div>'


def folded(words: str, inside: str, opened: bool) -> str:
    """Return a part that can be folded away; it opens in print."""
    return f"<details{' open' if opened else ''}><summary>{escape(words)}</summary>{inside}</details>"
