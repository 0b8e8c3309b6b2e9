"""The loop in the complex plane: the critical point, the modulus circle and the count of turns around it."""

from __future__ import annotations

import math

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import Circle

from balance.report.figures.palette import DASHED, DOTTED, INK, MIXED, NAVY, PINE, RUST, SLATE, SOLID, WIDTH, ink, sheet
from balance.report.loops import Count, LoopPicture, WorstLoop

TALL = 4.6
"""Inches."""


def draw_nyquist(picture: LoopPicture) -> Figure:
    """Draw L and its mirror image near −1; far parts of the curve run out of the picture."""
    with ink():
        figure, (axes,) = sheet(TALL)
        figure.subplots_adjust(left=0.13, right=0.97, top=0.865, bottom=0.195)
        frame(axes, picture)
        loop = thinned(picture.loop, axes)
        axes.plot(loop.real, loop.imag, color=NAVY, ls=SOLID, label="L, frequency rising along the arrows")
        axes.plot(loop.real, -loop.imag, color=NAVY, ls=DASHED, lw=0.9, label="its mirror image")
        arrows(axes, loop)
        if picture.worst is not None:
            worst_case(axes, picture.worst)
        turn = np.linspace(0.0, math.tau, 181)
        axes.plot(np.cos(turn), np.sin(turn), color=SLATE, ls=DOTTED, lw=1.0, label="gain 1")
        if picture.stable and math.isfinite(picture.modulus):
            axes.add_patch(Circle((-1.0, 0.0), picture.modulus, facecolor=RUST, alpha=0.13, lw=0))
            axes.add_patch(Circle((-1.0, 0.0), picture.modulus, fill=False, edgecolor=RUST, lw=1.1,
                                  label=f"modulus circle, radius {picture.modulus:.3g}"))
            axes.plot([-1.0, picture.nearest.real], [0.0, picture.nearest.imag], color=RUST, lw=1.1)
        axes.plot([-1.0], [0.0], "+", color=INK, ms=9, mew=1.8)
        axes.annotate("−1", (-1.0, 0.0), (-4, 5), textcoords="offset points", ha="right", fontsize=8.5)
        axes.set_xlabel("Real part of L (no unit)")
        axes.set_ylabel("Imaginary part of L (no unit)")
        figure.text(0.03, 0.98, count_words(picture), va="top", fontsize=8, linespacing=1.35)
        figure.legend(loc="lower center", ncols=2, fontsize=7, handlelength=2.6, borderaxespad=0.2)
    return figure


def worst_case(axes: Axes, worst: WorstLoop) -> None:
    """Draw the worst case within the tolerances over the nominal loop, with its own modulus circle."""
    loop = thinned(worst.loop, axes)
    axes.plot(loop.real, loop.imag, color=PINE, ls=MIXED, lw=1.2, label="L, worst case")
    if worst.stable and math.isfinite(worst.modulus):
        axes.add_patch(Circle((-1.0, 0.0), worst.modulus, fill=False, edgecolor=PINE, ls=DASHED, lw=0.9,
                              label=f"modulus circle there, radius {worst.modulus:.3g}"))


def count_words(picture: LoopPicture) -> str:
    """Say the stability count in two lines, that of the worst case beside it."""
    worst = picture.worst
    said = f"Counter-clockwise turns about −1: needed {picture.count.needed}, {found(picture.count)}"
    end = f"The closed loop is {verdict(picture.stable)}"
    if worst is None:
        return f"{said}.\n{end}."
    needed = f"needed {worst.count.needed}, " if worst.count.needed != picture.count.needed else ""
    also = ", also in the worst case" if worst.stable is picture.stable else f"; in the worst case {verdict(worst.stable)}"
    return f"{said}; worst case {needed}{found(worst.count)}.\n{end}{also}."


def found(count: Count) -> str:
    """Say what was counted."""
    return f"found {count.found}".replace("-", "−") if count.sure else "not countable"


def verdict(stable: bool) -> str:
    """Say whether a loop is stable."""
    return "stable" if stable else "NOT stable"


def frame(axes: Axes, picture: LoopPicture) -> None:
    """Choose a window at equal scale that holds the modulus circle, the unit circle's right half and the near curve."""
    radius = picture.modulus if math.isfinite(picture.modulus) else 1.0
    near = picture.loop[np.abs(picture.loop + 1.0) < 2.6]
    left = min(-1.0 - radius, float(np.min(near.real)) if near.size else -2.0) - 0.3
    right = max(0.75, min(float(np.max(near.real)) if near.size else 0.0, 1.6) + 0.2)
    width = right - left
    reach = float(np.max(np.abs(near.imag))) if near.size else 0.0
    half = max(0.5 * width * 0.67 * TALL / (0.84 * WIDTH), radius + 0.15, min(reach + 0.15, 2.0))
    width = max(width, 2.0 * half * 0.84 * WIDTH / (0.67 * TALL))
    axes.set_aspect("equal", adjustable="box", anchor="C")
    axes.set_xlim(right - width, right)
    axes.set_ylim(-half, half)
    axes.axhline(0.0, color=SLATE, lw=0.7)
    axes.axvline(0.0, color=SLATE, lw=0.7)


def thinned(loop: np.ndarray, axes: Axes) -> np.ndarray:
    """Drop what lies far outside the window, so that a page stays small."""
    far = 3.0 * max(abs(v) for v in (*axes.get_xlim(), *axes.get_ylim()))
    return np.where(np.abs(loop) < far, loop, np.nan)


def arrows(axes: Axes, loop: np.ndarray) -> None:
    """Show the sense of rising frequency at two places inside the window."""
    (x0, x1), (y0, y1) = axes.get_xlim(), axes.get_ylim()
    seen = np.flatnonzero((loop.real > x0) & (loop.real < x1) & (loop.imag > y0) & (loop.imag < y1))
    seen = seen[seen < loop.size - 1]
    if seen.size < 20:
        return
    path = np.concatenate([[0.0], np.cumsum(np.abs(np.diff(loop[seen])))])
    for part in (0.35, 0.7):
        k = seen[int(np.searchsorted(path, part * path[-1]))]
        step = loop[k + 1] - loop[k]
        if np.isfinite(step) and abs(step) > 0.0:
            tip = loop[k] + 1e-3 * step / abs(step)
            axes.annotate("", (tip.real, tip.imag), (loop[k].real, loop[k].imag),
                          arrowprops={"arrowstyle": "-|>", "color": NAVY, "lw": 1.0, "shrinkA": 0, "shrinkB": 0})
