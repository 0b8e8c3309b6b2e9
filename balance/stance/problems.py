"""What the stance room says of a machine that cannot stand as its file asks."""

from __future__ import annotations

from balance.base.errors import Problem
from balance.machine.machine import Machine


def problem(machine: Machine, key: str, given: str, allowed: str, hint: str = "") -> Problem:
    """Return a `Problem` at the line of `key`, or of the nearest enclosing key the file has."""
    line, column = _mark(machine, key)
    return Problem(machine.source or machine.machine, line, column, key, given, allowed, hint)


def _mark(machine: Machine, key: str) -> tuple[int, int]:
    while key:
        if key in machine.marks:
            return machine.marks[key]
        key = key.rpartition(".")[0]
    return 0, 0


def millimetres(length: float) -> str:
    """Return a length as a person writes it in a machine file."""
    return f"{1e3 * length:.4g} mm"


def degrees(angle: float) -> str:
    """Return an angle as a person writes it in a machine file."""
    return f"{angle * 57.29577951308232:.4g} deg"
