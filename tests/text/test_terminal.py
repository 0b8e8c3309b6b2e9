"""What a person reads on the terminal: 80 columns, no colour codes in a file, plain words, every reason given."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
DESIGNS = sorted(path.stem for path in (ROOT / "designs").glob("*.yaml"))
COLUMNS = 80


@pytest.mark.parametrize("name", DESIGNS)
@pytest.mark.parametrize("word", ["plant", "gains", "recover"])
def test_every_answer_fits_80_columns_without_colour_codes(command, word: str, name: str) -> None:
    answer = command(word, ROOT / "designs" / f"{name}.yaml")
    assert answer.err == ""
    lines = answer.out.splitlines()
    assert [line for line in lines if len(line) > COLUMNS] == []
    assert "\x1b" not in answer.out
    assert not re.search(r"\b(nan|inf|None|True|False)\b", answer.out), "a program's word where a person reads"
    assert [line for line in lines if line != line.rstrip()] == []


def test_a_plant_shows_the_share_and_the_loss_of_every_wheel(command) -> None:
    out = command("plant", ROOT / "plants" / "trellis-scout.yaml").out
    rows = [line.split() for line in out.splitlines() if "-wheel" in line]
    assert len(rows) == 6  # two wheels, three lines
    square = [row for row in rows if "square" in row]
    assert [row[:2] for row in square] == [["on-left-right", "long-wheel"]]
    # a wheel askew by 30 degrees keeps cos 30 = 0.866 and loses 13 %, one askew by 60 degrees loses half
    assert {row[2].lstrip("+−")[:4]: " ".join(row[3:5]) for row in rows if "%" in row} == {"0.86": "13 %", "0.50": "50 %"}


def test_a_failed_trial_says_what_ran_out(command) -> None:
    answer = command("recover", ROOT / "designs" / "bench-rig-short.yaml")
    assert answer.code == 1
    told = [line for line in answer.out.splitlines() if line.startswith("NOT MET: ")]
    assert told
    assert any("limit reached" in line or "limit" in line for line in told)
    assert answer.out.splitlines()[-1].endswith("requirements NOT MET")


def test_a_passed_one_says_so_last(command) -> None:
    answer = command("recover", ROOT / "designs" / "bench-rig.yaml")
    assert answer.code == 0
    assert "NOT MET" not in answer.out
    assert re.fullmatch(r"all \d+ requirements met", answer.out.splitlines()[-1])


def test_errors_say_where_what_and_what_is_allowed(command, tmp_path: Path) -> None:
    path = tmp_path / "m.yaml"
    path.write_text("format: 1\nmachine: m\nlumped: {mass: 3, height: 1 m, inertia: 1 kg*m^2}\nstabilisers: {}\n",
                    encoding="utf-8")
    lines = command("plant", path).err.splitlines()
    assert lines[0].startswith(f"{path}:3:")
    assert [line.split(":")[0].strip() for line in lines[1:3]] == ["given", "allowed"]
