"""What `balance firmware` says."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Sequence

from balance.api.compiled import Compared
from balance.base.tables import text_table
from balance.check.records import Verdict
from balance.firmware.header import CAUTION
from balance.firmware.package import Package


def show_firmware(package: Package | str, folder: str, verdicts: Sequence[Verdict]) -> str:
    """Return the text: what was written, what rounding costs, the cautions."""
    if isinstance(package, str):
        return f"No firmware: {package}."
    fixed = {each.stance: each for each in package.fixed_cost}
    rows = []
    for each in package.float_cost:
        whole = fixed.get(each.stance)
        rows.append(
            [
                each.stance,
                f"{each.designed.disk:.4f}",
                f"{each.rounded.disk:.4f}",
                f"{whole.rounded.disk:.4f}" if whole else "-",
            ]
        )
    refused = [f"fixed point was not written: {package.refused}", ""] if package.refused else []
    missed = [f"{v.stance}: {v.reason}" for v in verdicts if not v.passed]
    unmet = ["the design does not meet its own requirements; this is what it is:", *missed, ""] if missed else []
    return "\n".join(
        [
            f"wrote {len(package.files)} files into {folder}; read README.md there first",
            "",
            text_table(["stance", "disk margin", "in float32", "in fixed point"], rows, "lrrr"),
            "",
            *refused,
            *unmet,
            f"design stamp {package.program.seal}",
            "",
            *textwrap.wrap(CAUTION, 80),
        ]
    )


def show_compiled(ran: Compared) -> str:
    """Return how the compiled firmware's trials differ from the law's."""
    variant = "fixed-point" if ran.variant == "fixed" else "float32"
    if ran.other_verdicts:
        return "\n".join([f"the compiled {variant} firmware does NOT do what the law does:", *ran.other_verdicts])
    apart = math.degrees(ran.peak_lean_apart)
    says = f"every verdict is the law's own; peak leans differ by at most {apart:.2g} deg"
    return "\n".join(textwrap.wrap(f"run on the compiled {variant} firmware: {says}", 80))
