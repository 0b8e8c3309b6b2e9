"""What a long piece of work may say while it runs."""

from __future__ import annotations

from collections.abc import Callable

Tell = Callable[[str], None]
"""Hears one short line at the start of each step."""


def quiet(line: str) -> None:
    """Say nothing."""
