"""What a command hands back: an exit code, the answer for programs and the text for people."""

from __future__ import annotations

from dataclasses import dataclass, field

from balance.base.errors import InputError, Problem

MET, UNMET, WRONG_INPUT, FAILED, INTERRUPTED = 0, 1, 2, 3, 130
"""Exit codes: all requirements met; one not met; the input is wrong; something else failed; Ctrl-C."""


class UsageError(InputError):
    """The command line itself is wrong."""

    def __init__(self, given: str, allowed: str, hint: str = "") -> None:
        super().__init__([Problem("command line", 0, 0, "", given, allowed, hint)])


@dataclass(frozen=True)
class Outcome:
    """`answer` goes into the `--json` envelope, `text` to the terminal."""

    code: int
    text: str
    answer: dict[str, object] = field(default_factory=dict)


@dataclass(frozen=True)
class Failure:
    """A command that gave no answer: one entry per error for programs, the same as lines for people."""

    code: int
    lines: tuple[str, ...]
    errors: tuple[dict[str, object], ...]


def wrong_input(error: InputError) -> Failure:
    """Tell every problem of a wrong input."""
    return Failure(
        WRONG_INPUT,
        tuple(problem_text(p) for p in error.problems),
        tuple(problem_entry(p) for p in error.problems),
    )


def plain_failure(code: int, line: str) -> Failure:
    """Tell one line that belongs to no file."""
    return Failure(code, (line,), (problem_entry(Problem("", 0, 0, "", line, "")) | {"message": line},))


def problem_text(problem: Problem) -> str:
    """Write a problem over two or three short lines: place and key, given and allowed, hint."""
    place = f"{problem.where}:{problem.line}:{problem.column}" if problem.line else problem.where
    lines = [f"{place} {problem.key}".rstrip(), f"  given:   {problem.given}"]
    if problem.allowed:
        lines.append(f"  allowed: {problem.allowed}")
    if problem.hint:
        lines.append(f"  hint:    {problem.hint}")
    return "\n".join(lines)


def problem_entry(problem: Problem) -> dict[str, object]:
    """Write a problem as one entry of the envelope's `errors`."""
    return {
        "file": problem.where,
        "line": problem.line,
        "column": problem.column,
        "key": problem.key,
        "given": problem.given,
        "allowed": problem.allowed,
        "hint": problem.hint,
        "message": str(problem),
    }


def envelope(command: str, ended: Outcome | Failure) -> dict[str, object]:
    """Return the one JSON object a command prints, for success and failure alike."""
    head: dict[str, object] = {"ok": ended.code in (MET, UNMET), "command": command, "exit_code": ended.code}
    if isinstance(ended, Failure):
        return {**head, "errors": list(ended.errors)}
    return {**head, "errors": [], **ended.answer}
