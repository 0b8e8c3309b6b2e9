"""What is written reads back to the same record."""

import dataclasses
from pathlib import Path

import pytest

from balance.files.writer import written
from balance.machine.read import read_machine

PLANTS = sorted(Path("plants").glob("*.yaml"))


@pytest.mark.parametrize("path", PLANTS, ids=lambda p: p.stem)
def test_every_shipped_machine_reads_back(path, tmp_path):
    machine = read_machine(str(path))
    copy = tmp_path / "copy.yaml"
    copy.write_text(written(machine, "a comment\nof two lines"), encoding="utf-8")
    again = read_machine(str(copy))
    assert dataclasses.replace(again, source=machine.source) == machine
    assert copy.read_text(encoding="utf-8").startswith("# a comment\n# of two lines\n")


def test_a_changed_machine_does_not_read_back_to_the_old_one(tmp_path):
    machine = read_machine(str(PLANTS[0]))
    copy = tmp_path / "copy.yaml"
    copy.write_text(written(dataclasses.replace(machine, gravity=1.62)), encoding="utf-8")
    assert read_machine(str(copy)) != machine


def test_what_cannot_be_written_is_refused():
    with pytest.raises(ValueError, match="finite"):
        written(dataclasses.replace(read_machine(str(PLANTS[0])), gravity=float("inf")))
