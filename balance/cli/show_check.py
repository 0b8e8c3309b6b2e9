"""What `balance check` prints: the verdicts first, then what failed and why, and where the report is."""

from __future__ import annotations

from balance.check.records import CheckResult
from balance.cli.words import closing, failures, folded, verdict_table
from balance.design.records import Design
from balance.report.amounts import amount


def show_check(result: CheckResult, page: str) -> str:
    """Return the text of the answer."""
    head = folded(f"{result.machine.machine}, design {result.goal.design}")
    lines = "\n".join(_stance(d) for d in result.designs)
    table = verdict_table(result.verdicts) if result.verdicts else ""
    parts = [head, lines, table, failures(result.verdicts), f"report: {page}", closing(result.verdicts)]
    return "\n\n".join(p for p in parts if p)


def _stance(design: Design) -> str:
    plant = design.plant
    what = (
        f"no law: {design.refused}"
        if design.refused
        else f"{design.law.kind}, {'stable' if design.margins.stable else 'UNSTABLE'}"
    )
    return folded(
        f"{plant.stance.name}: {amount(plant.stance.mass, 'kg')}, centre of mass "
        f"{amount(plant.stance.height, 'm')} up, pole {amount(plant.pole, '1/s')}; {what}"
    )
