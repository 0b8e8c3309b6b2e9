"""The JSON Schema of a record, so that an editor completes and checks a file while it is typed.

Made from the same field descriptions the reader walks.  It is the coarser of the two: a schema can ask for a
number with a unit, but cannot tell a millimetre from a gram; what it refuses the reader refuses too.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Callable
from dataclasses import MISSING
from typing import Any

from balance.base.dimensions import DIMENSIONS
from balance.files.fields import Shape, key_of, shape_of
from balance.files.wording import bounds, expected

Schema = dict[str, Any]

DIALECT = "https://json-schema.org/draft/2020-12/schema"
NAME_PATTERN = "^[A-Za-z][A-Za-z0-9_-]{0,59}$"
_DIGITS = r"(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_UNIT = r"\s*[A-Za-z\u00b5\u00b0\u03a9(1].*$"


def json_schema(record_type: type) -> Schema:
    """Return the JSON Schema (draft 2020-12) of a whole file read into `record_type`."""
    title = record_type.__name__.lower()
    return {"$schema": DIALECT, "title": f"balance {title} file", **_section(record_type)}


def _section(record: type, word: str = "", by: str = "") -> Schema:
    """A mapping; `by: word` is the key that told a variant apart."""
    members = [m for m in dataclasses.fields(record) if m.metadata.get("shape") is not None]
    properties: Schema = {by: {"const": word}} if by else {}
    properties |= {key_of(m): _schema(shape_of(m)) for m in members}
    return {
        "type": "object",
        "properties": properties,
        "required": ([by] if by else []) + [key_of(m) for m in members if _required(m)],
        "additionalProperties": False,
    }


def _required(member: dataclasses.Field[Any]) -> bool:
    return member.default is MISSING and member.default_factory is MISSING


def _schema(shape: Shape) -> Schema:
    limits = bounds(shape)
    return {"description": expected(shape) + (f", {limits}" if limits else ""), **_MAKERS[shape.kind](shape)}


def _quantity(shape: Shape) -> Schema:
    bound = shape.above if shape.above is not None else shape.least
    sign = r"^\s*\+?" if bound is not None and bound >= 0.0 else r"^\s*[+-]?"
    example = DIMENSIONS[shape.dimension].example
    return {"type": "string", "pattern": sign + _DIGITS + _UNIT, "examples": [example]}


def _number(shape: Shape) -> Schema:
    names = {"above": "exclusiveMinimum", "least": "minimum", "below": "exclusiveMaximum", "most": "maximum"}
    limits = {word: getattr(shape, name) for name, word in names.items() if getattr(shape, name) is not None}
    return {"type": "integer" if shape.kind == "whole" else "number", **limits}


def _list(shape: Shape) -> Schema:
    if shape.each:
        return {"type": "array", "prefixItems": [_schema(each) for each in shape.each],
                "minItems": len(shape.each), "maxItems": len(shape.each)}
    assert shape.items is not None
    size = {"minItems": shape.length, "maxItems": shape.length} if shape.length else {"minItems": 1}
    return {"type": "array", "items": _schema(shape.items), **size}


def _table(shape: Shape) -> Schema:
    entry = shape.items or Shape("section", record=shape.record)
    return {"type": "object", "propertyNames": {"pattern": NAME_PATTERN}, "minProperties": 1,
            "additionalProperties": _schema(entry)}


def _variant(shape: Shape) -> Schema:
    words = shape.by
    return {"oneOf": [_section(record, word if words else "", words) for word, record in shape.variants]}


def _nested(shape: Shape) -> Schema:
    assert shape.record is not None
    return _section(shape.record)


_MAKERS: dict[str, Callable[[Shape], Schema]] = {
    "quantity": _quantity, "number": _number, "whole": _number, "list": _list, "table": _table,
    "variant": _variant, "section": _nested,
    "text": lambda shape: {"type": ["string", "number"], "minLength": 1},
    "flag": lambda shape: {"type": "boolean"},
    "choice": lambda shape: {"enum": list(shape.choices)},
}
