"""`balance plant --figure`: a drawing beside the numbers, whole or not at all."""

from __future__ import annotations

from pathlib import Path

import pytest


@pytest.mark.parametrize(("ending", "begins"), [("svg", b"<svg"), ("png", b"\x89PNG")])
def test_the_machine_is_drawn(command, root: Path, tmp_path: Path, ending: str, begins: bytes) -> None:
    path = tmp_path / f"machine.{ending}"
    said = command("plant", root / "plants/quay-carrier.yaml", "--stance", "on-left-right", "--figure", path)
    assert said.code == 0
    assert str(path) in said.out
    assert path.read_bytes().startswith(begins)
    assert sorted(p.name for p in tmp_path.iterdir()) == [path.name]


def test_json_names_the_drawing(command, root: Path, tmp_path: Path) -> None:
    path = tmp_path / "m.svg"
    assert command("plant", root / "plants/bench-rig.yaml", "--figure", path, "--json").answer()["figure"] == str(path)


def test_without_it_nothing_is_written(command, root: Path, tmp_path: Path) -> None:
    assert command("plant", root / "plants/bench-rig.yaml").code == 0
    assert list(tmp_path.iterdir()) == []
