"""Plain tables: a caption, a head and rows of words. Nothing here knows HTML."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Row:
    """One line of a table. `mark`: "" | "met" | "unmet", what the line says about a requirement."""

    label: str
    cells: tuple[str, ...]
    mark: str = ""


@dataclass(frozen=True)
class Table:
    """A table whose first column holds the labels; `head` names every column, the first included.

    `wordy`: the last column holds sentences and needs room; `note` is said under the table.
    """

    caption: str
    head: tuple[str, ...]
    rows: tuple[Row, ...]
    note: str = ""
    wordy: bool = False
