"""Reads a package's imports and tells every breach of the order of rooms and of the fences.

Works on any source tree, so that each rule can be shown to fail on a small made-up one.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

ORDER = (
    ("base",),
    ("files", "maths", "kernel"),
    ("machine", "goal"),
    ("stance",),
    ("plant",),
    ("design",),
    ("simulate",),
    ("check",),
    ("study",),
    ("size",),
    ("firmware",),
    ("report",),
    ("api",),
    ("cli", "page"),
)
"""Rooms from low to high; a room imports only from rows above its own in this list. The plan is in DEVELOPERS.md."""

LATE = ("cli", "page")
"""Rooms that may import inside a function."""

LONGEST = 400
"""Lines a file may have."""

FENCES = {
    "matplotlib": ("report/figures/",),
    "numba": ("kernel/",),
    "llvmlite": ("kernel/",),
    "yaml": ("files/",),
}
"""Library -> the only folders that may import it."""

NO_NUMPY = ("base", "files", "machine", "goal")
"""Rooms that are read before anything is computed: no numpy, nor a library that brings it."""
BRINGS_NUMPY = ("numpy", "scipy", "control", "matplotlib", "numba")

PURE = ("kernel", "maths")
"""Rooms of arrays and floats: they know no record."""


@dataclass(frozen=True)
class Import:
    """One import: the dotted name, the level of dots before it, its line, whether it stands inside a function."""

    name: str
    level: int
    line: int
    late: bool


@dataclass(frozen=True)
class File:
    """One source file: path from the package's folder with `/`, text, syntax tree, imports."""

    path: str
    text: str
    tree: ast.Module
    imports: tuple[Import, ...]

    @property
    def room(self) -> str:
        """The first folder; "" for files of the package's own folder."""
        return self.path.split("/")[0] if "/" in self.path else ""


def read_house(root: Path) -> tuple[File, ...]:
    """Read every Python file under `root`, the package's folder."""
    files = []
    for path in sorted(root.rglob("*.py")):
        text = path.read_text(encoding="utf-8")
        tree = ast.parse(text, str(path))
        files.append(File(path.relative_to(root).as_posix(), text, tree, tuple(_imports(tree, False))))
    return tuple(files)


def _imports(node: ast.AST, late: bool) -> Iterator[Import]:
    for child in ast.iter_child_nodes(node):
        inside = late or isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda)
        if isinstance(child, ast.Import):
            for alias in child.names:
                yield Import(alias.name, 0, child.lineno, late)
        elif isinstance(child, ast.ImportFrom):
            base = child.module or ""
            for alias in child.names:
                # `from balance import plant` names a room, `from balance.plant import build` a file of one
                yield Import(f"{base}.{alias.name}" if base else alias.name, child.level, child.lineno, late)
        elif isinstance(child, ast.Call) and _called(child) in ("import_module", "__import__"):
            given = child.args[0] if child.args else None
            named = given.value if isinstance(given, ast.Constant) and isinstance(given.value, str) else "?"
            yield Import(named, 0, child.lineno, True)
        yield from _imports(child, inside)


def _called(call: ast.Call) -> str:
    if isinstance(call.func, ast.Name):
        return call.func.id
    return call.func.attr if isinstance(call.func, ast.Attribute) else ""


def row(room: str) -> int:
    """Return the place of a room in the order; -1 for one that is not in it."""
    return next((i for i, rooms in enumerate(ORDER) if room in rooms), -1)


def breaches(root: Path) -> list[str]:
    """Return every breach in the package at `root` as `file:line rule: what`, sorted."""
    house = read_house(root)
    rules = (
        unknown_rooms,
        open_door,
        wrong_direction,
        circles,
        relative,
        late,
        fenced,
        numpy_too_early,
        printing,
        impure,
        too_long,
    )
    return sorted(found for rule in rules for found in rule(house, root.name))


