"""Names in C, and names a person chose as comments and manifests can bear them."""

from __future__ import annotations

import re
from collections.abc import Sequence

STANDARD_HEADERS = frozenset(
    (
        "assert",
        "complex",
        "ctype",
        "errno",
        "fenv",
        "float",
        "inttypes",
        "iso646",
        "limits",
        "locale",
        "math",
        "setjmp",
        "signal",
        "stdarg",
        "stdbool",
        "stddef",
        "stdint",
        "stdio",
        "stdlib",
        "string",
        "tgmath",
        "time",
        "wchar",
        "wctype",
    )
)
"""C99's own headers (ISO/IEC 9899:1999, 7.1.2, from memory): `#include <stdint.h>` must not find a design's header."""


def identifier(name: str) -> str:
    """Return a name as C knows names: letters, digits, underscores, no digit first, no header of C's own."""
    plain = re.sub(r"[^A-Za-z0-9]+", "_", name).strip("_").lower() or "law"
    return f"law_{plain}" if plain[0].isdigit() or plain in STANDARD_HEADERS else plain


def tame(text: str) -> str:
    """Return a person's text as it may stand in a C comment, a quoted word of a manifest and a line of Markdown.

    Only letters, digits, spaces and ``._+,()-`` of ASCII are kept: nothing can end the comment it stands in.
    """
    return re.sub(r"[^A-Za-z0-9 ._+,()-]", "_", text)


def macro(name: str) -> str:
    """Return a name in capitals for a macro."""
    return re.sub(r"[^A-Za-z0-9]", "_", name).upper()


def clashing(names: Sequence[str]) -> str:
    """Return two names that are one in C, in words; empty where all differ."""
    known: dict[str, str] = {}
    for name in names:
        other = known.setdefault(macro(name), name)
        if other != name:
            return f"`{other}` and `{name}` are the same name in C: rename one"
    return ""
