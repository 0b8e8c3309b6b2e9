"""Ink and paper: the colours, line styles and frame every figure shares.

The colours differ in lightness as well as in hue, so they stay apart in grey print and for colour-blind readers; every
pair of curves differs in line style too.
"""

from __future__ import annotations

import io
import re
from collections.abc import Sequence
from contextlib import AbstractContextManager
from functools import cache

from matplotlib import style
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties, findfont, get_font

INK = "#20262e"
SLATE = "#5d6875"
RULE = "#c9ced4"
WASH = "#eceff1"
NAVY = "#17456e"
RUST = "#c4571a"
PINE = "#2f8f7b"
PLUM = "#4a1638"

SOLID: str = "-"
DASHED = (0, (5, 2))
DOTTED = (0, (1, 1.6))
MIXED = (0, (6, 2, 1.2, 2))

FONT = "DejaVu Sans"
SETTINGS: dict[str, object] = {
    "font.family": [FONT], "font.size": 8.5, "axes.edgecolor": SLATE, "axes.labelcolor": INK, "axes.linewidth": 0.7,
    "axes.labelsize": 8.5, "axes.titlesize": 9.0, "xtick.color": SLATE, "ytick.color": SLATE, "xtick.labelcolor": INK,
    "ytick.labelcolor": INK, "xtick.labelsize": 7.5, "ytick.labelsize": 7.5, "text.color": INK, "legend.fontsize": 7.5,
    "legend.frameon": False, "lines.linewidth": 1.3, "axes.unicode_minus": True, "text.parse_math": False,
    "svg.fonttype": "path", "svg.hashsalt": "balance", "path.simplify": True, "path.simplify_threshold": 0.3,
}
FINE = re.compile(r"(?m)([ML]) (-?\d+\.\d\d)\d* (-?\d+\.\d\d)\d* *$")
"""A point of a path with more than two decimals, at the end of its line."""
USELESS = re.compile(r'(?m)<!--.*?-->|^ +| id="(?:figure|axes|patch|line2d|text|legend|[xy]tick|matplotlib|ax)[^"]*"')
"""Comments, indents and names that nothing in the drawing refers to."""
WIDTH = 4.7
"""Inches of one figure: a phone shows it at four fifths of its size, a desk two beside each other."""


def ink() -> AbstractContextManager[None]:
    """Draw with these settings whatever the reader's own matplotlib settings are; every drawing function works inside."""
    return style.context(["default", SETTINGS])


def sheet(height: float, rows: int = 1, columns: int = 1, width: float = WIDTH, ratios: Sequence[float] | None = None,
          share: bool = False) -> tuple[Figure, list[Axes]]:
    """Start a figure of `rows` × `columns` axes, inside `ink()`."""
    figure = Figure(figsize=(width, height), facecolor="white")
    grid = figure.subplots(rows, columns, sharex="col" if share else False, squeeze=False,
                           gridspec_kw={"height_ratios": ratios} if ratios else None)
    axes = [one for row in grid for one in row]
    for one in axes:
        one.grid(color=RULE, linewidth=0.5)
        one.set_axisbelow(True)
        one.spines[["top", "right"]].set_visible(False)
    return figure, axes


@cache
def drawable() -> frozenset[int]:
    """Code points the font can draw."""
    return frozenset(get_font(findfont(FontProperties(family=FONT))).get_charmap())


def plain(words: str, most: int = 34) -> str:
    """Make a user's text fit to draw: no control characters, only glyphs the font has, no longer than `most`."""
    clean = "".join(c if ord(c) in drawable() and c.isprintable() else "?" for c in words)
    return clean if len(clean) <= most else clean[: most - 1] + "…"


def as_bytes(figure: Figure, kind: str) -> bytes:
    """Draw a figure as "svg" or "png" bytes; the same figure gives the same bytes."""
    store = io.BytesIO()
    with ink():
        silent = ("Date", "Creator", "Format", "Type") if kind == "svg" else ("Software",)
        metadata: dict[str, str | None] = dict.fromkeys(silent)
        figure.savefig(store, format=kind, dpi=160, metadata=metadata)
    return shorter(store.getvalue()) if kind == "svg" else store.getvalue()


def shorter(svg: bytes) -> bytes:
    """Keep two decimals of the points (0.35 µm on paper) and drop the outer document type: pages get a third smaller."""
    text = svg.decode("utf-8")
    text = FINE.sub(r"\1 \2 \3", text[text.index("<svg"):])
    return USELESS.sub("", text).encode("utf-8")
