"""The two views of a machine, each drawn into given axes; millimetres at equal scale."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.lines import Line2D
from matplotlib.patches import Polygon
from numpy.typing import NDArray

from balance.report.figures.palette import (
    DASHED,
    DOTTED,
    INK,
    MIXED,
    NAVY,
    PINE,
    PLUM,
    RUST,
    SLATE,
    SOLID,
    WASH,
    plain,
)
from balance.report.outline import Axle, Drawing, View

Array = NDArray[np.float64]
CLEAR = {"facecolor": "white", "edgecolor": "none", "pad": 0.5, "alpha": 0.8}


def fill_top(axes: Axes, drawing: Drawing) -> None:
    """Draw the machine from above."""
    view = drawing.top
    size = frame(axes, view)
    if len(view.polygon) > 2:
        axes.add_patch(Polygon(view.polygon, closed=True, fill=False, edgecolor=SLATE, ls=DOTTED, lw=1.1, zorder=2))
    draw_body(axes, view)
    axes.plot(*view.line.T, color=RUST, lw=2.4, zorder=6, solid_capstyle="round")
    start = 0.86 * view.line[0] + 0.14 * view.line[1]
    tip = start + 0.13 * size * drawing.outward
    axes.annotate("", tip, start, arrowprops={"arrowstyle": "-|>", "color": RUST, "lw": 1.2, "shrinkA": 0}, zorder=7)
    axes.annotate("outward", tip, tuple(4 * drawing.outward), textcoords="offset points", fontsize=7, color=RUST, zorder=9,
                  ha=side_of(drawing.outward[0]), va=level_of(drawing.outward[1]), bbox=CLEAR)
    draw_axles(axes, view, size)
    draw_feet(axes, view)
    draw_centre(axes, view)
    axes.set_xlabel("x, forward (mm)")
    axes.annotate(at_rest_words(drawing), (0.0, 0.0), (0.0, -38.0), xycoords="axes fraction", textcoords="offset points",
                  fontsize=7, color=INK)
    axes.set_ylabel("y, left (mm)")


def decimals(length: float) -> int:
    """Tenths of a millimetre matter only below ten."""
    return 1 if abs(length) < 10.0 else 0


def at_rest_words(drawing: Drawing) -> str:
    """Say how firmly the machine stands in this pose with all feet down, and how far its trunk is from balance on two."""
    said = []
    if np.isfinite(drawing.margin):
        side = "inside" if drawing.margin >= 0.0 else "outside"
        said.append(f"all feet down: {abs(drawing.margin):.{decimals(drawing.margin)}f} mm {side} the edge")
    if np.isfinite(drawing.shift):
        said.append(f"to balance: trunk {signed(drawing.shift, decimals(drawing.shift))} mm outward")
    return "; ".join(said)


def fill_side(axes: Axes, drawing: Drawing) -> None:
    """Draw the machine along its contact line: the line is a point, outward is to the right."""
    view = drawing.side
    size = frame(axes, view)
    axes.axhline(0.0, color=INK, lw=1.0, zorder=2)
    draw_body(axes, view)
    draw_axles(axes, view, size)
    draw_feet(axes, view)
    axes.plot([0.0, 0.0], [0.0, 1.12 * max(drawing.height, 1.0)], color=SLATE, ls=DOTTED, lw=1.0, zorder=6)
    axes.plot([0.0, view.centre[0]], [0.0, view.centre[1]], color=NAVY, lw=1.0, zorder=6)
    axes.plot([0.0], [0.0], "o", color=RUST, ms=6, zorder=8)
    if np.isfinite(drawing.hinge):
        axes.plot([0.0], [drawing.hinge], "s", mfc="white", mec=PLUM, mew=1.4, ms=7, zorder=8)
    draw_centre(axes, view)
    axes.set_xlabel("Across the line, outward (mm)")
    axes.set_ylabel("Above the line (mm)")
    offset, lean = (signed(drawing.offset, 1), signed(drawing.balanced_lean, 2))
    words = f"centre of mass {drawing.height:.0f} mm up, {offset} mm outward; balanced lean {lean}°"
    axes.set_title(words, loc="left", fontsize=7.5)


def frame(axes: Axes, view: View) -> float:
    """Fit everything at equal scale and return the size of the larger side in mm."""
    pieces = [*view.parts, *view.rotors, *(leg.joints for leg in view.legs),
              *(place.reshape(1, 2) for _, _, place in view.feet), view.line,
              view.centre.reshape(1, 2), view.balanced.reshape(1, 2), *(a.at.reshape(1, 2) for a in view.axles)]
    cloud = np.concatenate([p for p in pieces if len(p)])
    low, high = cloud.min(axis=0), cloud.max(axis=0)
    size = float(max(*(high - low), 1.0))
    middle = (low + high) / 2
    half = 0.66 * size
    axes.set_aspect("equal", adjustable="box")
    axes.set_xlim(middle[0] - half, middle[0] + half)
    axes.set_ylim(middle[1] - half, middle[1] + half)
    return size


def draw_body(axes: Axes, view: View) -> None:
    """Body parts, rotors and legs."""
    for outline in view.parts:
        if len(outline) > 2:
            axes.add_patch(Polygon(outline, closed=True, facecolor=WASH, edgecolor=SLATE, lw=0.8, zorder=3))
        else:
            axes.plot(*outline.mean(axis=0), "s", color=SLATE, ms=3, zorder=3)
    for leg in view.legs:
        axes.plot(*leg.joints.T, color=SLATE, lw=2.0, ls=DASHED if leg.lifted else SOLID, marker="o", ms=2.5, zorder=4)
    for outline in view.rotors:
        if len(outline) > 2:
            axes.add_patch(Polygon(outline, closed=True, facecolor=PINE, alpha=0.28, lw=0, zorder=5))
            axes.add_patch(Polygon(outline, closed=True, fill=False, edgecolor=PINE, lw=1.0, zorder=5))


def draw_feet(axes: Axes, view: View) -> None:
    """Feet on the ground full, lifted feet hollow; feet that coincide in this view share one label."""
    centre = np.mean([place for _, _, place in view.feet], axis=0)
    labels: dict[tuple[int, int], list[str]] = {}
    for name, up, place in view.feet:
        axes.plot(*place, "o", mfc="white" if up else INK, mec=INK, mew=1.2, ms=6, zorder=7)
        labels.setdefault((round(float(place[0])), round(float(place[1]))), []).append(plain(name, 18))
    for at, names in labels.items():
        away = np.asarray(at, dtype=float) - centre
        away = away / max(float(np.hypot(*away)), 1e-9) if float(np.hypot(*away)) > 1.0 else np.array([0.0, -1.0])
        if abs(away[1]) < 0.35:
            away = np.array([away[0], -1.0])
        axes.annotate(" + ".join(names), at, 8 * away, textcoords="offset points", fontsize=7.5, zorder=9, bbox=CLEAR,
                      ha="center" if abs(away[0]) < 0.8 else side_of(away[0]), va=level_of(away[1]))


def draw_centre(axes: Axes, view: View) -> None:
    """Centre of mass as it stands (full) and at the balanced lean (hollow)."""
    axes.plot(*view.balanced, "D", mfc="none", mec=NAVY, mew=1.2, ms=8, zorder=8)
    axes.plot(*view.centre, "o", color=NAVY, ms=4.5, zorder=8)


def draw_axles(axes: Axes, view: View, size: float) -> None:
    """Spin axes dash-dotted, gimbal axes dashed; one that faces the reader is a ring with a dot."""
    taken: list[Array] = []
    for axle in view.axles:
        colour, line = (PINE, MIXED) if axle.kind == "spin" else (PLUM, DASHED)
        reach = 0.2 * size if axle.kind == "spin" else 0.15 * size
        if facing(axle):
            axes.plot(*axle.at, "o", mfc="white", mec=colour, mew=1.3, ms=8, zorder=6)
            axes.plot(*axle.at, "o", color=colour, ms=2.5, zorder=6)
        else:
            ends = np.array([axle.at - reach * axle.along, axle.at + reach * axle.along])
            axes.plot(*ends.T, color=colour, ls=line, lw=1.4, zorder=6)
        if axle.kind == "spin":
            taken.append(write_unit(axes, axle, reach, taken))


def facing(axle: Axle) -> bool:
    """Tell whether an axis points at the reader."""
    return float(np.hypot(*axle.along)) < 0.2


def write_unit(axes: Axes, axle: Axle, reach: float, taken: list[Array]) -> Array:
    """Name a unit at the end of its spin axis, or beside it where the axis faces the reader; return where.

    Of the two ends the upper one is taken, unless another name stands there; then the other, then lower.
    """
    way = axle.along if axle.along[1] >= 0.0 else -axle.along
    ends = [(axle.at, np.zeros(2))] if facing(axle) else [(axle.at + side * reach * way, side * way) for side in (1.0, -1.0)]
    free = [(end, out) for end, out in ends if all(float(np.hypot(*(end - one))) > 0.8 * reach for one in taken)]
    end, out = (free or ends)[0]
    beside = facing(axle)
    shift = (9.0, 7.0) if beside else tuple(6.0 * out)
    if not free:
        shift = (shift[0], shift[1] - 10.0)
    axes.annotate(plain(axle.name, 20), (end[0], end[1]), shift, textcoords="offset points", fontsize=7, color=INK,
                  zorder=9, bbox=CLEAR, ha="left" if beside else side_of(out[0]),
                  va="bottom" if beside else level_of(out[1]))
    place: Array = np.asarray(end, dtype=np.float64)
    return place


def side_of(x: float) -> str:
    """Horizontal anchor of a label that stands off toward x."""
    return "center" if abs(x) < 0.3 else "left" if x > 0 else "right"


def level_of(y: float) -> str:
    """Vertical anchor of a label that stands off toward y."""
    return "center" if abs(y) < 0.3 else "bottom" if y > 0 else "top"


def signed(value: float, decimals: int) -> str:
    """Write a number with its sign, and zero without one."""
    written = f"{value:+.{decimals}f}".replace("-", "−")
    return written if written.strip("+−0.") else "0"


def key(drawing: Drawing) -> list[Line2D]:
    """Samples for the legend: only what this machine has."""
    view = drawing.top
    samples = [Line2D([], [], color=RUST, lw=2.4, marker="o", ms=5, mfc=INK, mec=INK, label="contact line, feet down"),
               Line2D([], [], ls="", marker="o", color=NAVY, ms=4.5, label="centre of mass"),
               Line2D([], [], ls="", marker="D", mfc="none", mec=NAVY, ms=7, label="same, at the balanced lean")]
    if any(up for _, up, _ in view.feet):
        samples.append(Line2D([], [], ls="", marker="o", mfc="white", mec=INK, label="lifted foot"))
    if np.isfinite(drawing.hinge):
        samples.append(Line2D([], [], ls="", marker="s", mfc="white", mec=PLUM, mew=1.4, label="where the legs give"))
    if len(view.polygon) > 2:
        samples.append(Line2D([], [], color=SLATE, ls=DOTTED, label="feet when all are down"))
    if view.axles:
        samples.append(Line2D([], [], color=PINE, ls=MIXED, label="spin axis"))
    if any(a.kind == "gimbal" for a in view.axles):
        samples.append(Line2D([], [], color=PLUM, ls=DASHED, label="gimbal axis"))
    return samples
