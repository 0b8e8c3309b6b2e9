"""Plain-text tables for a terminal of 80 columns."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

WIDEST = 80
"""Characters a line of a table may have."""

_GAP = "  "
_NARROWEST = 6


def text_table(head: Sequence[str], rows: Sequence[Sequence[str]], align: str = "") -> str:
    """Return a table as text: a head, a rule, one row (or more lines, where cells wrap) per row.

    Parameters
    ----------
    head
        Titles of the columns.
    rows
        Cells; every row as long as the head.
    align
        One letter per column, ``l`` or ``r``; left where it is too short.

    Returns
    -------
    str
        Lines of at most 80 characters without trailing blanks, no newline at the end.  Where the cells are
        wider than that, the widest columns wrap at words.

    Raises
    ------
    ValueError
        When a row is not as long as the head.
    """
    if any(len(row) != len(head) for row in rows):
        raise ValueError(f"every row needs {len(head)} cells")
    widths = _widths([head, *rows])
    sides = align.ljust(len(head), "l")
    lines = [_line(cells, widths, sides) for cells in _wrapped(head, widths)]
    lines.append(_GAP.join("-" * width for width in widths))
    lines += [_line(cells, widths, sides) for row in rows for cells in _wrapped(row, widths)]
    return "\n".join(lines)


def _widths(rows: Sequence[Sequence[str]]) -> list[int]:
    """Widths of the columns: the widest cell, narrowed from the widest column down until the table fits."""
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    while sum(widths) + len(_GAP) * (len(widths) - 1) > WIDEST and max(widths) > _NARROWEST:
        widths[widths.index(max(widths))] -= 1
    return widths


def _wrapped(row: Sequence[str], widths: Sequence[int]) -> list[list[str]]:
    """Break a row's cells into as many lines as the longest needs."""
    cells = [textwrap.wrap(cell, max(width, 1)) or [""] for cell, width in zip(row, widths, strict=True)]
    height = max(map(len, cells))
    return [[cell[i] if i < len(cell) else "" for cell in cells] for i in range(height)]


def _line(cells: Sequence[str], widths: Sequence[int], sides: str) -> str:
    padded = (cell.rjust(width) if side == "r" else cell.ljust(width)
              for cell, width, side in zip(cells, widths, sides, strict=False))
    return _GAP.join(padded).rstrip()
