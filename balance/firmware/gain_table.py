"""The gains in every form firmware people meet them, as Markdown tables: one for each stance."""

from __future__ import annotations

from collections.abc import Sequence

from balance.design.forms import actuator_gains, pid_forms
from balance.design.records import Design
from balance.firmware.program import Program, Row
from balance.firmware.scaling import Fixed, FixedRow
from balance.firmware.text import meaning


def gain_tables(designs: Sequence[Design], program: Program, fixed: Fixed | None) -> str:
    """Return one section per stance."""
    return "\n\n".join(_stance(design, s, program, fixed) for s, design in enumerate(designs))


def _stance(design: Design, s: int, program: Program, fixed: Fixed | None) -> str:
    lines = [f"### {design.plant.stance.name}", "", "| form | number | unit and meaning |", "| --- | --- | --- |"]
    law = design.law
    lines += [
        f"| state feedback u = -K x | {value:.7g} | {law.unit} per SI unit of `{name}` |"
        for name, value in zip(law.states, law.K, strict=False)
    ]
    forms = pid_forms(design)
    if forms is not None:
        lines += [
            f"| parallel, per second | {forms.kp:.7g} | kp, N*m/rad |",
            f"| parallel, per second | {forms.ki:.7g} | ki, N*m/(rad*s) |",
            f"| parallel, per second | {forms.kd:.7g} | kd, N*m*s/rad |",
            f"| folded per sample | {forms.ki_sample:.7g} | ki T, added to the integral per rad of error |",
            f"| folded per sample | {forms.kd_new:.7g} | kd (1 - a), on the newest rate |",
            f"| folded per sample | {forms.filter_keep:.7g} | a, share of the filtered rate that is kept |",
        ]
    for unit in actuator_gains(design):
        if unit.current is not None:
            lines += [
                f"| ampere for {unit.unit} | {value:.7g} | A per SI unit of `{name}` |"
                for name, value in zip(law.measurements, unit.current, strict=True)
                if value
            ]
    rows: list[tuple[Row, FixedRow | None]] = [(program.line, fixed.line if fixed else None)]
    rows += [(row, fixed.moves[i] if fixed else None) for i, row in enumerate(program.moves)]
    rows += [(row, fixed.inputs[i] if fixed else None) for i, row in enumerate(program.inputs)]
    for row, scaled in rows:
        lines += _row(program, row, scaled, s)
    return "\n".join(lines)


def _row(program: Program, row: Row, scaled: FixedRow | None, s: int) -> list[str]:
    out = []
    for k, term in enumerate(row.terms):
        whole = ""
        if scaled is not None:
            fixed = scaled.terms[k]
            whole = f"; whole number {fixed.gains[s]}, shift {fixed.shift}, result has {scaled.places} places"
        out.append(
            f"| per sample, {row.name.replace('_', ' ')} | {term.gains[s]:.9g} | {meaning(program, row, term)}{whole} |"
        )
    return out
