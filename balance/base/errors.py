"""One shape for everything that can be wrong with an input.

A `Problem` says where, what was given, what is allowed and how to mend it; an `InputError` carries all the
problems of one input at once.  "Cannot be balanced" is never an error: it is a verdict (see `balance.check`).
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Problem:
    """One thing wrong with an input.

    `where` is a file path (or a command line), `line` and `column` count from 1 (0: not in a file), `key` is
    the dotted path inside the file.
    """

    where: str
    line: int
    column: int
    key: str
    given: str
    allowed: str
    hint: str = ""

    def __str__(self) -> str:
        place = f"{self.where}:{self.line}:{self.column}" if self.line else self.where
        named = f"{place} {self.key}" if self.key else place
        text = f"{named}: given {self.given}; allowed: {self.allowed}"
        return f"{text}. Hint: {self.hint}" if self.hint else text


class InputError(Exception):
    """The input is wrong; `problems` lists everything found, sorted by line."""

    def __init__(self, problems: list[Problem]) -> None:
        self.problems = tuple(sorted(problems, key=lambda p: (p.where, p.line, p.column)))
        super().__init__("\n".join(str(p) for p in self.problems))
