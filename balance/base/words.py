"""Names in messages: the nearest known one, and lists of them."""

from __future__ import annotations

import difflib
from collections.abc import Iterable

MOST_LISTED = 24


def nearest(word: str, known: Iterable[str]) -> str:
    """Return the known name most like `word`; "" where none is near.  Capitals, `-` and `_` do not count."""
    names = list(known)
    plain = {_plain(name): name for name in reversed(names)}
    if _plain(word) in plain:
        return plain[_plain(word)]
    close = difflib.get_close_matches(_plain(word), list(plain), n=1, cutoff=0.6)
    return plain[close[0]] if close else ""


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """Return the hint that names the nearest known word; "" where none is near."""
    near = nearest(word, known)
    return f"did you mean `{near}`?" if near else ""


def listed(names: Iterable[str]) -> str:
    """Return names in code marks, separated by commas; long lists are cut."""
    shown = [f"`{name}`" for name in names]
    more = len(shown) - MOST_LISTED
    return ", ".join(shown[:MOST_LISTED]) + (f" and {more} more" if more > 0 else "")


def _plain(word: str) -> str:
    return word.strip().lower().replace("-", " ").replace("_", " ")
