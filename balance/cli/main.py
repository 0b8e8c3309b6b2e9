"""The command `balance`: read the words, run the command, print once, leave with the right code."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Sequence
from typing import TextIO

from balance.base.errors import InputError
from balance.cli.colour import painted
from balance.cli.outcome import (
    FAILED,
    INTERRUPTED,
    Failure,
    Outcome,
    envelope,
    plain_failure,
    wrong_input,
)
from balance.cli.parser import COMMANDS, read_words

# Matrices here have a dozen rows: threads of the linear-algebra library only wait for each other, and on a busy machine
# they made `gains` ten times slower (measured). Said before anything loads it; whoever sets it keeps their own.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; `argv` are the words after `balance` (the shell's own by default). Returns the exit code."""
    words = list(sys.argv[1:] if argv is None else argv)
    try:
        ended, text = attempt(words)
        show(text, sys.stdout if isinstance(ended, Outcome) or "--json" in words else sys.stderr)
    except BrokenPipeError:
        _drop_stdout()
        return FAILED
    except KeyboardInterrupt:
        return INTERRUPTED
    except SystemExit as leaving:  # argparse after --help and --version
        return int(leaving.code or 0)
    return ended.code


def attempt(words: Sequence[str]) -> tuple[Outcome | Failure, str]:
    """Run the command and write its answer; with `--debug`, errors that nobody foresaw pass through."""
    try:
        asked = read_words(words)
        from balance.cli.commands import run

        ended: Outcome | Failure = run(asked)
        return ended, written(words, ended)
    except InputError as error:
        ended = wrong_input(error)
    except KeyboardInterrupt:
        ended = plain_failure(INTERRUPTED, "interrupted; no half-written file is left")
    except BrokenPipeError:
        raise
    except Exception as error:
        if "--debug" in words:
            raise
        ended = plain_failure(FAILED, f"{_in_words(error)} (--debug shows where)")
    return ended, written(words, ended)


def written(words: Sequence[str], ended: Outcome | Failure) -> str:
    """Return the answer as one JSON object, or as text for people."""
    if "--json" in words:
        command = next((w for w in words if w in COMMANDS), "")
        return json.dumps(envelope(command, ended), allow_nan=False, ensure_ascii=False, indent=1)
    return "\n".join(ended.lines) if isinstance(ended, Failure) else ended.text


def show(text: str, stream: TextIO) -> None:
    """Print the answer at once."""
    print(painted(text, stream), file=stream, flush=True)


def _in_words(error: Exception) -> str:
    if isinstance(error, OSError) and error.strerror:
        return f"{error.strerror}: {error.filename}" if error.filename else error.strerror
    return f"{type(error).__name__}: {' '.join(str(error).split())}"


def _drop_stdout() -> None:
    """Point the output at nothing, lest the interpreter's last flush complain about the closed pipe."""
    try:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except (OSError, ValueError):
        return


if __name__ == "__main__":
    sys.exit(main())
