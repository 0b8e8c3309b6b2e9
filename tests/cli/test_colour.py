"""Colour only on a terminal, never with NO_COLOR, and never the only bearer of meaning."""

from __future__ import annotations

import io

import pytest

from balance.cli.colour import NOT_MET, painted


class Screen(io.StringIO):
    """A stream that says what it is."""

    def __init__(self, terminal: bool, encoding: str = "utf-8") -> None:
        super().__init__()
        self.terminal = terminal
        self.named = encoding

    def isatty(self) -> bool:
        return self.terminal

    @property
    def encoding(self) -> str:
        return self.named


TEXT = f"first line\nphase margin  12°  {NOT_MET}\nlast line"


@pytest.mark.parametrize(
    ("terminal", "no_color", "term", "coloured"),
    [(True, "", "xterm", True), (False, "", "xterm", False), (True, "1", "xterm", False), (True, "", "dumb", False)],
)
def test_when_there_is_colour(monkeypatch, terminal: bool, no_color: str, term: str, coloured: bool) -> None:
    monkeypatch.setenv("NO_COLOR", no_color)
    monkeypatch.setenv("TERM", term)
    shown = painted(TEXT, Screen(terminal))
    assert ("\x1b[" in shown) is coloured
    assert NOT_MET in shown
    assert shown.split("\n")[0] == "first line"


def test_a_stream_without_the_letters_gets_question_marks() -> None:
    shown = painted("α −1 °", Screen(False, "ascii"))
    assert shown == "? ?1 ?"


def test_units_stay_searchable() -> None:
    assert painted("12\u00a0N·m", Screen(False)) == "12 N·m"
