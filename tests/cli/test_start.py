"""Help and mistakes in a file are answered without loading anything that computes."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

HEAVY = {"numpy", "scipy", "control", "numba", "matplotlib"}

PROBE = """
import json, sys
from balance.cli.main import main
code = main(sys.argv[1:])
print(json.dumps([code, sorted({name.partition(".")[0] for name in sys.modules})]), file=sys.stderr)
"""


def run_and_list_modules(*words: str) -> tuple[int, set[str]]:
    """Run one command in an interpreter of its own; return its exit code and the top names of all it imported."""
    done = subprocess.run([sys.executable, "-c", PROBE, *words], capture_output=True, text=True, check=True)
    code, modules = json.loads(done.stderr.splitlines()[-1])
    return code, set(modules)


@pytest.mark.parametrize("words", [["--help"], ["check", "--help"], ["--version"], ["chekc"]])
def test_help_and_usage_errors_load_nothing_heavy(words: list[str]) -> None:
    code, modules = run_and_list_modules(*words)
    assert code == (2 if words == ["chekc"] else 0)
    assert not modules & (HEAVY | {"pint", "yaml"})


def test_a_mistake_in_a_machine_file_loads_nothing_that_computes(tmp_path: Path, root: Path) -> None:
    text = (root / "plants" / "bench-rig.yaml").read_text(encoding="utf-8")
    (tmp_path / "wrong.yaml").write_text(text.replace("3.2 kg", "3.2"), encoding="utf-8")
    code, modules = run_and_list_modules("plant", str(tmp_path / "wrong.yaml"))
    assert code == 2
    assert not modules & HEAVY


def test_a_mistake_in_a_design_file_loads_nothing_that_computes(tmp_path: Path, root: Path) -> None:
    text = (root / "designs" / "bench-rig.yaml").read_text(encoding="utf-8")
    text = text.replace("../plants/bench-rig.yaml", str(root / "plants" / "bench-rig.yaml"))
    (tmp_path / "wrong.yaml").write_text(text + "stance: nowhere\n", encoding="utf-8")
    code, modules = run_and_list_modules("check", str(tmp_path / "wrong.yaml"))
    assert code == 2
    assert not modules & HEAVY


def test_the_probe_sees_what_a_plant_needs(root: Path) -> None:
    code, modules = run_and_list_modules("plant", str(root / "plants" / "bench-rig.yaml"))
    assert code == 0
    assert "numpy" in modules
    assert "matplotlib" not in modules  # a figure nobody asked for must not be waited for