def unknown_rooms(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Rooms that have no place in the order."""
    for room in sorted({f.room for f in house if f.room and row(f.room) < 0}):
        yield f"{room}/:1 unknown room: not in the order"


def open_door(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Anything imported by the package's own `__init__`, which every command would then wait for."""
    for file in house:
        if file.path == "__init__.py":
            yield from (
                f"{file.path}:{i.line} door: {i.name}"
                for i in file.imports
                if i.name != "__future__.annotations"
            )


def _inner(file: File, package: str) -> Iterator[tuple[Import, str, str]]:
    """Imports of the package itself: import, room, whole name."""
    for found in file.imports:
        parts = found.name.split(".")
        if found.level == 0 and parts[0] == package:
            yield found, parts[1] if len(parts) > 1 else "", found.name


def wrong_direction(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Imports from a room on a row above (upward) or on the same row (sideways)."""
    for file in house:
        for found, room, name in _inner(file, package):
            if not file.room or room == file.room or row(room) < 0:
                continue
            if row(room) == row(file.room):
                yield f"{file.path}:{found.line} sideways: {name}"
            elif row(room) > row(file.room):
                yield f"{file.path}:{found.line} upward: {name}"


def circles(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Files that import each other in a circle, inside one room too."""
    modules = {_dotted(f.path, package): f for f in house}
    knows = {
        name: {_file_of(full, modules) for _, _, full in _inner(file, package)} - {""}
        for name, file in modules.items()
    }
    for name in sorted(modules):
        reached, waiting = set[str](), list(knows[name])
        while waiting:
            here = waiting.pop()
            if here not in reached:
                reached.add(here)
                waiting.extend(knows[here])
        if name in reached:
            yield f"{modules[name].path}:1 circular: imports itself by way of others"


def _dotted(path: str, package: str) -> str:
    return f"{package}/{path}".removesuffix(".py").removesuffix("/__init__").replace("/", ".")


def _file_of(name: str, modules: dict[str, File]) -> str:
    """Return the module a dotted name belongs to: itself, or what holds it."""
    while name and name not in modules:
        name = name.rpartition(".")[0]
    return name


def relative(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Imports with leading dots."""
    for file in house:
        yield from (
            f"{file.path}:{i.line} relative: {'.' * i.level}{i.name}" for i in file.imports if i.level
        )


def late(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Imports inside functions, outside the rooms that may."""
    for file in house:
        if file.room not in LATE:
            yield from (f"{file.path}:{i.line} late: {i.name}" for i in file.imports if i.late)


def fenced(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Libraries outside the folder they are fenced into."""
    for file in house:
        for found in file.imports:
            folders = FENCES.get(found.name.split(".")[0])
            if folders and not file.path.startswith(folders):
                yield f"{file.path}:{found.line} fence: {found.name}"


def numpy_too_early(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Numpy, or what brings it, where files are read."""
    for file in house:
        if file.room in NO_NUMPY:
            yield from (
                f"{file.path}:{i.line} numpy: {i.name}"
                for i in file.imports
                if i.name.split(".")[0] in BRINGS_NUMPY
            )


def printing(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Calls of print, and writing to the standard streams, outside cli/."""
    for file in house:
        if file.room == "cli":
            continue
        for node in ast.walk(file.tree):
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == "print":
                yield f"{file.path}:{node.lineno} print: outside cli/"
            if (
                isinstance(node, ast.Attribute)
                and node.attr in ("stdout", "stderr")
                and _named(node.value) == "sys"
            ):
                yield f"{file.path}:{node.lineno} print: sys.{node.attr} outside cli/"


def _named(node: ast.AST) -> str:
    return node.id if isinstance(node, ast.Name) else ""


def impure(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Records in the rooms of arrays: imports from rooms that hold them, or dataclasses of their own."""
    for file in house:
        if file.room not in PURE:
            continue
        for found, room, name in _inner(file, package):
            if room != file.room and not name.startswith(f"{package}.base.errors"):
                yield f"{file.path}:{found.line} record: {name}"
        yield from (
            f"{file.path}:{i.line} record: {i.name}" for i in file.imports if i.name.startswith("dataclasses")
        )


def too_long(house: tuple[File, ...], package: str) -> Iterator[str]:
    """Files longer than the limit."""
    for file in house:
        count = len(file.text.splitlines())
        if count > LONGEST:
            yield f"{file.path}:{LONGEST + 1} too long: {count} lines"


def undocumented(root: Path) -> list[str]:
    """Return every public module, class, function and method without a docstring."""
    found = []
    for file in read_house(root):
        if file.text.strip() and not ast.get_docstring(file.tree):
            found.append(f"{file.path}:1 module")
        found += _undocumented(file.path, file.tree, "")
    return found


def _undocumented(path: str, parent: ast.AST, prefix: str) -> Iterator[str]:
    for node in ast.iter_child_nodes(parent):
        if isinstance(
            node, ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef
        ) and not node.name.startswith("_"):
            if not ast.get_docstring(node):
                yield f"{path}:{node.lineno} {prefix}{node.name}"
            if isinstance(node, ast.ClassDef):
                yield from _undocumented(path, node, f"{node.name}.")
