"""`balance new` writes a pair that runs, whole, and never over a person's file."""

from __future__ import annotations

from pathlib import Path

import pytest

from balance.cli import new


def test_the_pair_runs_and_meets_its_own_requirements(command, tmp_path: Path) -> None:
    made = command("new", "my-rig", "--in", tmp_path, "--json").answer()
    assert made["machine_file"] == str(tmp_path / "plants" / "my-rig.yaml")
    assert command("gains", made["design_file"]).code == 0
    assert command("recover", made["design_file"]).code == 0


@pytest.mark.parametrize("taken", ["plants", "designs"])
def test_a_file_that_is_there_is_kept_and_nothing_is_written(command, tmp_path: Path, taken: str) -> None:
    mine = tmp_path / taken / "my-rig.yaml"
    mine.parent.mkdir()
    mine.write_text("edited by hand\n", encoding="utf-8")
    answer = command("new", "my-rig", "--in", tmp_path)
    assert answer.code == 2
    assert str(mine) in answer.err
    assert mine.read_text(encoding="utf-8") == "edited by hand\n"
    assert [p for p in tmp_path.rglob("*") if p.is_file()] == [mine]


@pytest.mark.parametrize("name", ["../up", "a b", "", "x/y", "-x", "x" * 61])
def test_a_name_that_cannot_be_a_files_is_refused(command, tmp_path: Path, name: str) -> None:
    answer = command("new", "--in", tmp_path, "--", name)
    assert answer.code == 2
    assert list(tmp_path.iterdir()) == []


def test_an_interrupted_write_leaves_nothing(command, tmp_path: Path, monkeypatch) -> None:
    def interrupted(source: str, target: str) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(new.os, "replace", interrupted)
    assert command("new", "my-rig", "--in", tmp_path).code == 130
    assert [p for p in tmp_path.rglob("*") if p.is_file()] == []
