"""YAML text into a tree of nodes that know their line and column.

Stricter than YAML allows, because a machine file is written by people and possibly sent by strangers: only
the safe loader's events are used (no object is ever made from a tag), duplicate keys are refused (PyYAML
keeps the last in silence), and size, depth and aliases are bounded.  Scalars stay text here; what they mean
is decided by the record they are read into, so `on`, `off`, `yes` and `no` are words and `1e-3` is a
number.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

import yaml
from yaml.events import (
    AliasEvent,
    CollectionEndEvent,
    DocumentStartEvent,
    Event,
    MappingStartEvent,
    NodeEvent,
    ScalarEvent,
    SequenceStartEvent,
)

from balance.base.errors import InputError, Problem
from balance.files.node import Node, Tree

LARGEST = 1_000_000
"""Bytes a file may have."""
MOST_NODES = 20_000
"""Values a file may have, aliases counted as often as they are used."""
DEEPEST = 20
"""Levels of nesting."""


@dataclass
class _Open:
    """A list or mapping being read."""

    start: Event
    children: list[Node] = field(default_factory=list)
    anchor: str | None = None

    def last(self) -> str:
        """Return the key or index of what is being read inside."""
        if isinstance(self.start, SequenceStartEvent):
            return f"[{len(self.children)}]"
        return self.children[-1].text if len(self.children) % 2 else "(key)"


def load(path: str) -> Tree:
    """Return the tree of a YAML file.

    Raises
    ------
    InputError
        When the file cannot be read, is no YAML, or exceeds the bounds above.
    """
    text = _text(path)
    try:
        return _Builder(path).build(yaml.parse(text, Loader=yaml.SafeLoader))
    except yaml.MarkedYAMLError as error:
        raise InputError([_syntax(path, text, error)]) from None
    except yaml.reader.ReaderError as error:
        line = text.count("\n", 0, error.position) + 1
        column = error.position - (text.rfind("\n", 0, error.position) + 1) + 1
        given = f"the character U+{ord(text[error.position]):04X}"
        problem = Problem(path, line, column, "(file)", given, "printable text", "remove it")
        raise InputError([problem]) from None


def _text(path: str) -> str:
    """Read a file whole, within the bounds."""
    try:
        with Path(path).open("rb") as file:
            raw = file.read(LARGEST + 1)
    except OSError as error:
        hint = "check the path" if isinstance(error, FileNotFoundError) else ""
        raise InputError([Problem(path, 0, 0, "(file)", f"a path that cannot be read ({error.strerror})",
                                  "a YAML file", hint)]) from None
    except ValueError:
        raise InputError([Problem(path, 0, 0, "(file)", "no path", "a YAML file")]) from None
    if len(raw) > LARGEST:
        raise InputError([Problem(path, 0, 0, "(file)", "more than a megabyte", f"at most {LARGEST} bytes")])
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        raise InputError([Problem(path, line, 1, "(file)", "bytes that are no UTF-8", "UTF-8 text",
                                  "save the file as UTF-8")]) from None


class _Builder:
    """Builds the tree from events; keeps the problems that need not stop it."""

    def __init__(self, path: str) -> None:
        self.path = path
        self.problems: list[Problem] = []
        self.anchors: dict[str, Node | None] = {}
        self.nodes = 0

    def build(self, events: Iterator[Event]) -> Tree:
        open_: list[_Open] = []
        root: Node | None = None
        for event in events:
            if isinstance(event, DocumentStartEvent) and root is not None:
                raise self.stop(event, "a second document after `---`", "one document per file")
            if isinstance(event, MappingStartEvent | SequenceStartEvent):
                self.start(event, open_)
            elif isinstance(event, NodeEvent | CollectionEndEvent):
                node = self.node(event, open_)
                if open_:
                    open_[-1].children.append(node)
                else:
                    root = node
        if root is None:
            raise InputError([Problem(self.path, 1, 1, "(file)", "an empty file", "keys with their values")])
        return Tree(self.path, root, tuple(self.problems))

    def start(self, event: MappingStartEvent | SequenceStartEvent, open_: list[_Open]) -> None:
        self.refuse_tag(event)
        self.count(event, 1)
        if len(open_) >= DEEPEST:
            raise self.stop(event, f"more than {DEEPEST} levels of nesting", f"at most {DEEPEST} levels")
        if event.anchor:
            self.anchors[event.anchor] = None
        open_.append(_Open(event, anchor=event.anchor))

    def node(self, event: Event, open_: list[_Open]) -> Node:
        """Return the node that ends here."""
        if isinstance(event, ScalarEvent):
            self.refuse_tag(event)
            self.count(event, 1)
            node = Node("scalar", *_place(event), event.value, event.style is not None)
            anchor = event.anchor
        elif isinstance(event, AliasEvent):
            node, anchor = self.alias(event), None
        else:
            closed = open_.pop()
            node, anchor = self.collection(closed, open_), closed.anchor
        if anchor:
            self.anchors[anchor] = node
        return node

    def alias(self, event: AliasEvent) -> Node:
        """Return the anchored node; its marks stay where the value is written."""
        known = self.anchors.get(event.anchor or "")
        if known is None:
            why = "inside itself" if event.anchor in self.anchors else "which is not defined"
            raise self.stop(event, f"`*{event.anchor}`, {why}", "the name of an anchor defined above")
        self.count(event, known.size)
        return known

    def count(self, event: Event, size: int) -> None:
        """Bound the tree with its aliases expanded: a few lines of nested aliases can stand for billions."""
        self.nodes += size
        if self.nodes > MOST_NODES:
            raise self.stop(event, f"more than {MOST_NODES} values", f"at most {MOST_NODES}, aliases counted")

    def collection(self, closed: _Open, above: list[_Open]) -> Node:
        """Return the finished list or mapping; `above` are the levels it stands in."""
        size = 1 + sum(child.size for child in closed.children)
        place = _place(closed.start)
        if isinstance(closed.start, SequenceStartEvent):
            return Node("list", *place, items=tuple(closed.children), size=size)
        pairs: dict[str, tuple[str, tuple[int, int], Node]] = {}
        for key, value in zip(closed.children[::2], closed.children[1::2], strict=True):
            if key.kind != "scalar":
                self.note(key, above, f"a {key.kind} as a key", "a name as a key")
            elif key.text in pairs:
                hint = f"it is first given in line {pairs[key.text][1][0]}; remove one of the two"
                self.note(key, above, f"the key `{key.text}` a second time", "each key once", hint)
            else:
                pairs[key.text] = (key.text, (key.line, key.column), value)
        return Node("mapping", *place, pairs=tuple(pairs.values()), size=size)

    def note(self, key: Node, above: list[_Open], given: str, allowed: str, hint: str = "") -> None:
        """Note a problem with a key that need not stop the reading."""
        path = [*(level.last() for level in above), key.text or "(key)"]
        name = ".".join(path).replace(".[", "[")
        self.problems.append(Problem(self.path, key.line, key.column, name, given, allowed, hint))

    def refuse_tag(self, event: MappingStartEvent | SequenceStartEvent | ScalarEvent) -> None:
        if event.tag is not None:
            raise self.stop(event, f"the tag `{event.tag}`", "values without tags", "remove the tag")

    def stop(self, event: Event, given: str, allowed: str, hint: str = "") -> InputError:
        problem = Problem(self.path, *_place(event), "(file)", given, allowed, hint)
        return InputError([*self.problems, problem])


def _place(event: Event) -> tuple[int, int]:
    """Line and column where an event starts, from 1."""
    mark = event.start_mark
    return (mark.line + 1, mark.column + 1) if mark else (1, 1)


def _syntax(path: str, text: str, error: yaml.MarkedYAMLError) -> Problem:
    """Turn the parser's complaint into a problem; tabs have a hint of their own."""
    mark = error.problem_mark or error.context_mark
    line, column = (mark.line + 1, mark.column + 1) if mark else (1, 1)
    lines = text.splitlines()
    shown = lines[line - 1].strip()[:60] if line <= len(lines) else "the end of the file"
    given = f"`{shown}`" if line <= len(lines) else shown
    if "\\t" in (error.problem or "") or "\t" in (lines[line - 1] if line <= len(lines) else ""):
        return Problem(path, line, column, "(file)", "a tab", "spaces", "YAML is indented with spaces only")
    said = " ".join(part for part in (error.context, error.problem) if part)
    allowed = "YAML: `key: value`, lists in [ ], nesting by indentation"
    return Problem(path, line, column, "(file)", given, allowed, f"the YAML parser says: {said}")
