"""The README's table of what an update costs is what the compilers here give."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.firmware.builds import ROOT
from tests.firmware.cost import CASES, HEAD, line
from tests.firmware.targets.run import need

WITHIN = 0.1
"""Share a number may be off: other versions of the compilers move each by a few per cent."""


def cells(row: str) -> list[str]:
    """Return a row's cells as plain words and numbers."""
    return [cell.strip().replace(",", "") for cell in row.strip("|").split("|")]


def table() -> list[list[str]]:
    """Return the README's rows."""
    lines = (ROOT / "README.md").read_text(encoding="utf-8").splitlines()
    start = lines.index(HEAD[0])
    return [cells(row) for row in lines[start + 2 : start + 2 + 2 * len(CASES)]]


def apart(told: list[str], found: list[str]) -> float:
    """Return the largest share by which numbers differ."""
    return max(abs(float(a) - float(b)) / float(b) for a, b in zip(told[2:], found[2:], strict=True))


@pytest.mark.parametrize(("case", "variant"), [("scout-wheels", "_fixed"), ("bench-rig-sensed", "")])
def test_the_readme_says_what_an_update_costs(case: str, variant: str, tmp_path: Path) -> None:
    for target in ("m4f", "m3", "m0", "avr"):
        need(target)
    found = cells(line(case, variant, tmp_path))
    told = {(row[0], row[1]): row for row in table()}
    assert len(told) == 2 * len(CASES)
    assert apart(told[found[0], found[1]], found) < WITHIN
    other = told[found[0], "float32" if variant else "fixed point"]              # the twin: the other variant's row
    assert apart(other, found) > 2 * WITHIN
