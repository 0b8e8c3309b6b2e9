"""The words a record uses to describe its own place in a file.

A machine or design file has no schema beside its records: each frozen dataclass *is* the schema.  A field's
metadata says what stands in the file (a quantity with a unit, a number, a choice, a section, a named table of
sections); the reader (`files.reader`) and the published JSON Schema (`files.schema`) both walk the same
metadata.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import MISSING, Field, dataclass, field
from typing import Any

REQUIRED: Any = MISSING
"""Default of a field that must be given."""


@dataclass(frozen=True)
class Shape:
    """What may stand at one place of a file.

    `kind`: "quantity" | "number" | "whole" | "text" | "flag" | "choice" | "list" | "section" | "table" |
    "variant".  The other members matter only to some kinds:

    - `dimension`: name in the project's table of dimensions (quantity)
    - `above`/`least`/`below`/`most`: open and closed bounds in SI (quantity, number)
    - `choices`: the allowed words (choice)
    - `items`, `length`: shape and count of a list's members; `each`: their shapes one by one, where they
    differ
    - `record`: the dataclass of a section, or of each entry of a table
    - `variants`: word -> dataclass, told apart by the key `by` (variant)
      or, with `by=""`, by which of the words is present as the single key
    """

    kind: str
    dimension: str = ""
    above: float | None = None
    least: float | None = None
    below: float | None = None
    most: float | None = None
    choices: tuple[str, ...] = ()
    items: Shape | None = None
    length: int | None = None
    each: tuple[Shape, ...] = ()
    record: type | None = None
    variants: tuple[tuple[str, type], ...] = ()
    by: str = "kind"
    key: str = ""
    says: str = ""
    written: str = ""
    """The key as written in the file, where Python cannot use the word (`for`, `from`)."""


def place(shape: Shape, default: Any = REQUIRED) -> Any:
    """Return a dataclass field that carries `shape`."""
    if default is REQUIRED:
        return field(metadata={"shape": shape})
    return field(default=default, metadata={"shape": shape})


def shape_of(member: Field[Any]) -> Shape:
    """Return the shape of a dataclass field written with `place`."""
    found = member.metadata["shape"]
    assert isinstance(found, Shape)
    return found


def key_of(member: Field[Any]) -> str:
    """Return the key a field has in the file."""
    return shape_of(member).written or member.name


def quantity(dimension: str, *, default: Any = REQUIRED, says: str = "", above: float | None = None,
             least: float | None = None, below: float | None = None, most: float | None = None,
             written: str = "") -> Any:
    """A value with its unit, kept in SI."""
    return place(Shape("quantity", dimension, above, least, below, most, says=says, written=written), default)


def number(*, default: Any = REQUIRED, says: str = "", above: float | None = None, least: float | None = None,
           below: float | None = None, most: float | None = None) -> Any:
    """A bare number without unit."""
    return place(Shape("number", "", above, least, below, most, says=says), default)


def text(*, default: Any = REQUIRED, says: str = "") -> Any:
    """A short name."""
    return place(Shape("text", says=says), default)


def flag(*, default: Any = REQUIRED, says: str = "") -> Any:
    """`true` or `false`."""
    return place(Shape("flag", says=says), default)


def choice(choices: Sequence[str], *, default: Any = REQUIRED, says: str = "") -> Any:
    """One of a few words."""
    return place(Shape("choice", choices=tuple(choices), says=says), default)


def vector(dimension: str, *, default: Any = REQUIRED, says: str = "") -> Any:
    """Three quantities, [x, y, z] or [roll, pitch, yaw]; a tuple of three floats in SI."""
    return place(Shape("list", items=Shape("quantity", dimension), length=3, says=says), default)


def direction(*, default: Any = REQUIRED, says: str = "") -> Any:
    """Three bare numbers, any length but zero; a unit tuple of three floats."""
    return place(Shape("list", items=Shape("number"), length=3, key="direction", says=says), default)


def section(record: type, *, default: Any = REQUIRED, says: str = "") -> Any:
    """A mapping read into `record`."""
    return place(Shape("section", record=record, says=says), default)


def table(record: type, *, default: Any = REQUIRED, says: str = "") -> Any:
    """A mapping of user-chosen names to `record`; read into a dict that keeps the file's order."""
    return place(Shape("table", record=record, says=says), default)


def variant(variants: dict[str, type], *, by: str = "kind", default: Any = REQUIRED, says: str = "") -> Any:
    """One of several records, told apart by the key `by` (or by which key is present when `by` is empty)."""
    return place(Shape("variant", variants=tuple(variants.items()), by=by, says=says), default)
