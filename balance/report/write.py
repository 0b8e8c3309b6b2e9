"""From the answer to the page on disk."""

from __future__ import annotations

from balance.check.records import CheckResult
from balance.design.records import Design
from balance.design.robustness.one_law import compared
from balance.machine.machine import Machine
from balance.plant.record import Plant
from balance.report import page as html
from balance.report.assumed import assumed, unchecked
from balance.report.at_rest import at_rest_table, gyro_table, joint_table, link_cautions, turn_table
from balance.report.cautions import cautions
from balance.report.facts import bench_table, machine_table, trial_table, unit_table
from balance.report.figures.bode import draw_bode
from balance.report.figures.machine import draw_view
from balance.report.figures.nyquist import draw_nyquist
from balance.report.figures.palette import as_bytes
from balance.report.figures.recovery import draw_recovery
from balance.report.figures.response import draw_response
from balance.report.gains import gain_table, pole_table, share_table
from balance.report.ground import foot_table
from balance.report.histories import picture_trials
from balance.report.loops import LoopPicture, picture_loop
from balance.report.margins import margin_table
from balance.report.outline import outline
from balance.report.responses import picture_responses
from balance.report.robustness import across_words, one_law_table, retuned_words, worst_table
from balance.report.seal import put
from balance.report.told import told
from balance.report.verdicts import headline, tally, verdict_tables
from balance.stance.compared import bench_against_cad
from balance.stance.statics import statics_of

PAGE = "report.html"


def write_report(result: CheckResult, folder: str) -> str:
    """Write the report of `result` into `folder` (made if it is not there), whole or not at all; return its path.

    An earlier report is replaced, but not one that somebody has edited since: then a new name is chosen (`report-2.html`).
    Raises OSError where the folder cannot be written.
    """
    return put(compose(result), folder, PAGE)


def compose(result: CheckResult) -> str:
    """Return the whole page as text."""
    designs = result.designs
    pictures = tuple(picture_loop(design) for design in designs)
    sections = [("verdicts", "Verdicts", "", _verdicts(result))]
    if designs:
        plants, measured = tuple(design.plant for design in designs), bench_against_cad(result.machine)
        sections.append(("machine", "The machine", "", [html.table(machine_table(plants)), html.table(unit_table(plants)),
                          *_behind(result.machine, plants),
                          *([html.table(bench_table(measured))] if measured else [])]))
        sections.append(("margins", "Margins", "", _margins(result.machine, designs, pictures)))
    for i, (design, loop) in enumerate(zip(designs, pictures, strict=True)):
        name = design.plant.stance.name
        sections.append((f"stance-{i + 1}", f"Stance {name}", "stance", _stance(result, design, loop)))
    sections.append(("cautions", "Cautions", "", [html.definitions(cautions(result))]))
    sections.append(("assumed", "What is assumed, and what was not checked", "",
                     [html.sub_heading("Assumed"), html.bullets(assumed(result)),
                      html.sub_heading("Not checked"), html.bullets(unchecked(result))]))
    parts = [html.paragraph(headline(result), f"answer {'met' if result.passed else 'unmet'}")]
    for anchor, words, kind, inside in sections:
        parts += [html.heading(words, anchor, kind), *inside]
    title = f"{result.goal.design}: does the balance assist hold {result.machine.machine}?"
    return html.page(title, parts, [(anchor, words) for anchor, words, _, _ in sections])


def _behind(machine: Machine, plants: tuple[Plant, ...]) -> list[str]:
    """Return what stands behind the dynamics: legs at rest, all feet down, and what flywheels ask of the rest."""
    statics = tuple(statics_of(machine, plant.stance) for plant in plants)
    tables = (at_rest_table(statics), joint_table(statics), gyro_table(plants), turn_table(plants))
    return [*(html.table(table) for table in tables if table is not None),
            *(html.paragraph(f"Caution: {words}.", "note") for words in link_cautions(plants))]


