"""Ten kinds of wrong input, each made by one edit of a shipped file: one clear error at its line, exit code 2.

The tenth, a wheel square to the line, is no error but an answer: exit code 1.  The shipped files, unedited, are the twins:
`test_scenarios.py` shows that they pass.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest


@dataclass(frozen=True)
class Mistake:
    """One edit of one file, and what the error must name."""

    name: str
    file: str
    old: str
    new: str
    key: str
    says: tuple[str, ...]


MISTAKES = (
    Mistake("unit missing", "plants/trellis-scout.yaml", "mass: 260 g", "mass: 260",
            "body.computer.mass", ("260", "kg")),
    Mistake("unit wrong", "plants/trellis-scout.yaml", "mass: 260 g", "mass: 260 mm",
            "body.computer.mass", ("260 mm", "mass")),
    Mistake("unknown key with a near name", "plants/trellis-scout.yaml", "friction: 0.7", "fricton: 0.7",
            "feet.fricton", ("did you mean `friction`",)),
    Mistake("duplicate key", "plants/trellis-scout.yaml", "  left:\n    hip:", "  left:\n    knee: inward\n    hip:",
            "legs.left.knee", ("a second time", "line")),
    Mistake("negative mass", "plants/trellis-scout.yaml", "mass: 340 g", "mass: -340 g",
            "body.mast.mass", ("-340 g", "more than 0")),
    Mistake("unphysical inertia", "plants/trellis-scout.yaml", "zz: 5e-4 kg*m^2", "zz: 5e-3 kg*m^2",
            "body.camera.inertia", ("0.005",)),
    Mistake("leg that cannot reach its foot", "plants/trellis-scout.yaml", "lifted: {fore: [200 mm, 0 mm, 35 mm]}",
            "lifted: {fore: [420 mm, 0 mm, 35 mm]}", "stances.on-left-right.lifted.fore", ("400 mm",)),
    Mistake("feet in one place", "plants/trellis-scout.yaml",
            "down:   {left: [-130 mm, 225.2 mm, 0 mm], right: [-130 mm, -225.2 mm, 0 mm]}",
            "down:   {left: [-130 mm, 0 mm, 0 mm], right: [-130 mm, 0 mm, 0 mm]}",
            "stances.on-left-right.down", ("one place",)),
    Mistake("stance that does not exist", "designs/scout-wheels.yaml", "stance: every", "stance: on-left-rigt",
            "stance", ("on-left-rigt", "did you mean `on-left-right`")),
)


def edited(root: Path, folder: Path, mistake: Mistake) -> Path:
    """Copy the scenario into `folder` with one edit; return the design file."""
    for name in ("plants/trellis-scout.yaml", "designs/scout-wheels.yaml"):
        text = (root / name).read_text(encoding="utf-8")
        if name == mistake.file:
            assert text.count(mistake.old) == 1, f"{mistake.old!r} stands {text.count(mistake.old)} times in {name}"
            text = text.replace(mistake.old, mistake.new)
        (folder / name).parent.mkdir(exist_ok=True)
        (folder / name).write_text(text, encoding="utf-8")
    return folder / "designs" / "scout-wheels.yaml"


@pytest.mark.parametrize("mistake", MISTAKES, ids=[m.name for m in MISTAKES])
def test_each_mistake_is_one_clear_error(command, root: Path, tmp_path: Path, mistake: Mistake) -> None:
    design = edited(root, tmp_path, mistake)
    answer = command("check", design, "--json")
    assert answer.code == 2
    errors = answer.answer()["errors"]
    assert len(errors) == 1, errors
    error = errors[0]
    assert Path(error["file"]) == tmp_path / mistake.file
    lines = (tmp_path / mistake.file).read_text(encoding="utf-8").split("\n")
    at_fault = "knee: outward" if mistake.name == "duplicate key" else mistake.new  # the second of the two is told
    assert at_fault in lines[error["line"] - 1]
    assert error["key"].startswith(mistake.key)
    for word in mistake.says:
        assert word in error["message"]
    assert error["allowed"]
    assert not (tmp_path / "designs" / "scout-wheels").exists()  # no half-made report
    spoken = command("check", design)
    assert (spoken.code, spoken.out) == (2, "")
    assert f"{error['line']}:" in spoken.err


def test_all_errors_of_a_file_come_at_once_sorted_by_line(command, root: Path, tmp_path: Path) -> None:
    several = (MISTAKES[5], MISTAKES[2], MISTAKES[0])
    design = edited(root, tmp_path, several[0])
    plant = tmp_path / "plants" / "trellis-scout.yaml"
    text = plant.read_text(encoding="utf-8")
    for mistake in several[1:]:
        text = text.replace(mistake.old, mistake.new)
    plant.write_text(text, encoding="utf-8")
    errors = command("check", design, "--json").answer()["errors"]
    assert [e["key"] for e in errors] == ["body.computer.mass", "body.camera.inertia", "feet.fricton"]


def test_a_wheel_square_to_the_line_is_an_answer(command, root: Path, tmp_path: Path) -> None:
    text = (root / "plants" / "bench-rig.yaml").read_text(encoding="utf-8")
    assert text.count("axis: [1, 0, 0]") == 1
    (tmp_path / "bench-rig.yaml").write_text(text.replace("axis: [1, 0, 0]", "axis: [0, 0, 1]"), encoding="utf-8")
    design = (root / "designs" / "bench-rig.yaml").read_text(encoding="utf-8")
    (tmp_path / "d.yaml").write_text(design.replace("../plants/", ""), encoding="utf-8")
    for name in ("plant", "gains", "recover", "check"):
        answer = command(name, tmp_path / "d.yaml", "--json")
        assert answer.code == 1, answer.out
        assert answer.answer()["ok"] is True
        assert "cannot act about this line" in command(name, tmp_path / "d.yaml").out
