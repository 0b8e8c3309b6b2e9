"""Added mass against the push that is survived, and against power: all families on one picture."""

from __future__ import annotations

import os

from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.ticker import FuncFormatter, NullFormatter

from balance.report.figures.palette import DASHED, DOTTED, NAVY, PINE, RUST, SLATE, SOLID, as_bytes, ink, sheet
from balance.size.answer import SizeAnswer
from balance.size.confirm import Confirmed

LOOKS = {"reaction wheel": (NAVY, "o", SOLID), "scissored pair": (RUST, "s", DASHED),
         "gimballed flywheel": (PINE, "^", DOTTED)}
"""Family -> colour, mark, line."""
MARKS = ((Line2D([], [], ls="", marker="o", ms=10, mfc="none", mec=SLATE), "made as small as the trials let it be"),
         (Line2D([], [], ls="", marker="^", ms=5, mfc="white", mec=SLATE), "push that overpowers the gimbal drive"))
"""Marks that mean something in every family, with their words."""
WIDE = 6.0
"""Heaviest over lightest above which masses stand on a logarithmic axis."""


def draw_sizing(answer: SizeAnswer) -> Figure:
    """Draw both fronts of what simulation has confirmed."""
    with ink():
        figure, (push, power) = sheet(3.6, 1, 2, width=7.6)
        figure.subplots_adjust(left=0.085, right=0.985, top=0.91, bottom=0.29, wspace=0.24)
        good = [c for c in answer.confirmed if c.passed]
        for family in answer.question.sizing.families:
            own = sorted((c for c in good if c.candidate.family == family), key=lambda c: c.added)
            scatter(push, own, [c.push for c in own], family)
            scatter(power, own, [max(c.power, 0.1) for c in own], family, False)
        for axes, title in ((push, "worst-case push survived, N·s"), (power, "peak power in the trials, W")):
            axes.set_xlabel("added mass, kg")
            axes.set_ylabel(title)
            mass_axis(axes, [c.added for c in good])
        power.set_yscale("log")
        power.yaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
        power.yaxis.set_minor_formatter(NullFormatter())
        front = answer.by_push
        push.step([c.added for c in front], [c.push for c in front], where="post", color=SLATE, lw=0.9, ls=DOTTED,
                  label="front of all families")
        push.set_ylim(bottom=0.0)
        handles, labels = push.get_legend_handles_labels()
        marks = MARKS if any(c.given_way for c in good) else MARKS[:1]
        figure.legend([*handles, *(h for h, _ in marks)], [*labels, *(w for _, w in marks)], loc="lower center", ncols=3,
                      handlelength=2.4)
        push.set_title("More push costs mass", loc="left")
        power.set_title("Less mass costs power", loc="left")
    return figure


def mass_axis(axes: Axes, masses: list[float]) -> None:
    """Set the axis of added mass: from zero, or by factors where one family weighs many times another."""
    if not masses or max(masses) < WIDE * min(masses):
        axes.set_xlim(left=0.0)
        return
    axes.set_xscale("log")
    marks = [m * 10.0**k for k in range(-3, 4) for m in (1.0, 2.0, 5.0)]
    axes.set_xlim(0.8 * min(masses), 1.25 * max(masses))
    axes.set_xticks([m for m in marks if 0.8 * min(masses) <= m <= 1.25 * max(masses)])
    axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
    axes.xaxis.set_minor_formatter(NullFormatter())


def scatter(axes: Axes, own: list[Confirmed], values: list[float], family: str, of_push: bool = True) -> None:
    """Draw one family; one whose binding quantity is known is ringed, a push that overpowers a gimbal drive is hollow."""
    colour, mark, line = LOOKS[family]
    axes.plot([c.added for c in own], values, color=colour, marker=mark, ls=line, lw=0.9, ms=5, label=family)
    ringed = [(c.added, v) for c, v in zip(own, values, strict=True) if c.binding]
    given = [(c.added, v) for c, v in zip(own, values, strict=True) if of_push and c.given_way]
    axes.plot([x for x, _ in given], [y for _, y in given], ls="", marker=mark, ms=5, mfc="white", mec=colour)
    axes.plot([x for x, _ in ringed], [y for _, y in ringed], ls="", marker="o", ms=10, mfc="none", mec=colour, mew=0.8)


def write_sizing_figure(answer: SizeAnswer, path: str) -> str:
    """Write the picture; PNG where `path` ends so, else SVG."""
    kind = "png" if path.lower().endswith(".png") else "svg"
    os.makedirs(os.path.dirname(path) or ".", exist_ok=True)
    with open(path, "wb") as file:
        file.write(as_bytes(draw_sizing(answer), kind))
    return path
