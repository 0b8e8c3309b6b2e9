"""Colour, where a person reads on a terminal and has not asked for none (NO_COLOR)."""

from __future__ import annotations

import os
from typing import TextIO

from balance.report.amounts import NBSP

NOT_MET = "NOT MET"
"""Mark of a line about something not met; the words carry the meaning, colour only helps."""

BOLD_RED, PLAIN = "\x1b[1;31m", "\x1b[0m"


def wants_colour(stream: TextIO) -> bool:
    """Return whether `stream` is a terminal that may be coloured; any non-empty NO_COLOR forbids it."""
    return stream.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def painted(text: str, stream: TextIO) -> str:
    """Return `text` with its not-met lines in bold red where the stream wants colour, else as it is.

    Blanks that held a number to its unit while lines were broken become common ones, for whoever searches or copies;
    characters that the stream's encoding lacks become question marks rather than an error.
    """
    text = text.replace(NBSP, " ")
    encoding = stream.encoding or "utf-8"
    safe = text.encode(encoding, "replace").decode(encoding)
    if not wants_colour(stream):
        return safe
    return "\n".join(f"{BOLD_RED}{line}{PLAIN}" if NOT_MET in line else line for line in safe.split("\n"))
