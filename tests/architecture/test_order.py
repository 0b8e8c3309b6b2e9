"""The package keeps the order of rooms and the fences; every rule, shown a small tree that breaks it, says so."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.architecture.house import LONGEST, ORDER, breaches, row, undocumented

GOOD = {
    "__init__.py": '"""The package."""\n__version__ = "0"\n',
    "base/__init__.py": "",
    "base/errors.py": '"""Errors."""\nimport difflib\n',
    "files/__init__.py": "",
    "files/document.py": '"""Documents."""\nimport yaml\nfrom house.base.errors import thing\n',
    "kernel/__init__.py": "",
    "kernel/run.py": '"""Loops."""\nimport numba\nimport numpy as np\n',
    "machine/__init__.py": "",
    "machine/machine.py": '"""Machine."""\nfrom dataclasses import dataclass\nfrom house.files import document\n',
    "report/__init__.py": "",
    "report/figures/__init__.py": "",
    "report/figures/bode.py": '"""Bode."""\nimport matplotlib.figure\n',
    "cli/__init__.py": "",
    "cli/main.py": '"""Main."""\ndef main():\n    """Run."""\n    from house.machine import machine\n    print(machine)\n',
}
"""A small house in which everything is in its place."""

BREACHES = [
    ("base/errors.py", "from house.files.document import load", "upward: house.files.document.load"),
    ("files/document.py", "import house.machine.machine", "upward: house.machine.machine"),
    ("machine/machine.py", "from house import report", "upward: house.report"),
    (
        "machine/machine.py",
        "from typing import TYPE_CHECKING\nif TYPE_CHECKING:\n    import house.cli.main",
        "upward: house.cli.main",
    ),
    ("files/document.py", "from house.kernel import run", "sideways: house.kernel.run"),
    ("cli/main.py", "import house.page.app", "sideways: house.page.app"),
    ("base/errors.py", "import house.base.errors", "circular"),
    ("machine/machine.py", "from . import legs", "relative: .legs"),
    ("files/document.py", "from ..base import errors", "relative: ..base.errors"),
    ("machine/machine.py", "def read():\n    import json\n    return json", "late: json"),
    (
        "machine/machine.py",
        "class Read:\n    def read(self):\n        from json import loads\n        return loads",
        "late: json.loads",
    ),
    (
        "base/errors.py",
        "import importlib\nthing = importlib.import_module('house.files.document')",
        "late: house.files.document",
    ),
    ("report/__init__.py", "import matplotlib.pyplot", "fence: matplotlib.pyplot"),
    ("machine/machine.py", "from numba import njit", "fence: numba.njit"),
    ("base/errors.py", "import yaml", "fence: yaml"),
    ("files/document.py", "import numpy as np", "numpy: numpy"),
    ("machine/machine.py", "from scipy import linalg", "numpy: scipy.linalg"),
    ("report/__init__.py", "print('done')", "print: outside cli/"),
    ("kernel/run.py", "import sys\nsys.stderr.write('done')", "print: sys.stderr outside cli/"),
    ("kernel/run.py", "from dataclasses import dataclass", "record: dataclasses.dataclass"),
    ("kernel/run.py", "from house.base import units", "record: house.base.units"),
    ("base/errors.py", "\n" * LONGEST, "too long"),
    ("attic/__init__.py", "", "unknown room"),
    ("__init__.py", "from house.cli.main import main", "door: house.cli.main.main"),
]


def build(folder: Path, files: dict[str, str]) -> Path:
    """Write a small package named `house` and return its folder."""
    house = folder / "house"
    for path, text in files.items():
        (house / path).parent.mkdir(parents=True, exist_ok=True)
        (house / path).write_text(text, encoding="utf-8")
    return house


def test_the_package_keeps_every_rule(root: Path) -> None:
    assert breaches(root / "balance") == []


def test_a_house_in_order_has_no_breach(tmp_path: Path) -> None:
    assert breaches(build(tmp_path, GOOD)) == []


@pytest.mark.parametrize(("path", "added", "said"), BREACHES, ids=[b[2] for b in BREACHES])
def test_each_breach_is_told(tmp_path: Path, path: str, added: str, said: str) -> None:
    found = breaches(build(tmp_path, GOOD | {path: GOOD.get(path, "") + added + "\n"}))
    assert any(path.partition("/")[0] in line and said in line for line in found), found


def test_a_circle_over_three_files_of_one_room_is_told_for_each(tmp_path: Path) -> None:
    ring = {
        "base/a.py": "import house.base.b",
        "base/b.py": "from house.base import c",
        "base/c.py": "from house.base.a import x",
    }
    found = breaches(build(tmp_path, GOOD | ring))
    assert [line.split(":")[0] for line in found] == ["base/a.py", "base/b.py", "base/c.py"]
    assert all("circular" in line for line in found)


def test_a_file_just_as_long_as_allowed_passes(tmp_path: Path) -> None:
    longest = GOOD["base/errors.py"] + "\n" * (LONGEST - GOOD["base/errors.py"].count("\n"))
    assert breaches(build(tmp_path, GOOD | {"base/errors.py": longest})) == []


def test_every_room_that_is_built_has_its_row(root: Path) -> None:
    rooms = {path.parent.name for path in (root / "balance").glob("*/__init__.py")}
    assert rooms, "no room found: the test reads the wrong folder"
    assert all(row(room) >= 0 for room in rooms)
    assert row("attic") < 0
    assert len({room for rooms in ORDER for room in rooms}) == sum(map(len, ORDER))


def test_every_public_thing_has_a_docstring(root: Path) -> None:
    assert undocumented(root / "balance") == []


def test_a_missing_docstring_is_told(tmp_path: Path) -> None:
    bare = {
        "base/errors.py": "def said():\n    return 1\n\n"
        "class Told:\n    def why(self):\n        return 2\n\n"
        "def _own():\n    return 3\n"
    }
    found = undocumented(build(tmp_path, GOOD | bare))
    assert [line.split(" ")[1] for line in found] == ["module", "said", "Told", "Told.why"]


def test_nothing_stands_at_the_top_but_what_was_agreed(root: Path) -> None:
    agreed = {
        "README.md",
        "DEVELOPERS.md",
        "LICENSE",
        "pyproject.toml",
        "balance",
        "plants",
        "designs",
        "tests",
    }
    made = {"build", "dist"}  # by pip, ignored by git
    seen = {path.name for path in root.iterdir() if not path.name.startswith(".")} - made
    assert {name for name in seen if not name.endswith(".egg-info")} == agreed
