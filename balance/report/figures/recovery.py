"""One trial drawn: lean, torque against what is available, stored momentum against capacity, on one time axis."""

from __future__ import annotations

import math

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D as Line

from balance.report.figures.palette import DASHED, DOTTED, INK, NAVY, RUST, SLATE, SOLID, WASH, ink, plain, sheet
from balance.report.histories import Curves, Event, TrialPicture

LOOKS = {"outward": (NAVY, SOLID), "inward": (RUST, DASHED)}


def draw_recovery(picture: TrialPicture) -> Figure:
    """Draw one trial: outward full, inward dashed; limits dotted; events as bands or upright lines."""
    with ink():
        figure, (lean, torque, momentum) = sheet(4.5, rows=3, ratios=(1.15, 1, 1), share=True)
        figure.subplots_adjust(left=0.155, right=0.97, top=0.86, bottom=0.1, hspace=0.16)
        for curves in picture.curves:
            colour, line = LOOKS.get(curves.toward, (INK, SOLID))
            lean.plot(curves.time, curves.lean, color=colour, ls=line)
            torque.plot(curves.time, curves.torque, color=colour, ls=line)
            momentum.plot(curves.time, curves.momentum, color=colour, ls=line)
            for side in (1.0, -1.0):
                torque.plot(curves.time, side * curves.limit, color=colour, ls=DOTTED, lw=0.9)
        lean.set_ylabel("Lean (°)")
        torque.set_ylabel("Torque (N·m)")
        momentum.set_ylabel("Momentum (N·m·s)")
        momentum.set_xlabel("Time (s)")
        momentum.set_xlim(0.0, picture.end)
        frame_lean(lean, picture)
        frame_torque(torque, picture.curves)
        frame_momentum(momentum, picture.capacity)
        for axes in (lean, torque, momentum):
            axes.axhline(0.0, color=SLATE, lw=0.6, zorder=1)
            mark_events(axes, picture.events)
        write_events(lean, picture)
        figure.align_ylabels()
        write_key(figure, picture)
    return figure


def write_key(figure: Figure, picture: TrialPicture) -> None:
    """Say above the axes what each line is, and how each direction ended."""
    from_top = 0.985
    for row, curves in enumerate(picture.curves):
        colour, line = LOOKS.get(curves.toward, (INK, SOLID))
        y = from_top - 0.018 - 0.04 * row
        figure.add_artist(Line((0.03, 0.1), (y, y), color=colour, ls=line, lw=1.6))
        figure.text(0.115, y, f"{plain(curves.toward)}: {plain(curves.verdict)}", va="center", fontsize=8)
    y = from_top - 0.018
    figure.add_artist(Line((0.62, 0.69), (y, y), color=SLATE, ls=DOTTED, lw=1.1))
    figure.text(0.705, y, "limit at that moment", va="center", fontsize=8)


def frame_lean(axes: Axes, picture: TrialPicture) -> None:
    """Fit the lean; a fall or a touch-down is drawn only where the curves come near it."""
    top = max(float(np.max(c.lean)) for c in picture.curves)
    bottom = min(float(np.min(c.lean)) for c in picture.curves)
    room = 0.12 * max(top - bottom, 1e-3)
    if math.isfinite(picture.touch_down) and bottom < 0.5 * picture.touch_down:
        axes.axhline(picture.touch_down, color=INK, ls=DOTTED, lw=1.1)
        axes.text(picture.end, picture.touch_down, "lifted foot meets the ground ", ha="right", va="bottom", fontsize=7)
        bottom = min(bottom, picture.touch_down)
    axes.set_ylim(bottom - room, top + 1.6 * room)


def frame_torque(axes: Axes, curves: tuple[Curves, ...]) -> None:
    """Show the torque and its limit, unless the limit is so far away that the torque would be flat."""
    used = max(float(np.max(np.abs(c.torque))) for c in curves)
    limit = max((float(np.max(c.limit[np.isfinite(c.limit)])) for c in curves if np.isfinite(c.limit).any()), default=used)
    reach = limit if limit < 6.0 * used else used
    axes.set_ylim(-1.15 * max(reach, 1e-6), 1.15 * max(reach, 1e-6))
    if reach < limit:
        axes.text(0.99, 0.03, f"limit {limit:.3g} N·m, off the scale", ha="right", va="bottom", fontsize=7,
                  transform=axes.transAxes)


def frame_momentum(axes: Axes, capacity: float) -> None:
    """Show the stored momentum inside the capacity."""
    if not math.isfinite(capacity) or capacity <= 0.0:
        return
    for side in (capacity, -capacity):
        axes.axhline(side, color=SLATE, ls=DOTTED, lw=1.1)
    axes.set_ylim(-1.2 * capacity, 1.2 * capacity)
    axes.text(0.99, 0.95, f"capacity ±{capacity:.3g} N·m·s", ha="right", va="top", fontsize=7, transform=axes.transAxes,
              bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8})


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
        late = since > 0.6 * picture.end
        axes.annotate(", ".join(words), (since, 1.0), (-3 if late else 3, -2 - 9 * (row % 3)), fontsize=7,
                      xycoords=axes.get_xaxis_transform(), textcoords="offset points", va="top",
                      ha="right" if late else "left",
                      bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6, "alpha": 0.85})
