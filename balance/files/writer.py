"""A record into the text of a file: the same description that reads it, walked the other way. SI with units."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Mapping, Sequence
from typing import Any

from balance.base.units import unit_of
from balance.files.fields import Shape, key_of, shape_of


def written(record: Any, head: str = "") -> str:
    """Return a record as YAML that `files.reader` reads back to an equal record; what is left at its default is left out.

    `head`: lines of comment above, each behind `# `.
    """
    comment = "".join(f"# {line}".rstrip() + "\n" for line in head.splitlines())
    return comment + "\n".join(_lines(record, 0)) + "\n"


def _lines(record: Any, depth: int, skip: Sequence[str] = ()) -> list[str]:
    """Return the lines of a record's keys."""
    lines: list[str] = []
    for member in dataclasses.fields(record):
        value = getattr(record, member.name)
        if member.metadata.get("shape") is None or value is None or value == member.default or member.name in skip:
            continue
        shape, pad = shape_of(member), "  " * depth
        if shape.kind == "table":
            lines.append(f"{pad}{key_of(member)}:")
            for name, entry in value.items():
                inner = shape.items or Shape("section", record=shape.record)
                lines.append(f"{pad}  {name}: {_flow(entry, inner)}")
        else:
            lines.append(f"{pad}{key_of(member)}: {_flow(value, shape)}")
    return lines


def _flow(value: Any, shape: Shape) -> str:  # noqa: PLR0911 - one return per kind
    """Return a value on one line."""
    if shape.kind == "quantity":
        return f"{_number(value)} {unit_of(shape.dimension)}"
    if shape.kind in ("number", "whole"):
        return _number(value)
    if shape.kind == "flag":
        return "true" if value else "false"
    if shape.kind == "list":
        each = shape.each or tuple(shape.items or Shape("text") for _ in value)
        return "[" + ", ".join(_flow(v, s) for v, s in zip(value, each, strict=True)) + "]"
    if isinstance(value, Mapping):
        inner = shape.items or Shape("section", record=shape.record)
        return "{" + ", ".join(f"{name}: {_flow(entry, inner)}" for name, entry in value.items()) + "}"
    if dataclasses.is_dataclass(value):
        return _section(value, shape)
    return _quoted(str(value))


def _section(value: Any, shape: Shape) -> str:
    """Return a record as one flow mapping; a variant names its kind first, or is its only key."""
    parts = []
    if shape.kind == "variant" and shape.by:
        word = next(word for word, record in shape.variants if record is type(value))
        parts.append(f"{shape.by}: {word}")
    for member in dataclasses.fields(value):
        own = getattr(value, member.name)
        needed = shape.kind == "variant" and not shape.by
        if member.metadata.get("shape") is not None and own is not None and (needed or own != member.default):
            parts.append(f"{key_of(member)}: {_flow(own, shape_of(member))}")
    return "{" + ", ".join(parts) + "}"


def _number(value: float) -> str:
    """Return a number that reads back to the same float; infinity cannot be written."""
    if not math.isfinite(value):
        raise ValueError("only finite numbers can be written")
    return repr(value) if isinstance(value, int) else repr(float(value))


def _quoted(text: str) -> str:
    """Return text as it is where YAML cannot misread it, else in quotes."""
    bare = text.replace("-", "").replace("_", "").replace(" ", "")
    plain = bare.isalnum() and not text[:1].isdigit() and text == text.strip()
    return text if plain else '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'
