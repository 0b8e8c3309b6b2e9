"""The machine drawn to scale, from above and along its contact line."""

from __future__ import annotations

import math
from collections.abc import Sequence

from matplotlib.figure import Figure

from balance.base.whole import write_whole
from balance.machine.machine import Machine
from balance.plant.record import Plant
from balance.report.figures.palette import WIDTH, as_bytes, ink, plain, sheet
from balance.report.figures.views import fill_side, fill_top, key
from balance.report.outline import Drawing, outline
from balance.stance.record import Stance


def draw_machine(machine: Machine, stances: Sequence[Stance], plants: Sequence[Plant]) -> Figure:
    """Draw every stance in a row of its own: top view left, side view along the contact line right, axes in mm.

    `plants` go with `stances` one by one; a stance without a plant shows no stabiliser.
    Raises ValueError where there is no stance.
    """
    if not stances:
        raise ValueError("no stance to draw")
    drawings = [outline(machine, stance, plants[i] if i < len(plants) else None) for i, stance in enumerate(stances)]
    rows = len(drawings)
    with ink():
        height = 4.6 * rows + 0.6
        figure, axes = sheet(height, rows=rows, columns=2, width=2 * WIDTH)
        figure.subplots_adjust(left=0.075, right=0.985, top=1 - 0.35 / height, bottom=1.05 / height, wspace=0.2, hspace=0.3)
        for i, drawing in enumerate(drawings):
            fill_top(axes[2 * i], drawing)
            axes[2 * i].set_title(f"{plain(drawing.machine)}, {plain(drawing.stance)}", loc="left")
            fill_side(axes[2 * i + 1], drawing)
        figure.legend(handles=key(drawings[0]), loc="lower center", ncols=4, fontsize=7.5)
    return figure


def draw_view(drawing: Drawing, which: str) -> Figure:
    """Draw one view ("top" or "side") of one stance, for a page of two columns."""
    with ink():
        samples = key(drawing)
        foot = 0.76 + 0.17 * math.ceil(len(samples) / 2)
        figure, (axes,) = sheet(4.2 + foot)
        figure.subplots_adjust(left=0.15, right=0.97, top=1.0 - 0.3 / (4.2 + foot), bottom=foot / (4.2 + foot))
        if which == "top":
            fill_top(axes, drawing)
        else:
            fill_side(axes, drawing)
        figure.legend(handles=samples, loc="lower center", ncols=2, fontsize=7.5, borderaxespad=0.2)
    return figure


def write_machine_figure(machine: Machine, stances: Sequence[Stance], plants: Sequence[Plant], path: str) -> str:
    """Write `draw_machine` to `path`, as PNG or SVG by its ending (anything else: SVG), whole or not at all."""
    kind = "png" if path.lower().endswith(".png") else "svg"
    drawn = as_bytes(draw_machine(machine, stances, plants), kind)
    write_whole(path, drawn)
    return path
