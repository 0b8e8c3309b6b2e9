"""Columns of numbers from a .csv file: the head names each column with its unit, as `time [s], torque [N*m]`."""

from __future__ import annotations

import csv
import math
import re
from dataclasses import dataclass
from pathlib import Path

from balance.base.errors import InputError, Problem
from balance.base.units import UnitError, to_si
from balance.base.words import did_you_mean, listed

LARGEST = 2_000_000
"""Bytes a sheet may have."""
MOST_ROWS = 20_000
_HEAD = re.compile(r"\s*([A-Za-z_]+)\s*\[\s*([^\]]+?)\s*\]\s*")


@dataclass(frozen=True)
class Sheet:
    """The columns by name, SI, all of one length; `lines` is where each row stands in the file."""

    path: str
    columns: dict[str, tuple[float, ...]]
    lines: tuple[int, ...]


def read_sheet(path: str, known: dict[str, str]) -> Sheet:
    """Return the columns of a .csv file. `known`: name of a column -> its dimension.

    Lines that are empty or begin with `#` are passed over.

    Raises
    ------
    InputError
        One problem per bad cell, with its line and the number of its column.
    """
    rows = _rows(path)
    if not rows:
        raise InputError([Problem(path, 1, 1, "(file)", "nothing", "a head and rows of numbers")])
    problems: list[Problem] = []
    head = _head(path, *rows[0], known, problems)
    numbers = [_row(path, line, cells, head, problems) for line, cells in rows[1:]]
    if len(numbers) > MOST_ROWS:
        problems = [Problem(path, rows[MOST_ROWS + 1][0], 1, "(file)", f"{len(numbers)} rows", f"at most {MOST_ROWS}")]
    if problems:
        raise InputError(problems)
    columns = {name: tuple(row[k] for row in numbers) for k, (name, _) in enumerate(head)}
    return Sheet(path, columns, tuple(line for line, _ in rows[1:]))


def _rows(path: str) -> list[tuple[int, list[str]]]:
    """Return (line, cells) of every line that says something."""
    try:
        with Path(path).open("rb") as file:
            raw = file.read(LARGEST + 1)
        if len(raw) > LARGEST:
            raise InputError([Problem(path, 0, 0, "(file)", "a larger file", f"at most {LARGEST} bytes")])
        lines = raw.decode("utf-8-sig").splitlines()
    except OSError as error:
        reason = error.strerror or "unreadable"
        raise InputError([Problem(path, 0, 0, "(file)", reason, "a .csv file that can be read")]) from None
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        raise InputError([Problem(path, line, 1, "(file)", "bytes that are no UTF-8", "text in UTF-8")]) from None
    said = [(number, line) for number, line in enumerate(lines, 1) if line.strip() and not line.lstrip().startswith("#")]
    return [(number, next(csv.reader([line]))) for number, line in said]


def _head(path: str, line: int, cells: list[str], known: dict[str, str],
          problems: list[Problem]) -> list[tuple[str, float]]:
    """Return (name, factor to SI) per column."""
    allowed = listed([f"`{name} [unit]`" for name in known])
    head: list[tuple[str, float]] = []
    for column, cell in enumerate(cells, 1):
        match = _HEAD.fullmatch(cell)
        name, unit = match.groups() if match else (cell.strip(), "")
        if not match or name not in known or name in (word for word, _ in head):
            hint = did_you_mean(name, known) if name not in known else "once" if match else "write the unit in brackets"
            problems.append(Problem(path, line, column, "(head)", f"`{cell.strip()}`", allowed, hint))
            head.append((f"column {column}", math.nan))
            continue
        try:
            head.append((name, to_si(f"1 {unit}", known[name])))
        except UnitError as error:
            problems.append(Problem(path, line, column, name, f"the unit `{unit}`", error.allowed, error.hint))
            head.append((name, math.nan))
    return head


def _row(path: str, line: int, cells: list[str], head: list[tuple[str, float]], problems: list[Problem]) -> list[float]:
    """Return the numbers of one row in SI, 0 where a cell is bad."""
    if len(cells) != len(head):
        problems.append(Problem(path, line, min(len(cells), len(head)) + 1, "(row)", f"{len(cells)} cells",
                                f"{len(head)} cells, as the head"))
        return [0.0] * len(head)
    values = []
    for column, (cell, (name, factor)) in enumerate(zip(cells, head, strict=True), 1):
        try:
            value = float(cell)
        except ValueError:
            value = math.nan
        if not math.isfinite(value) or "_" in cell:
            problems.append(Problem(path, line, column, name, f"`{cell.strip()}`" if cell.strip() else "an empty cell",
                                    "a number, its unit stands in the head"))
            value = 0.0
        values.append(value * factor)
    return values
