"""Gusts from a sheet: units in the head, one error per bad cell with its place."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from balance.base.errors import InputError
from balance.goal.read import read_goal

BENCH = Path("designs/bench-rig.yaml").read_text(encoding="utf-8")


def design(tmp_path, sheet, gusts="{file: wind.csv}"):
    text = BENCH.replace("machine: ../plants/", "machine: plants/")
    text = text.replace("  shove: ", f"  wind: {{gusts: {gusts}}}\n  shove: ")
    path = tmp_path / "d.yaml"
    path.write_text(text, encoding="utf-8")
    if sheet is not None:
        (tmp_path / "wind.csv").write_text(sheet, encoding="utf-8")
    return str(path)


def problems(tmp_path, sheet, gusts="{file: wind.csv}"):
    with pytest.raises(InputError) as caught:
        read_goal(design(tmp_path, sheet, gusts))
    return caught.value.problems


def test_units_of_the_head_count(tmp_path):
    goal = read_goal(design(tmp_path, "# measured on the roof\ntime [ms], torque [mN*m]\n0, 0\n\n100, 250\n200, -50\n"))
    assert goal.trials["wind"].gusts.points == ((0.0, 0.0), (0.1, 0.25), (0.2, -0.05))
    assert goal.trials["wind"].gusts.lever == math.inf                     # a torque is no force
    assert goal.trials["shove"].gusts is None


def test_a_force_takes_its_height_as_lever(tmp_path):
    goal = read_goal(design(tmp_path, "time [s], force [N]\n0, 0\n1, 2\n", "{file: wind.csv, height: 450 mm}"))
    assert goal.trials["wind"].gusts.points[1] == (1.0, pytest.approx(0.9))
    assert goal.trials["wind"].gusts.lever == 0.45
    found = problems(tmp_path, "time [s], force [N]\n0, 0\n1, 2\n")
    assert [(p.key, "height" in p.allowed) for p in found] == [("trials.wind.gusts.height", True)]


def test_every_bad_cell_has_its_line_and_column(tmp_path):
    sheet = "time [s], torque [N*m]\n0, 0\nsoon, 1\n0.2, \n0.3, 1, 2\n0.4, nan\n0.5, 1_0\n"
    found = problems(tmp_path, sheet)
    assert [(p.line, p.column, p.key) for p in found] == [
        (3, 1, "time"), (4, 2, "torque"), (5, 3, "(row)"), (6, 2, "torque"), (7, 2, "torque")]
    assert all(p.where.endswith("wind.csv") for p in found)
    assert "`soon`" in str(found[0])


@pytest.mark.parametrize(("sheet", "says"), [
    ("time [s], torque\n0, 0\n1, 1\n", "brackets"), ("time [s], torqe [N*m]\n0, 0\n1, 1\n", "did you mean"),
    ("time [s], torque [kg]\n0, 0\n1, 1\n", "torque"), ("time [s], torque [N*m]\n0, 0\n0, 1\n", "later time"),
    ("time [s], torque [N*m]\n0, 0\n", "two rows"), ("", "head"), ("time [s], torque [N*m]\n-1, 0\n1, 1\n", "at least 0 s"),
    ("time [s], time [s]\n0, 0\n1, 1\n", "once"), ("time [s]\n0\n1\n", "two columns"), (None, "no file")])
def test_what_a_sheet_may_not_be(tmp_path, sheet, says):
    found = problems(tmp_path, sheet)
    assert len(found) == 1
    assert says in str(found[0])
    assert found[0].line > 0
