"""What `balance gains` prints of tolerances: the worst case of each margin, retuned weights, one gain set for all."""

from __future__ import annotations

from balance.base.tables import text_table
from balance.cli.words import folded
from balance.design.records import Design
from balance.design.robustness.one_law import OneLaw
from balance.report.robustness import one_law_table, retuned_words, within, worst_table
from balance.report.tables import Table


def show_robust(design: Design) -> str:
    """Return one stance's retuning and worst cases, or nothing where neither was asked for."""
    name, parts = design.plant.stance.name, []
    if design.retuned is not None:
        parts.append(folded(f"{name}: {retuned_words(design.retuned)}"))
    table = worst_table(design)
    if table is not None and design.robustness is not None:
        parts.append(f"{folded(f'{name}: {table.caption}. {within(design.robustness)}')}\n{_text(table, 'lrrl')}")
    return "\n\n".join(parts)


def show_one_gain_set(found: OneLaw | None) -> str:
    """Return both ways beside each other, or nothing where there is nothing to compare."""
    if found is None:
        return ""
    table = one_law_table(found)
    return f"{_text(table, 'lrrrrrr')}\n{folded(table.note)}"


def _text(table: Table, align: str) -> str:
    rows = [[row.label, *row.cells] for row in table.rows]
    return text_table([word.lower() for word in table.head], rows, align)
