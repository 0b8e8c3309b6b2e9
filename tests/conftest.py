"""What every room's tests share: the checkout's folder, and the command line run in this process."""

from __future__ import annotations

import json
import os
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from balance.cli.main import main  # also keeps the linear-algebra library to one thread, before numpy is loaded

ROOT = Path(__file__).resolve().parent.parent


@dataclass(frozen=True)
class Said:
    """What one command said: exit code, standard output, error stream."""

    code: int
    out: str
    err: str

    def answer(self) -> dict[str, object]:
        """Return the JSON envelope; anything that strict JSON does not know is refused."""
        read = json.loads(self.out, parse_constant=_refuse)
        assert isinstance(read, dict)
        return read


def _refuse(word: str) -> float:
    raise AssertionError(f"{word} is no JSON")


Command = Callable[..., Said]


@pytest.fixture
def command(capsys: pytest.CaptureFixture[str]) -> Command:
    """Run `balance WORDS…` in this process."""

    def run(*words: str | os.PathLike[str]) -> Said:
        capsys.readouterr()
        code = main([os.fspath(word) for word in words])
        out, err = capsys.readouterr()
        return Said(code, out, err)

    return run


@pytest.fixture(scope="session")
def root() -> Path:
    """Return the folder of the checkout."""
    return ROOT