def _verdicts(result: CheckResult) -> list[str]:
    """Return the verdicts: what is not met first, then every stance, folded where there are several."""
    unmet, stances = verdict_tables(result.verdicts)
    if len(stances) < 2:
        return [html.table(table) for _, table in stances]
    first = [html.table(unmet)] if unmet is not None else []
    return [html.table(tally(result)), *first,
            *(html.folded(title, html.table(table), i == 0) for i, (title, table) in enumerate(stances))]


def _margins(machine: Machine, designs: tuple[Design, ...], pictures: tuple[LoopPicture | None, ...]) -> list[str]:
    """Return the margins as stated, at their worst within the tolerances, and with one gain set for all stances."""
    parts = [html.table(margin_table(designs, pictures))]
    for i, design in enumerate(designs):
        name, worst = design.plant.stance.name, worst_table(design)
        if worst is not None:
            title = f"{name}: worst case within the tolerances"
            parts.append(html.table(worst) if len(designs) == 1 else html.folded(title, html.table(worst), i == 0))
        across = across_words(design.plant, machine.tolerances)
        if across:
            parts.append(html.paragraph(f"{name}: {across}", "note"))
        if design.retuned is not None:
            parts.append(html.paragraph(f"{name}: {retuned_words(design.retuned)}"))
    shared = compared(designs)
    return parts if shared is None else [*parts, html.table(one_law_table(shared))]


def _stance(result: CheckResult, design: Design, loop: LoopPicture | None) -> list[str]:
    """Return one stance: drawn, its gains, its loop, its trials."""
    name = design.plant.stance.name
    drawing = outline(result.machine, design.plant.stance, design.plant)
    views = [html.picture(as_bytes(draw_view(drawing, which), "svg"), f"{name}, {words}", words)
             for which, words in (("top", "From above, to scale"), ("side", "Along the contact line, to scale"))]
    if design.refused:
        return [html.paragraph(f"No law: {design.refused}.", "answer unmet"), html.figures(views)]
    parts = [html.figures(views), html.sub_heading("Gains"), html.table(gain_table(design))]
    shared = share_table(design)
    if shared is not None:
        parts.append(html.table(shared))
    parts.append(html.folded("Closed-loop poles", html.table(pole_table(design)), False))
    if loop is not None:
        parts += [html.sub_heading("Loop, broken at the physical torque"), html.figures([
            html.picture(as_bytes(draw_bode(loop), "svg"), f"{name}, Bode diagram", "Bode: gain margins ■, phase margin ●"),
            html.picture(as_bytes(draw_nyquist(loop), "svg"), f"{name}, Nyquist diagram", "Nyquist, near the point −1")])]
    drawn = [html.picture(as_bytes(draw_response(one), "svg"), f"{name}, {one.name}: lean, torque, momentum over time",
                          f"{one.name} on the linear loop") for one in picture_responses(design)]
    if drawn:
        parts.append(html.folded(f"{name}: step and push on the linear loop, no limit acting", html.figures(drawn), True))
    return parts + _trials(result, design)


def _trials(result: CheckResult, design: Design) -> list[str]:
    """Return the trials of one stance: the table, then every trial drawn."""
    name = design.plant.stance.name
    mine = tuple(trial for trial in result.trials if trial.stance == name)
    if not mine:
        return []
    planned = result.goal.trials
    drawn = [html.picture(as_bytes(draw_recovery(p), "svg"), f"{name}, trial {p.name}: lean, torque, momentum over time",
                          f"{p.name}: {told(planned.get(p.name))}") for p in picture_trials(design, mine, planned)]
    parts = [html.sub_heading("Recovery"), html.table(trial_table(mine))]
    feet = foot_table(mine)
    if feet is not None:
        parts.append(html.table(feet))
    if drawn:
        parts.append(html.folded(f"{name}: {len(drawn)} trials drawn", html.figures(drawn), design is result.designs[0]))
    return parts
