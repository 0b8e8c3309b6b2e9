"""The README says what the program says: its quoted output is run again, its commands are the ones CI runs."""

from __future__ import annotations

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
    given = [*shlex.split(words), *(["--out", str(tmp_path)] if words.startswith("check") else [])]
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
