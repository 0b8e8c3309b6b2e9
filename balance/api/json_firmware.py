"""A firmware folder as JSON."""

from __future__ import annotations

from collections.abc import Sequence

from balance.api.json_margins import json_margins
from balance.api.json_numbers import Tree, complexes, number
from balance.firmware.package import Package
from balance.firmware.quantised import Rounding


def json_firmware(package: Package | str, folder: str) -> Tree:
    """Return what was written and what rounding costs; `refused` in words where something was not written."""
    if isinstance(package, str):
        return {"folder": None, "files": [], "refused": package, "variants": []}
    program = package.program
    variants = [
        _variant(program.prefix, "float32", "", package.float_cost),
        _variant(f"{program.prefix}_fixed", "fixed point", package.refused, package.fixed_cost),
    ]
    return {
        "folder": folder,
        "files": sorted(package.files),
        "stamp": program.seal,
        "sample_time_s": number(program.sample_time),
        "stale_samples_allowed": program.patience,
        "refused": "",
        "variants": variants,
    }


def _variant(prefix: str, arithmetic: str, refused: str, found: Sequence[Rounding]) -> Tree:
    return {
        "prefix": prefix,
        "arithmetic": arithmetic,
        "written": not refused,
        "refused": refused,
        "stances": [
            {
                "stance": each.stance,
                "disk_designed": number(each.designed.disk),
                "disk_rounded": number(each.rounded.disk),
                "disk_share_lost": number(each.cost),
                "largest_pole_designed": number(each.designed_radius),
                "largest_pole_rounded": number(each.rounded_radius),
                "poles_designed": complexes(each.designed_poles),
                "poles_rounded": complexes(each.rounded_poles),
                "margins_designed": json_margins(each.designed),
                "margins_rounded": json_margins(each.rounded),
            }
            for each in found
        ],
    }
