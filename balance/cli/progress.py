"""Progress on the error stream: only after a second, and only where a person watches or asked for it."""

from __future__ import annotations

import sys
import threading
from types import TracebackType

PATIENCE = 1.0
"""Seconds of silence a person does not notice."""


class Progress:
    """Hears each step; says it at once when `wanted`, else after a second when stderr is a terminal."""

    def __init__(self, wanted: bool) -> None:
        self.speaking = wanted
        self.latest = ""
        self.timer = threading.Timer(PATIENCE, self.begin)
        self.timer.daemon = True

    def __enter__(self) -> Progress:
        if not self.speaking and sys.stderr.isatty():
            self.timer.start()
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None) -> None:
        self.timer.cancel()

    def begin(self) -> None:
        """Start to speak, with the step that is under way."""
        self.speaking = True
        if self.latest:
            self.say(self.latest)

    def tell(self, line: str) -> None:
        """Hear that a step begins."""
        self.latest = line
        if self.speaking:
            self.say(line)

    def say(self, line: str) -> None:
        """Write one line on the error stream."""
        print(f"… {line}", file=sys.stderr, flush=True)
