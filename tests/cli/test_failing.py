"""What happens when a command is interrupted, meets a closed pipe, or fails in a way nobody foresaw."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

import balance.cli.commands as commands
from balance.cli.main import main


def raising(error: BaseException):
    """Return a command that ends in `error`."""

    def run(asked: object) -> None:
        raise error

    return run


@pytest.mark.parametrize(
    ("error", "code", "said"),
    [
        (KeyboardInterrupt(), 130, "interrupted"),
        (ZeroDivisionError("division by zero"), 3, "ZeroDivisionError: division by zero"),
        (PermissionError(13, "Permission denied", "/x/report.html"), 3, "Permission denied: /x/report.html"),
    ],
)
def test_failures_are_one_line_and_a_code(command, monkeypatch, error: BaseException, code: int, said: str) -> None:
    monkeypatch.setattr(commands, "run", raising(error))
    answer = command("plant", "x.yaml")
    assert answer.code == code
    assert answer.out == ""
    assert said in answer.err
    assert len(answer.err.splitlines()) == 1


def test_failures_come_in_the_envelope(command, monkeypatch) -> None:
    monkeypatch.setattr(commands, "run", raising(ValueError("odd")))
    answer = command("plant", "x.yaml", "--json")
    assert answer.code == 3
    envelope = answer.answer()
    assert envelope["ok"] is False
    assert "ValueError: odd" in envelope["errors"][0]["message"]


def test_an_answer_that_cannot_be_written_is_a_failure_not_a_traceback(command, monkeypatch) -> None:
    from balance.cli.outcome import Outcome

    monkeypatch.setattr(commands, "run", lambda asked: Outcome(0, "text", {"value": float("nan")}))
    answer = command("plant", "x.yaml", "--json")
    assert answer.code == 3
    assert answer.answer()["errors"]


def test_debug_shows_the_traceback(monkeypatch) -> None:
    monkeypatch.setattr(commands, "run", raising(ZeroDivisionError("division by zero")))
    with pytest.raises(ZeroDivisionError):
        main(["plant", "x.yaml", "--debug"])


def test_a_closed_pipe_is_no_traceback(root: Path) -> None:
    run = [sys.executable, "-m", "balance", "schema", "machine", "--json"]
    # `head -c 0` closes the pipe at once; the schema is far longer than a pipe's first write needs
    process = subprocess.Popen(run, cwd=root, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()
    said = process.stderr.read().decode()
    process.stderr.close()
    process.wait(timeout=60)  # an interpreter's start takes well under a second; a minute means it hangs
    assert said == ""
