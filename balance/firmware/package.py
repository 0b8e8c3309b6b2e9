"""Everything a firmware folder holds, as text by path; nothing is written here."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass

from balance import __version__
from balance.design.records import Design
from balance.firmware.describe import describe
from balance.firmware.dialect import commands_of
from balance.firmware.fields import fields_of
from balance.firmware.guide import write_guide
from balance.firmware.header import Numbers, write_header
from balance.firmware.manifests import Library, manifests
from balance.firmware.program import Program
from balance.firmware.quantised import Rounding, fixed_laws, float_laws, roundings, too_dear
from balance.firmware.scaling import Fixed, NoRoomError, scale
from balance.firmware.selftest import write_selftest
from balance.firmware.vectors import plan_vectors
from balance.firmware.vectors_fixed import fixed_vectors
from balance.firmware.vectors_float import float_vectors
from balance.firmware.write_fixed import write_fixed
from balance.firmware.write_float import flag_names, write_float

SUMS = "SHA256SUMS"
"""The list of what was written, as `sha256sum --check` reads it."""


@dataclass(frozen=True)
class Package:
    """A firmware folder. `fixed` is None where fixed point was refused, `refused` then says why."""

    program: Program
    fixed: Fixed | None
    refused: str
    float_cost: tuple[Rounding, ...]
    fixed_cost: tuple[Rounding, ...]
    files: dict[str, str]


def make_package(designs: Sequence[Design], name: str) -> Package:
    """Return the firmware of a design file's stances; raises NotAlikeError where they are not one program."""
    program = describe(designs, name)
    float_cost = roundings(designs, float_laws(designs))
    fixed: Fixed | None = None
    refused, fixed_cost = "", tuple[Rounding, ...]()
    try:
        fixed = scale(program)
        fixed_cost = roundings(designs, fixed_laws(designs, fixed))
        refused = too_dear(fixed_cost)
    except NoRoomError as reason:
        refused = f"fixed point has no room: {reason}"
    kept = fixed if not refused else None
    files = _sources(program, kept)
    headers = tuple(path.removeprefix("src/") for path in files if path.endswith(".h"))
    sources = tuple(path.removeprefix("src/") for path in files if path.endswith(".c"))
    says = f"Balance law of {program.design} for {program.machine}"
    files |= manifests(Library(program.prefix, __version__, says, headers, sources))
    files["README.md"] = write_guide(designs, program, kept, refused, float_cost, fixed_cost)
    files[SUMS] = "".join(
        f"{hashlib.sha256(text.encode()).hexdigest()}  {path}\n" for path, text in sorted(files.items())
    )
    return Package(program, kept, refused, float_cost, fixed_cost, files)


def _sources(program: Program, fixed: Fixed | None) -> dict[str, str]:
    plan, p = plan_vectors(program), program.prefix
    files = {
        f"src/{p}.h": write_header(program, Numbers("float", "", {})),
        f"src/{p}.c": flag_names(p, write_float(program)),
        f"src/{p}_selftest.c": write_selftest(program, float_vectors(program, plan), "float", ""),
    }
    if fixed is not None:
        scales = dict(zip([f.name for f in fields_of(program)], fixed.fields, strict=True))
        scales |= {name: row.places for name, row in zip(commands_of(program), fixed.inputs, strict=True)}
        files |= {
            f"src/{p}_fixed.h": write_header(program, Numbers("int32_t", "_fixed", scales)),
            f"src/{p}_fixed.c": flag_names(f"{p}_fixed", write_fixed(fixed)),
            f"src/{p}_fixed_selftest.c": write_selftest(program, fixed_vectors(fixed, plan), "int32_t", "_fixed"),
        }
    return files
