"""The drawings: a unit in every label, no text outside the paper, the right number of turns in the Nyquist count."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.text import Text

from balance.report.figures.bode import draw_bode
from balance.report.figures.machine import draw_view, write_machine_figure
from balance.report.figures.nyquist import draw_nyquist
from balance.report.figures.palette import as_bytes, ink
from balance.report.figures.recovery import draw_recovery
from balance.report.figures.response import draw_response
from balance.report.histories import picture_trials
from balance.report.loops import picture_loop
from balance.report.outline import outline
from balance.report.responses import picture_responses

CASES = [("bench-rig", "line"), ("bench-rig-short", "line"), ("bench-rig-pid", "line"), ("quay-gyros", "on-left-right"),
         ("scout-wheels", "on-fore-left")]
UNIT = re.compile(r"\((?:dB|°|rad/s|Hz|s|N·m|N·m·s|mm|no unit)\)(?:;|$)")


def drawings(result) -> dict[str, Figure]:
    design = result.designs[0]
    stance = design.plant.stance
    drawing = outline(result.machine, stance, design.plant)
    loop = picture_loop(design)
    found = {which: draw_view(drawing, which) for which in ("top", "side")}
    found |= {"bode": draw_bode(loop), "nyquist": draw_nyquist(loop)}
    found |= {one.name: draw_response(one) for one in picture_responses(design)}
    mine = tuple(t for t in result.trials if t.stance == stance.name)
    found |= {p.name: draw_recovery(p) for p in picture_trials(design, mine, result.goal.trials)}
    return found


@pytest.mark.parametrize(("design", "stance"), CASES)
def test_units_and_paper(answered, design, stance):
    for name, figure in drawings(answered(design, stance)).items():
        with ink():
            every = [*figure.axes, *(child for axes in figure.axes for child in axes.child_axes)]
            labels = [label for axes in every for label in (axes.get_xlabel(), axes.get_ylabel()) if label]
            assert labels, name
            assert all(UNIT.search(label) for label in labels), (name, labels)
            assert outside(figure) == [], name


def outside(figure: Figure) -> list[str]:
    """Return the texts that reach beyond the paper, drawn as the report draws them (SVG)."""
    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    renderer = canvas.get_renderer()
    width, height = figure.get_size_inches() * figure.dpi
    ticked = {id(label) for label in ticks(figure)}
    texts = [t for t in figure.findobj(Text) if t.get_visible() and t.get_text().strip() and id(t) not in ticked]
    found = []
    for text in texts:
        box = text.get_window_extent(renderer)
        if box.width and (box.x0 < -1 or box.y0 < -1 or box.x1 > width + 1 or box.y1 > height + 1):
            found.append(text.get_text())
    return found


def ticks(figure: Figure) -> list[Text]:
    """Tick labels beyond the axes' limits exist but are not drawn; the ticks are looked at in the pictures."""
    axes = [*figure.axes, *(child for one in figure.axes for child in one.child_axes)]
    return [label for one in axes for axis in (one.xaxis, one.yaxis)
            for tick in (*axis.get_major_ticks(), *axis.get_minor_ticks()) for label in (tick.label1, tick.label2)]


def test_the_twin_text_off_the_paper_is_seen():
    figure = Figure(figsize=(2, 2))
    figure.text(0.9, 0.5, "much too long to fit here")
    assert outside(figure) == ["much too long to fit here"]


@pytest.mark.parametrize(("design", "stance"), CASES)
def test_nyquist_count_agrees_with_the_eigenvalues(answered, design, stance):
    """Encirclements found equal unstable open-loop poles exactly where the closed loop is stable (Nyquist)."""
    result = answered(design, stance)
    count = picture_loop(result.designs[0]).count
    assert count.sure
    assert count.needed >= 1
    assert (count.found == count.needed) is result.designs[0].margins.stable


def test_log_axes_show_numbers(answered):
    figure = drawings(answered("bench-rig", "line"))["bode"]
    words = as_bytes(figure, "svg")
    assert b"mathdefault" not in words
    with ink():
        figure.canvas.draw()
        labels = [t.get_text() for t in figure.axes[1].get_xticklabels()]
    assert "10" in labels
    assert not any("$" in label for label in labels)


def test_machine_figure_alone(answered, tmp_path):
    result = answered("quay-gyros", "on-left-right")
    plants = [d.plant for d in result.designs]
    for ending, start in (("svg", b"<svg"), ("png", b"\x89PNG")):
        path = write_machine_figure(result.machine, [p.stance for p in plants], plants, str(tmp_path / f"m.{ending}"))
        assert Path(path).read_bytes().startswith(start)


def test_machine_is_drawn_to_scale(answered):
    """The feet of the scout stand on a circle of 260 mm: the line is 450.3 mm long in the drawing as in the file."""
    result = answered("scout-wheels", "on-fore-left")
    plant = result.designs[0].plant
    view = outline(result.machine, plant.stance, plant).top
    assert np.linalg.norm(view.line[1] - view.line[0]) == pytest.approx(1e3 * plant.stance.length, rel=1e-9)
    assert np.linalg.norm(view.line[1] - view.line[0]) == pytest.approx(260 * np.sqrt(3), rel=1e-3)   # file rounds to 0.1 mm
