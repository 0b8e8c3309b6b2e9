"""A tree of nodes into a record, by the record's own description of its place in the file.

One walk collects every problem of the file; nothing is raised before the end.  Rules that tie several values
together (a mass or a density, never both) belong to the rooms that own the records and come in as `rules`:
one function per record type, called on each record that was read whole.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, TypeVar

from balance.base.errors import InputError, Problem
from balance.files.node import Tree
from balance.files.walk import BAD, Marks, Rules, Walk

Record = TypeVar("Record")


@dataclass(frozen=True)
class Reading:
    """What a file gave: the record (None: something stopped it), its problems, the place of every key."""

    record: Any
    problems: tuple[Problem, ...]
    marks: Marks


def read(tree: Tree, record_type: type[Record], rules: Rules | None = None) -> Record:
    """Return the record a tree describes.

    Raises
    ------
    InputError
        With all problems found.
    """
    reading = attempt(tree, record_type, rules or {})
    if reading.problems:
        raise InputError(list(reading.problems))
    assert isinstance(reading.record, record_type)
    return reading.record


def attempt(tree: Tree, record_type: type, rules: Rules) -> Reading:
    """Read as far as possible and say what is wrong, for a caller that has rules of its own to add."""
    walk = Walk(tree.path, rules, list(tree.problems))
    record = walk.section(tree.root, record_type, "")
    return Reading(None if record is BAD else record, tuple(walk.problems), walk.marks)
