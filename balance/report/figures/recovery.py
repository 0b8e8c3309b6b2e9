"""One trial drawn: lean, torque against what is available, stored momentum against capacity, on one time axis."""

from __future__ import annotations

import math

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D as Line
from matplotlib.ticker import MaxNLocator

from balance.report.figures.palette import DASHED, DOTTED, INK, NAVY, RUST, SLATE, SOLID, WASH, ink, plain, sheet
from balance.report.histories import Curves, Event, TrialPicture

LOOKS = {"outward": (NAVY, SOLID), "inward": (RUST, DASHED)}
CLEAR = {"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.85}


def draw_recovery(picture: TrialPicture) -> Figure:
    """Draw one trial: outward full, inward dashed; limits dotted; events as bands or upright lines."""
    with ink():
        figure, axes = sheet(4.7, rows=3, ratios=(1.15, 1, 1), share=True)
        figure.subplots_adjust(left=0.165, right=0.965, top=0.845, bottom=0.098, hspace=0.15)
        lean, torque, momentum = axes
        for curves in picture.curves:
            colour, line = LOOKS.get(curves.toward, (INK, SOLID))
            lean.plot(curves.time, curves.lean, color=colour, ls=line)
            torque.plot(curves.time, curves.torque, color=colour, ls=line)
            momentum.plot(curves.time, curves.momentum, color=colour, ls=line)
        for one, label in zip(axes, ("Lean\n(°)", "Torque about\nthe line (N·m)", "Stored momentum\n(N·m·s)"), strict=True):
            one.set_ylabel(label, fontsize=8)
            one.yaxis.set_label_coords(-0.115, 0.5)
            one.yaxis.set_major_locator(MaxNLocator(4))
            one.axhline(0.0, color=SLATE, lw=0.6, zorder=1)
            mark_events(one, picture.events)
        momentum.set_xlabel(f"Time (s); unchanged until {picture.end:g} s" if cut_short(picture) else "Time (s)")
        momentum.set_xlim(0.0, picture.shown)
        frame_lean(lean, picture)
        frame_torque(torque, picture.curves)
        frame_momentum(momentum, picture.capacity)
        write_events(lean, picture)
        write_key(figure, picture)
    return figure


def cut_short(picture: TrialPicture) -> bool:
    """Tell whether an uneventful end is left out: not so where a fall or a touch-down ended the trial."""
    return picture.shown < picture.end and all(c.time[-1] > 0.98 * picture.end for c in picture.curves)


def write_key(figure: Figure, picture: TrialPicture) -> None:
    """Say above the axes which trial this is, what each line is, and how each direction ended."""
    figure.text(0.03, 0.983, f"{plain(picture.name, 24)} ({plain(picture.stance, 24)})", va="top", fontsize=9, weight="bold")
    for row, curves in enumerate(picture.curves):
        colour, line = LOOKS.get(curves.toward, (INK, SOLID))
        y = 0.92 - 0.037 * row
        figure.add_artist(Line((0.03, 0.1), (y, y), color=colour, ls=line, lw=1.6))
        figure.text(0.115, y, f"{plain(curves.toward)}: {plain(curves.verdict)}", va="center", fontsize=8)
    figure.add_artist(Line((0.6, 0.67), (0.92, 0.92), color=SLATE, ls=DOTTED, lw=1.2))
    figure.text(0.685, 0.92, "limit at that moment", va="center", fontsize=8)


def frame_lean(axes: Axes, picture: TrialPicture) -> None:
    """Fit the lean; a fall or a touch-down is drawn only where the curves come near it."""
    top = max(float(np.max(c.lean)) for c in picture.curves)
    bottom = min(float(np.min(c.lean)) for c in picture.curves)
    marks = [(picture.touch_down, "lifted foot meets the ground")]
    marks += [(side * picture.fell, "counts as fallen") for side in (1.0, -1.0)]
    for lean, words in marks:
        if math.isfinite(lean) and (top > 0.6 * lean > 0.0 or bottom < 0.6 * lean < 0.0):
            axes.axhline(lean, color=SLATE, ls=DOTTED, lw=1.2)
            axes.annotate(words, (1.0, lean), (-2, 2 if lean > 0 else -2), xycoords=axes.get_yaxis_transform(), ha="right",
                          textcoords="offset points", va="bottom" if lean > 0 else "top", fontsize=7, bbox=CLEAR)
            top, bottom = max(top, lean), min(bottom, lean)
    room = max(top - bottom, 1e-3)
    axes.set_ylim(bottom - 0.16 * room, top + 0.22 * room)


def frame_torque(axes: Axes, curves: tuple[Curves, ...]) -> None:
    """Show the torque and its limit, unless the limit is so far away that the torque would look flat."""
    used = max(float(np.max(np.abs(c.torque))) for c in curves)
    limit = max((float(np.max(c.limit[np.isfinite(c.limit)])) for c in curves if np.isfinite(c.limit).any()), default=used)
    far = limit > 6.0 * used > 0.0
    reach = max(used if far else limit, used, 1e-6)
    axes.set_ylim(-1.2 * reach, 1.2 * reach)
    if far:
        axes.text(0.99, 0.04, f"limit {limit:.3g} N·m, off the scale", ha="right", va="bottom", fontsize=7,
                  transform=axes.transAxes, bbox=CLEAR)
        return
    alike = len(curves) < 2 or (curves[0].limit.size == curves[1].limit.size
                                and bool(np.allclose(curves[0].limit, curves[1].limit, rtol=0.01, atol=0.01 * limit)))
    for one in curves[:1] if alike else curves:
        colour = SLATE if alike else LOOKS.get(one.toward, (INK, SOLID))[0]
        for side in (1.0, -1.0):
            axes.plot(one.time, side * one.limit, color=colour, ls=DOTTED, lw=1.2)


def frame_momentum(axes: Axes, capacity: float) -> None:
    """Show the stored momentum inside the capacity."""
    if not math.isfinite(capacity) or capacity <= 0.0:
        return
    for side in (capacity, -capacity):
        axes.axhline(side, color=SLATE, ls=DOTTED, lw=1.2)
    axes.set_ylim(-1.25 * capacity, 1.5 * capacity)
    axes.text(0.99, 0.97, f"capacity ±{capacity:.3g} N·m·s", ha="right", va="top", fontsize=7, transform=axes.transAxes)


def mark_events(axes: Axes, events: tuple[Event, ...]) -> None:
    """A band for what lasts, an upright line for what happens at once."""
    for event in events:
        if event.until > event.since:
            axes.axvspan(event.since, event.until, color=WASH, zorder=0)
        axes.axvline(event.since, color=SLATE, lw=0.9, ls=SOLID, zorder=1)


def write_events(axes: Axes, picture: TrialPicture) -> None:
    """Name the events at the top of the first axes, those at the same time together."""
    said: dict[float, list[str]] = {}
    for event in picture.events:
        said.setdefault(round(event.since, 3), []).append(event.words)
    for row, (since, words) in enumerate(said.items()):
        late = since > 0.6 * picture.shown
        axes.annotate(", ".join(words), (since, 1.0), (-3 if late else 3, 1 - 9.5 * (row % 3)), fontsize=7,
                      xycoords=axes.get_xaxis_transform(), textcoords="offset points", va="top",
                      ha="right" if late else "left", bbox=CLEAR)
