"""From the answer to the page on disk."""

from __future__ import annotations

import os
import tempfile

from balance.check.records import CheckResult
from balance.design.records import Design
from balance.report import page as html
from balance.report.cautions import cautions
from balance.report.facts import gain_table, machine_table, margin_table, open_points, trial_table
from balance.report.figures.bode import draw_bode
from balance.report.figures.machine import draw_view
from balance.report.figures.nyquist import draw_nyquist
from balance.report.figures.palette import as_bytes
from balance.report.figures.recovery import draw_recovery
from balance.report.histories import picture_trials
from balance.report.loops import picture_loop
from balance.report.outline import outline
from balance.report.verdicts import headline, tally, verdict_table

PAGE = "report.html"


def write_report(result: CheckResult, folder: str) -> str:
    """Write the report of `result` into `folder` (made if it is not there), whole or not at all; return its path."""
    text = compose(result)
    os.makedirs(folder, exist_ok=True)
    path = os.path.join(folder, PAGE)
    handle, unfinished = tempfile.mkstemp(dir=folder, prefix=".report-")
    try:
        with os.fdopen(handle, "w", encoding="utf-8") as file:
            file.write(text)
        os.chmod(unfinished, 0o644)
        os.replace(unfinished, path)
    except BaseException:
        os.unlink(unfinished)
        raise
    return path


def compose(result: CheckResult) -> str:
    """Return the whole page as text."""
    designs, plants = result.designs, tuple(d.plant for d in result.designs)
    parts = [html.paragraph(headline(result), f"answer {'met' if result.passed else 'unmet'}"),
             html.heading("Verdicts", "verdicts")]
    contents = [("verdicts", "Verdicts"), ("machine", "The machine")]
    if len(designs) > 1:
        parts.append(html.table(tally(result)))
    parts += [html.table(verdict_table(result.verdicts)), html.heading("The machine", "machine"),
              html.table(machine_table(plants))]
    for design in designs:
        anchor = f"stance-{design.plant.stance.name}"
        contents.append((anchor, f"Stance {design.plant.stance.name}"))
        parts += [html.heading(f"Stance {design.plant.stance.name}", anchor), *_stance(result, design)]
    contents += [("margins", "Margins"), ("cautions", "Cautions"), ("assumed", "What is assumed")]
    parts += [html.heading("Margins", "margins"), html.table(margin_table(designs)),
              html.heading("Cautions", "cautions"), html.definitions(cautions(result.machine, plants[0])),
              html.heading("What is assumed, and what was not checked", "assumed"), html.bullets(open_points(result))]
    return html.page(f"{result.goal.design}: does the balance assist hold {result.machine.machine}?", parts, contents)


def _stance(result: CheckResult, design: Design) -> list[str]:
    """Return one stance: drawn, its gains, its loop, its trials."""
    name = design.plant.stance.name
    drawing = outline(result.machine, design.plant.stance, design.plant)
    parts = [html.figures([html.picture(as_bytes(draw_view(drawing, which), "svg"), words)
                           for which, words in (("top", f"{name}: from above"), ("side", f"{name}: along the line"))])]
    if design.refused:
        return [html.paragraph(f"No law: {design.refused}.", "answer unmet"), *parts]
    parts.append(html.table(gain_table(design)))
    loop = picture_loop(design)
    if loop is not None:
        parts.append(html.figures([html.picture(as_bytes(draw_bode(loop), "svg"), f"{name}: Bode, loop at the torque"),
                                   html.picture(as_bytes(draw_nyquist(loop), "svg"), f"{name}: Nyquist")]))
    mine = tuple(t for t in result.trials if t.stance == name)
    if mine:
        parts.append(html.table(trial_table(mine)))
    drawn = [html.picture(as_bytes(draw_recovery(p), "svg"), f"{name}: {p.name}")
             for p in picture_trials(design, mine, result.goal.trials)]
    if drawn:
        many = len(result.designs) > 1
        parts.append(html.folded(f"Recovery, {len(drawn)} trials drawn", html.figures(drawn),
                                 not many or design is result.designs[0]))
    return parts
