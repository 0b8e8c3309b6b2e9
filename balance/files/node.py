"""The tree of a file: values that know where they stand."""

from __future__ import annotations

from dataclasses import dataclass

from balance.base.errors import Problem


@dataclass(frozen=True)
class Node:
    """One value of the file.

    `kind`: "scalar" (`text`, and `quoted` where it stood in quotes), "list" (`items`), "mapping" (`pairs`:
    name, place of the name, value).  `line` and `column` count from 1.  `size`: values inside, itself
    included.
    """

    kind: str
    line: int
    column: int
    text: str = ""
    quoted: bool = False
    items: tuple[Node, ...] = ()
    pairs: tuple[tuple[str, tuple[int, int], Node], ...] = ()
    size: int = 1

    def get(self, name: str) -> Node | None:
        """Return a mapping's value by its name; None where there is none, or where this is no mapping."""
        return next((value for key, _, value in self.pairs if key == name), None)

    def names(self) -> tuple[str, ...]:
        """Return a mapping's names in file order; empty where this is no mapping."""
        return tuple(key for key, _, _ in self.pairs)

    def place(self, path: str) -> tuple[int, int]:
        """Return line and column of the value at a dotted path of keys, as far down as it exists."""
        name, _, rest = path.partition(".")
        found = self.get(name)
        return found.place(rest) if found else (self.line, self.column)

    def plain(self) -> object:
        """Return dicts, lists, texts, numbers and flags, as an editor's YAML 1.2 reader sees them."""
        if self.kind == "mapping":
            return {key: value.plain() for key, _, value in self.pairs}
        if self.kind == "list":
            return [item.plain() for item in self.items]
        return self.text if self.quoted else _core_scalar(self.text)


@dataclass(frozen=True)
class Tree:
    """A whole file: its path as given, the topmost node, and what was wrong but did not stop the reading."""

    path: str
    root: Node
    problems: tuple[Problem, ...] = ()


def _core_scalar(text: str) -> object:
    """A plain scalar by YAML 1.2's core schema, as far as a machine file needs it."""
    words: dict[str, object] = {"true": True, "false": False, "null": None, "~": None, "": None}
    if text in words:
        return words[text]
    for kind in (int, float):
        try:
            number = kind(text)
        except ValueError:
            continue
        special = "_" in text or text.strip("+-.").lower() in ("inf", "nan", "infinity")
        return text if special else number
    return text
