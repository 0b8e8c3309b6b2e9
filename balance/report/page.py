"""Lay the facts and figures out as one page of HTML. All words of a user are escaped; nothing is fetched."""

from __future__ import annotations

import base64
from html import escape

from balance.report.tables import Row, Table

STYLE = """
:root { color-scheme: light; }
* { box-sizing: border-box; }
body { margin: 0 auto; max-width: 68rem; padding: 1rem 1.2rem 4rem; color: #20262e; background: #fff;
  font: 16px/1.5 Georgia, "Noto Serif", serif; }
h1, h2, h3, nav, table, figcaption, summary { font-family: "Noto Sans", "DejaVu Sans", Verdana, sans-serif; }
h1 { font-size: 1.55rem; margin: .4rem 0; }
h2 { font-size: 1.2rem; margin: 2.2rem 0 .5rem; border-bottom: 2px solid #17456e; }
h3 { font-size: 1rem; margin: 1.4rem 0 .4rem; }
.answer { font-size: 1.1rem; padding: .6rem .9rem; border: 2px solid #20262e; border-left-width: .7rem; }
.answer.met { border-color: #17456e; } .answer.unmet { border-color: #c4571a; }
nav ul { columns: 2 14rem; padding-left: 1.1rem; font-size: .88rem; margin: .6rem 0; }
a { color: #17456e; }
.wide { overflow-x: auto; }
table { border-collapse: collapse; font-size: .8rem; margin: .5rem 0 .2rem; font-variant-numeric: tabular-nums; }
caption { text-align: left; font-weight: bold; padding: .2rem 0; }
th, td { text-align: left; vertical-align: top; padding: .22rem .7rem .22rem 0; border-bottom: 1px solid #c9ced4; }
td:not(.words), tbody th { white-space: nowrap; } td.words { min-width: 16rem; }
tr.unmet th, tr.unmet td { background: #fbeee6; } tr.unmet th::before { content: "✗ "; color: #c4571a; }
tr.met th::before { content: "✓ "; color: #17456e; }
.note { font-size: .86rem; color: #454f5b; margin: .2rem 0 1rem; max-width: 48rem; }
.figures { display: flex; flex-wrap: wrap; gap: .6rem 1rem; }
figure { margin: .4rem 0; flex: 1 1 21rem; max-width: 33rem; min-width: 0; } figure img { width: 100%; height: auto; }
figcaption { font-size: .82rem; font-weight: bold; }
dt { font-weight: bold; float: left; clear: left; margin-right: .5rem; } dd { margin: 0 0 .35rem; }
details > summary { cursor: pointer; padding: .3rem 0; font-weight: bold; }
@media print { body { font-size: 10pt; max-width: none; padding: 0; } nav { display: none; } h2 { break-after: avoid; }
  figure, tr, .answer { break-inside: avoid; } figure { flex: 0 0 48%; } .wide { overflow: visible; }
  table { font-size: 7.5pt; } td:not(.words) { white-space: normal; } td.words { min-width: 0; } }
"""

OPEN_IN_PRINT = ("addEventListener('beforeprint',function(){document.querySelectorAll('details').forEach("
                 "function(d){d.open=true})})")


def page(title: str, parts: list[str], contents: list[tuple[str, str]]) -> str:
    """Return the whole page; `contents` are (anchor, words)."""
    listed = "".join(f'<li><a href="#{escape(a)}">{escape(w)}</a></li>' for a, w in contents)
    return (f'<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
            f'<meta name="viewport" content="width=device-width, initial-scale=1"><title>{escape(title)}</title>'
            f"<style>{STYLE}</style></head><body><h1>{escape(title)}</h1>{parts[0]}"
            f'<nav aria-label="contents"><ul>{listed}</ul></nav>{"".join(parts[1:])}'
            f"<script>{OPEN_IN_PRINT}</script></body></html>\n")


def heading(words: str, anchor: str) -> str:
    """Return a section's heading."""
    return f'<h2 id="{escape(anchor)}">{escape(words)}</h2>'


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
    """Return a list of (word, what it means)."""
    return "<dl>" + "".join(f"<dt>{escape(a)}.</dt><dd>{escape(b)}</dd>" for a, b in pairs) + "</dl>"


def table(data: Table) -> str:
    """Return a table; the last column of a wordy one may wrap."""
    head = "".join(f'<th scope="col">{escape(word)}</th>' for word in data.head)
    body = "".join(_row(row, data.wordy) for row in data.rows)
    note = f'<p class="note">{escape(data.note)}</p>' if data.note else ""
    return (f'<div class="wide"><table><caption>{escape(data.caption)}</caption><thead><tr>{head}</tr></thead>'
            f"<tbody>{body}</tbody></table></div>{note}")


def _row(row: Row, wordy: bool) -> str:
    last = len(row.cells) - 1
    cells = "".join(f"<td{_words(wordy and i == last)}>{escape(cell)}</td>" for i, cell in enumerate(row.cells))
    mark = f' class="{escape(row.mark)}"' if row.mark else ""
    return f'<tr{mark}><th scope="row">{escape(row.label)}</th>{cells}</tr>'


def _words(long: bool) -> str:
    return ' class="words"' if long else ""


def picture(svg: bytes, words: str) -> str:
    """Return a figure with its caption; the drawing stands inside the page."""
    data = base64.b64encode(svg).decode("ascii")
    return (f'<figure><figcaption>{escape(words)}</figcaption>'
            f'<img alt="{escape(words, quote=True)}" src="data:image/svg+xml;base64,{data}"></figure>')


def figures(drawn: list[str]) -> str:
    """Return figures side by side as far as the page is wide."""
    return f'<div class="figures">{"".join(drawn)}</div>'


def folded(words: str, inside: str, opened: bool) -> str:
    """Return a part that can be folded away; it opens in print."""
    return f"<details{' open' if opened else ''}><summary>{escape(words)}</summary>{inside}</details>"
