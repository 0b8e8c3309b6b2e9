"""The README says what the program says: its quoted output is run again, its commands are the ones CI runs."""

from __future__ import annotations

import math
import re
import shlex
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def quoted(text: str) -> list[tuple[str, list[str]]]:
    """Return each quoted command with the lines of output shown for it; `...` stands for lines left out."""
    blocks = re.findall(r"```text\n\$ balance (.*?)\n(.*?)```", text, re.DOTALL)
    return [(words, [line for line in shown.splitlines() if line != "..."]) for words, shown in blocks]


def missing(shown: list[str], out: str) -> list[str]:
    """Return the shown lines that are not in the output, in this order."""
    lines, left = iter(out.splitlines()), []
    for line in shown:
        if not any(line == found for found in lines):
            left.append(line)
            lines = iter(out.splitlines())
    return left


QUOTED = quoted(README)


@pytest.mark.parametrize(("words", "shown"), QUOTED, ids=[words for words, _ in QUOTED])
def test_the_quoted_output_is_the_real_one(command, tmp_path: Path, monkeypatch, words: str, shown: list[str]) -> None:
    monkeypatch.chdir(ROOT)
    given = [*shlex.split(words), *(["--out", str(tmp_path)] if words.startswith(("check", "firmware")) else [])]
    answer = command(*given)
    assert answer.code in (0, 1)
    assert shown
    assert missing(shown, answer.out) == []


def test_output_that_is_not_there_is_told() -> None:
    assert missing(["a", "c"], "a\nb\nc") == []
    assert missing(["a", "x"], "a\nb\nc") == ["x"]
    assert missing(["c", "a"], "a\nb\nc") == ["a"]
    assert quoted("```text\n$ balance plant x\none\n...\ntwo\n```") == [("plant x", ["one", "two"])]


def test_the_readme_opens_with_the_job_and_exactly_two_commands() -> None:
    blocks = re.findall(r"```sh\n(.*?)\n```", README, re.DOTALL)
    assert len(blocks) == 2
    job, tests = blocks
    assert "balance check designs/scout-wheels.yaml" in job
    for word in ("ruff check", "mypy", "pytest"):
        assert word in tests
    for block in blocks:
        assert block.startswith("python3 -m venv .venv && .venv/bin/pip install ")
        assert "\n" not in block
    before = README[: README.index("```sh")].split("\n\n")
    assert before[0].startswith("# ")
    assert before[1].startswith("A legged machine")


def test_ci_runs_the_second_command() -> None:
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    assert "block == 2" in script
    assert "README.md" in script


def test_every_file_and_command_the_readme_names_is_there(command) -> None:
    named = set(re.findall(r"\b(?:plants|designs)/[a-z-]+\.yaml", README))
    for path in named - {"plants/my-rig.yaml", "designs/my-rig.yaml"}:
        assert (ROOT / path).is_file(), path
    for word in set(re.findall(r"`balance ([a-z]+)", README)):
        assert command(word, "--help").code == 0


def trial(answer: dict, name: str) -> dict:
    """Return the outward run of a trial."""
    return next(t for t in answer["trials"] if t["name"] == name and t["toward"] == "outward")


MEASURED = {
    "phase margin, deg": lambda margins, trials: margins["phase_deg"],
    "gain may fall to": lambda margins, trials: margins["gain_lower"],
    "gain may rise to": lambda margins, trials: margins["gain_upper"],
    "delay margin, ms": lambda margins, trials: 1e3 * margins["delay_s"],
    "Ms": lambda margins, trials: margins["peak_sensitivity"],
    "peak lean in the gust, deg": lambda margins, trials: math.degrees(trial(trials, "gust")["peak_lean_rad"]),
    "time at the torque limit after letting go, s": lambda margins, trials: trial(trials, "let-go")["torque_saturated_s"],
    "momentum used after letting go, share": lambda margins, trials: trial(trials, "let-go")["momentum_used"],
    "settling after the weight slips, s": lambda margins, trials: trial(trials, "weight-slips")["settling_time_s"],
}


def test_the_comparison_of_lqr_and_pid_is_measured(command) -> None:
    table = README[README.index("| bench rig |"):].split("\n\n")[0].splitlines()[2:]
    rows = {cells[1].strip(): cells[2:4] for cells in (line.split("|") for line in table)}
    assert set(rows) == set(MEASURED)
    for column, name in enumerate(("bench-rig", "bench-rig-pid")):
        margins = command("gains", ROOT / "designs" / f"{name}.yaml", "--json").answer()["stances"][0]["margins"]
        trials = command("recover", ROOT / "designs" / f"{name}.yaml", "--json").answer()
        for words, value in MEASURED.items():
            # written with three digits: half a unit of the third is at most 0.5 % of the value
            assert float(rows[words][column]) == pytest.approx(value(margins, trials), rel=0.005), (name, words)


def test_what_retuning_gains_is_measured(command, tmp_path: Path) -> None:
    found = re.search(r"bench rig from ([\d.]+) to ([\d.]+), with every trial", README.replace("\n", " "))
    before, after = (float(number) for number in found.groups())
    text = (ROOT / "designs" / "bench-rig.yaml").read_text(encoding="utf-8").replace("../plants", str(ROOT / "plants"))
    (tmp_path / "d.yaml").write_text(text.replace("law: lqr", "law: lqr\n  retune: robust"), encoding="utf-8")
    answer = command("check", tmp_path / "d.yaml", "--out", tmp_path, "--json").answer()
    assert answer["passed"]
    told = answer["gains"]["stances"][0]["retuned"]
    # three digits: half a unit of the third
    assert told["worst_disk_before"] == pytest.approx(before, abs=5e-4)
    assert told["worst_disk_after"] == pytest.approx(after, abs=5e-3)
