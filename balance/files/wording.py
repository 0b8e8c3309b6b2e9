"""What an error says about a value: what was given, and what is allowed at its place."""

from __future__ import annotations

from collections.abc import Callable

from balance.base.dimensions import DIMENSIONS
from balance.base.units import factor_of, unit_of
from balance.base.words import listed
from balance.files.fields import Shape
from balance.files.node import Node


def describe(node: Node) -> str:
    """Return a short description of a value of the file."""
    if node.kind == "mapping":
        return f"a mapping ({listed(node.names())})" if node.pairs else "an empty mapping"
    if node.kind == "list":
        return f"a list of {len(node.items)}"
    shown = node.text if len(node.text) <= 60 else node.text[:59] + "…"
    return f'`"{shown}"`' if node.quoted else f"`{shown}`"


def expected(shape: Shape) -> str:
    """Return what is allowed at a place, with an example where a unit is wanted."""
    words = _EXPECTED[shape.kind](shape)
    return f"{words} ({shape.says})" if shape.says else words


def bounds(shape: Shape) -> str:
    """Return the bounds of a quantity or number in words: "more than 0", "below 90 deg"."""
    low = ((shape.above, "more than"), (shape.least, "at least"))
    parts = (*low, (shape.below, "less than"), (shape.most, "at most"))
    return " and ".join(f"{word} {_amount(value, shape)}" for value, word in parts if value is not None)


def _amount(value: float, shape: Shape) -> str:
    if shape.kind != "quantity" or value == 0.0:
        return f"{value:g}"
    if shape.dimension == "angle":
        return f"{value / factor_of('deg'):.6g} deg"
    return f"{value:g} {unit_of(shape.dimension)}"


def _quantity(shape: Shape) -> str:
    dimension = DIMENSIONS[shape.dimension]
    return f"{dimension.article} with its unit, such as `{dimension.example}`"


def _number(shape: Shape) -> str:
    words = "a whole number" if shape.kind == "whole" else "a number"
    if shape.least is not None and shape.least == shape.most:
        return f"the number {shape.least:g}"
    return words


def _list(shape: Shape) -> str:
    count = f"{shape.length} " if shape.length else ""
    if shape.key == "direction":
        return "a direction, three numbers as [1, 0, 0]"
    inner = shape.items or shape.each[0]
    if inner.kind == "quantity" and not shape.each:
        example = DIMENSIONS[inner.dimension].example
        return f"a list of {count}quantities, each as `{example}`"
    if shape.each:
        return "a list of [" + ", ".join(expected(each) for each in shape.each) + "]"
    return f"a list of {count}values, each {expected(inner)}"


def _table(shape: Shape) -> str:
    return "a mapping of names of your choice, at least one"


def _variant(shape: Shape) -> str:
    words = listed(word for word, _ in shape.variants)
    return f"a mapping with `{shape.by}:` one of {words}" if shape.by else f"a mapping with one of {words}"


_EXPECTED: dict[str, Callable[[Shape], str]] = {
    "quantity": _quantity, "number": _number, "whole": _number, "list": _list, "table": _table,
    "variant": _variant,
    "text": lambda shape: "a short text in one line",
    "flag": lambda shape: "`true` or `false`",
    "choice": lambda shape: f"one of {listed(shape.choices)}",
    "section": lambda shape: "a mapping",
}
