"""Reading a job: which stances, which machine file, and whose mistake an error is."""

from __future__ import annotations

from pathlib import Path

import pytest

from balance.api.load import FELL, load, load_body
from balance.base.errors import InputError

SCOUT = ("on-left-right", "on-fore-right", "on-fore-left")


def test_every_means_all_stances_in_file_order(root: Path) -> None:
    job = load(str(root / "designs" / "scout-wheels.yaml"), "every")
    assert job.stances == SCOUT
    assert job.machine.machine == "trellis-scout"


def test_a_named_stance_goes_before_the_files_own(root: Path) -> None:
    assert load(str(root / "designs" / "scout-wheels.yaml"), "on-fore-left").stances == ("on-fore-left",)


def test_an_unknown_stance_names_the_nearest(root: Path) -> None:
    with pytest.raises(InputError, match="did you mean `on-fore-left`") as caught:
        load(str(root / "designs" / "scout-wheels.yaml"), "on-fore-lefd")
    assert caught.value.problems[0].where == "command line"


def test_an_unknown_stance_in_the_file_is_told_with_its_line(root: Path, tmp_path: Path) -> None:
    text = (root / "designs" / "bench-rig.yaml").read_text(encoding="utf-8")
    text = text.replace("../plants/bench-rig.yaml", str(root / "plants" / "bench-rig.yaml"))
    path = tmp_path / "d.yaml"
    path.write_text(text + "stance: lime\n", encoding="utf-8")
    with pytest.raises(InputError, match="did you mean `line`") as caught:
        load(str(path))
    problem = caught.value.problems[0]
    assert (problem.where, problem.line, problem.key) == (str(path), text.count("\n") + 1, "stance")
    assert load(str(path), "line").stances == ("line",)  # the command line's own choice mends it


def test_a_body_comes_from_either_kind_of_file(root: Path) -> None:
    alone = load_body(str(root / "plants" / "trellis-scout.yaml"))
    named = load_body(str(root / "designs" / "scout-wheels.yaml"))
    assert alone == named
    assert alone.fell == FELL
    assert alone.stances == SCOUT


def test_a_broken_file_is_reported_as_what_it_was_given_for(tmp_path: Path) -> None:
    path = tmp_path / "x.yaml"
    path.write_text("a: [\n", encoding="utf-8")
    for read in (load, load_body):
        with pytest.raises(InputError) as caught:
            read(str(path))
        assert caught.value.problems[0].where == str(path)
