"""What rounding costs, as Markdown tables: margins and poles as designed and with the numbers a variant holds."""

from __future__ import annotations

import math
from collections.abc import Sequence

from balance.design.records import Margins
from balance.firmware.quantised import Rounding


def rounding_tables(variant: str, found: Sequence[Rounding]) -> str:
    """Return one section per stance; empty where nothing was worked out."""
    return "\n".join(_stance(variant, each) for each in found)


def _stance(variant: str, each: Rounding) -> str:
    lines = [f"### {variant}, {each.stance}", "", "| | designed | rounded |", "| --- | --- | --- |"]
    pairs = zip(_margins(each.designed), _margins(each.rounded), strict=True)
    lines += [f"| {name} | {was} | {now} |" for (name, was), (_, now) in pairs]
    poles = zip(each.designed_poles, each.rounded_poles, strict=True)
    lines += [f"| pole {i + 1}, per sample | {_pole(was)} | {_pole(now)} |" for i, (was, now) in enumerate(poles)]
    return "\n".join(lines) + "\n"


def _margins(margins: Margins) -> list[tuple[str, str]]:
    return [
        ("lowest gain factor", _number(margins.gain_lower, 4)),
        ("highest gain factor", _number(margins.gain_upper, 4)),
        ("phase margin, deg", _number(math.degrees(margins.phase), 3)),
        ("delay margin, ms", _number(1e3 * margins.delay, 3)),
        ("disk margin", _number(margins.disk, 4)),
        ("peak sensitivity", _number(margins.peak_sensitivity, 4)),
    ]


def _number(value: float, digits: int) -> str:
    return "none" if math.isnan(value) else "no bound" if math.isinf(value) else f"{value:.{digits}f}"


def _pole(pole: complex) -> str:
    if abs(pole.imag) < 1e-9:
        return f"{pole.real:.6f}"
    return f"{pole.real:.6f} {'+' if pole.imag > 0.0 else '-'} {abs(pole.imag):.6f}j"
