"""A linear response drawn: lean, torque and stored momentum on one time axis, the worst case over the nominal one."""

from __future__ import annotations

from matplotlib.figure import Figure
from matplotlib.lines import Line2D as Line
from matplotlib.ticker import MaxNLocator

from balance.report.figures.palette import DASHED, NAVY, PINE, SLATE, SOLID, ink, plain, sheet
from balance.report.responses import Motion, ResponsePicture

LineStyle = str | tuple[int, tuple[int, ...]]

LABELS = ("Lean\n(°)", "Torque about\nthe line (N·m)", "Stored momentum\n(N·m·s)")


def draw_response(picture: ResponsePicture) -> Figure:
    """Draw one response: nominal full, worst case dashed."""
    curves: list[tuple[str, Motion, str, LineStyle]] = [("as stated", picture.nominal, NAVY, SOLID)]
    if picture.worst is not None:
        curves.append(("worst case within the tolerances", picture.worst, PINE, DASHED))
    with ink():
        figure, axes = sheet(4.3, rows=3, ratios=(1.15, 1, 1), share=True)
        figure.subplots_adjust(left=0.165, right=0.965, top=0.84, bottom=0.107, hspace=0.15)
        for _, motion, colour, line in curves:
            for one, values in zip(axes, (motion.lean, motion.torque, motion.momentum), strict=True):
                one.plot(motion.time, values, color=colour, ls=line)
        for one, label in zip(axes, LABELS, strict=True):
            one.set_ylabel(label, fontsize=8)
            one.yaxis.set_label_coords(-0.115, 0.5)
            one.yaxis.set_major_locator(MaxNLocator(4))
            one.axhline(0.0, color=SLATE, lw=0.6, zorder=1)
            one.margins(y=0.12)
        axes[-1].set_xlabel("Time (s)")
        axes[-1].set_xlim(0.0, float(picture.nominal.time[-1]))
        figure.text(0.03, 0.983, f"{picture.name.capitalize()} ({plain(picture.stance, 30)})", va="top", fontsize=9,
                    weight="bold")
        figure.text(0.03, 0.925, picture.words, va="center", fontsize=7.5)
        for column, (words, _, colour, line) in enumerate(curves):
            x = 0.03 + 0.3 * column
            figure.add_artist(Line((x, x + 0.07), (0.878, 0.878), color=colour, ls=line, lw=1.6))
            figure.text(x + 0.085, 0.878, words, va="center", fontsize=8)
    return figure
