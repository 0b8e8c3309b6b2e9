"""One walk through a tree of nodes, guided by a record's fields; every problem is noted, none stops it."""

from __future__ import annotations

import dataclasses
import math
import re
from collections.abc import Callable, Iterable, Mapping
from dataclasses import MISSING, dataclass
from typing import Any

from balance.base.errors import Problem
from balance.base.units import UnitError, to_si
from balance.base.words import did_you_mean, listed, nearest
from balance.files.fields import Shape, key_of, shape_of
from balance.files.node import Node
from balance.files.wording import bounds, describe, expected

Marks = dict[str, tuple[int, int]]

NAME = re.compile(r"[A-Za-z][A-Za-z0-9_-]{0,59}")
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")


@dataclass(frozen=True)
class Fault:
    """A broken rule, seen from the record it belongs to: `key` is relative to it, "" the record itself."""

    key: str
    given: str
    allowed: str
    hint: str = ""


Rule = Callable[[Any], Iterable[Fault]]
Rules = Mapping[type, Rule]


class _Bad:
    """Stands for a value that could not be read; the problem is already noted."""


BAD = _Bad()
_MISSING = "nothing (the key is missing)"
_LONGEST_TEXT = 300


class Walk:
    """One walk through a file; every method returns a value, or `BAD` after noting a problem."""

    def __init__(self, path: str, rules: Rules, problems: list[Problem]) -> None:
        self.path = path
        self.rules = rules
        self.problems = problems
        self.marks: Marks = {}
        self.kinds: dict[str, Callable[[Node, Shape, str], Any]] = {
            "quantity": self.quantity, "number": self.number, "whole": self.number, "text": self.text,
            "flag": self.flag, "choice": self.choice, "list": self.list, "table": self.table,
            "variant": self.variant,
            "section": lambda node, shape, key: self.section(node, shape.record, key),
        }

    def value(self, node: Node, shape: Shape, key: str) -> Any:
        """Read whatever stands at `node` as `shape` says."""
        self.marks.setdefault(key, (node.line, node.column))
        if node.kind == "scalar" and not node.quoted and node.text in ("", "~", "null"):
            return self.wrong(node, key, "nothing", expected(shape))
        return self.kinds[shape.kind](node, shape, key)

    def section(self, node: Node, record: type | None, key: str, skip: str = "") -> Any:
        """Read a mapping into `record`; the key `skip` was read by the caller."""
        assert record is not None
        members = {key_of(m): m for m in dataclasses.fields(record) if m.metadata.get("shape") is not None}
        if node.kind != "mapping":
            return self.wrong(node, key, describe(node), f"a mapping with the keys {listed(members)}")
        values, missed, good = {}, set[str](), True
        for name, place, inner in node.pairs:
            if name in members:
                full = self.mark(key, name, place, inner)
                value = self.value(inner, shape_of(members[name]), full)
                values[members[name].name] = value
                good = good and value is not BAD
            elif name != skip:
                missed.add(self.unknown(name, place, members, key))
                good = False
        for name, member in members.items():
            if name not in node.names() and member.default is MISSING:
                good = False
                if name not in missed:
                    self.missing(node, key, name, shape_of(member))
        return self.build(record, values, key, node) if good else BAD

    def build(self, record: type, values: dict[str, Any], key: str, node: Node) -> Any:
        """Make the record and hold it against its rule."""
        if not key:
            own = {"source": self.path, "marks": self.marks}
            values |= {m.name: own[m.name] for m in dataclasses.fields(record) if m.name in own}
        made = record(**values)
        faults = list(self.rules[record](made)) if record in self.rules else []
        for fault in faults:
            full = ".".join(part for part in (key, fault.key) if part)
            place = self.marks.get(full, self.marks.get(key, (node.line, node.column)))
            self.note(place, full, fault.given, fault.allowed, fault.hint)
        return made

    def mark(self, key: str, name: str, place: tuple[int, int], node: Node) -> str:
        """Note where a key stands: at its value, or at its name where the value begins on a later line."""
        full = f"{key}.{name}" if key else name
        self.marks[full] = (node.line, node.column) if node.line == place[0] and node.text else place
        return full

    def wrong(self, node: Node, key: str, given: str, allowed: str, hint: str = "") -> _Bad:
        """Note that the value at `node` is wrong; return `BAD`."""
        own = (node.line, node.column)
        self.note(own if node.text else self.marks.get(key, own), key, given, allowed, hint)
        return BAD

    def note(self, place: tuple[int, int], key: str, given: str, allowed: str, hint: str = "") -> None:
        """Note one problem at a place of the file."""
        self.problems.append(Problem(self.path, *place, key or "(file)", given, allowed, hint))

    def unknown(self, name: str, place: tuple[int, int], members: Iterable[str], key: str) -> str:
        """Note an unknown key; return the known one it was probably meant to be."""
        near = nearest(name, members)
        full = f"{key}.{name}" if key else name
        self.note(place, full, f"the unknown key `{name}`", listed(members), did_you_mean(name, members))
        return near

    def missing(self, node: Node, key: str, name: str, shape: Shape) -> None:
        """Note a key that must be given."""
        place = self.marks.get(key, (node.line, node.column))
        hint = f"add `{name}:`" + (f" to `{key}`" if key else "")
        self.note(place, f"{key}.{name}" if key else name, _MISSING, expected(shape), hint)

    def quantity(self, node: Node, shape: Shape, key: str) -> Any:
        """Read a value with its unit into SI."""
        if node.kind != "scalar":
            return self.wrong(node, key, describe(node), expected(shape))
        try:
            value = to_si(node.text, shape.dimension)
        except UnitError as error:
            return self.wrong(node, key, error.given or describe(node), error.allowed, error.hint)
        return self.bounded(value, node, shape, key)

    def number(self, node: Node, shape: Shape, key: str) -> Any:
        """Read a bare number, whole where the shape says so."""
        if node.kind != "scalar" or node.quoted or not _NUMBER.fullmatch(node.text):
            unit = node.kind == "scalar" and _NUMBER.match(node.text) is not None
            hint = "a bare number, no unit and no quotes" if unit else ""
            return self.wrong(node, key, describe(node), expected(shape), hint)
        value = float(node.text)
        if shape.kind == "whole" and not value.is_integer():
            return self.wrong(node, key, describe(node), expected(shape))
        bounded = self.bounded(value, node, shape, key)
        return int(bounded) if shape.kind == "whole" and bounded is not BAD else bounded

    def bounded(self, value: float, node: Node, shape: Shape, key: str) -> Any:
        """Hold a value against its bounds."""
        over = (shape.above is None or value > shape.above) and (shape.least is None or value >= shape.least)
        under = (shape.below is None or value < shape.below) and (shape.most is None or value <= shape.most)
        if over and under and math.isfinite(value):
            return value
        return self.wrong(node, key, describe(node), f"{expected(shape)}, {bounds(shape)}".rstrip(", "))

    def text(self, node: Node, shape: Shape, key: str) -> Any:
        """Read a short name."""
        short = node.kind == "scalar" and node.text.strip() and len(node.text) <= _LONGEST_TEXT
        if not short or not node.text.isprintable():
            return self.wrong(node, key, describe(node), expected(shape))
        return node.text.strip()

    def flag(self, node: Node, shape: Shape, key: str) -> Any:
        """Read `true` or `false`."""
        if node.kind == "scalar" and not node.quoted and node.text in ("true", "false"):
            return node.text == "true"
        meant = {"yes": "true", "on": "true", "no": "false", "off": "false"}.get(node.text.lower(), "")
        return self.wrong(node, key, describe(node), expected(shape), f"write `{meant}`" if meant else "")

    def choice(self, node: Node, shape: Shape, key: str) -> Any:
        """Read one of a few words."""
        if node.kind == "scalar" and node.text in shape.choices:
            return node.text
        return self.wrong(node, key, describe(node), expected(shape), did_you_mean(node.text, shape.choices))

    def list(self, node: Node, shape: Shape, key: str) -> Any:
        """Read a list of one shape, or of one shape per place; a direction is made a unit vector."""
        wanted = shape.length
        if node.kind != "list" or not node.items or (wanted is not None and len(node.items) != wanted):
            return self.wrong(node, key, describe(node), expected(shape))
        shapes = shape.each or (shape.items,) * len(node.items)
        values = []
        for i, (item, inner) in enumerate(zip(node.items, shapes, strict=True)):
            assert inner is not None
            values.append(self.value(item, inner, f"{key}[{i}]"))
        if any(value is BAD for value in values):
            return BAD
        if shape.key != "direction":
            return tuple(values)
        size = math.hypot(*values)
        if size == 0.0 or not math.isfinite(size):
            return self.wrong(node, key, "a direction of no length", expected(shape), "as [1, 0, 0]")
        return tuple(value / size for value in values)

    def table(self, node: Node, shape: Shape, key: str) -> Any:
        """Read a mapping of user-chosen names."""
        if node.kind != "mapping" or not node.pairs:
            return self.wrong(node, key, describe(node), expected(shape))
        entry = shape.items or Shape("section", record=shape.record)
        values = {}
        for name, place, inner in node.pairs:
            full = self.mark(key, name, place, inner)
            if not NAME.fullmatch(name):
                allowed = "up to 60 letters, digits, `-` and `_`, a letter first"
                self.note(place, key, f"the name `{name[:60]}`", allowed)
            values[name] = self.value(inner, entry, full)
        return BAD if any(value is BAD for value in values.values()) else values

    def variant(self, node: Node, shape: Shape, key: str) -> Any:
        """Read one of several records, told apart by a key or by the single key that is there."""
        words = dict(shape.variants)
        if node.kind != "mapping":
            return self.wrong(node, key, describe(node), expected(shape))
        if not shape.by:
            present = [word for word in node.names() if word in words]
            if len(present) == 1:
                return self.section(node, words[present[0]], key)
            hint = "" if present else did_you_mean(next(iter(node.names()), ""), words)
            return self.wrong(node, key, listed(node.names()) or "an empty mapping", expected(shape), hint)
        chosen = node.get(shape.by)
        full, allowed = f"{key}.{shape.by}", f"one of {listed(words)}"
        if chosen is None:
            place = self.marks.get(key, (node.line, node.column))
            self.note(place, full, _MISSING, allowed, f"add `{shape.by}:`")
            return BAD
        self.marks[full] = (chosen.line, chosen.column)
        if chosen.kind != "scalar" or chosen.text not in words:
            return self.wrong(chosen, full, describe(chosen), allowed, did_you_mean(chosen.text, words))
        return self.section(node, words[chosen.text], key, skip=shape.by)
