"""Progress: silent unless it lasts and a person watches, or it was asked for; never on the standard output."""

from __future__ import annotations

import io
import sys

import pytest

from balance.cli.progress import Progress


class Screen(io.StringIO):
    """An error stream that says it is a terminal."""

    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize(
    ("stream", "wanted", "waits", "said"),
    [
        (Screen(), False, True, ["… designing", "… trying"]),
        (Screen(), False, False, []),
        (io.StringIO(), False, True, []),
        (io.StringIO(), True, False, ["… designing", "… trying"]),
    ],
    ids=["terminal, long", "terminal, short", "file, long", "asked for"],
)
def test_when_it_speaks(monkeypatch, stream: io.StringIO, wanted: bool, waits: bool, said: list[str]) -> None:
    monkeypatch.setattr(sys, "stderr", stream)
    with Progress(wanted) as progress:
        progress.tell("designing")
        if waits and progress.timer.is_alive():
            progress.begin()  # what the timer does after a second
        progress.tell("trying")
    assert stream.getvalue().splitlines() == said


def test_the_timer_ends_with_the_work(monkeypatch) -> None:
    monkeypatch.setattr(sys, "stderr", Screen())
    with Progress(False) as progress:
        assert progress.timer.is_alive()
    progress.timer.join(timeout=5)  # cancelled: ends at once; alive after five seconds it was not
    assert not progress.timer.is_alive()
