"""What both C writers share: comments, tables of gains with their meaning, names."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

from balance.firmware.program import LINE, MEMORY, Program, Row, Term

WIDTH = 110


def comment(*lines: str, indent: str = "") -> str:
    """Return a C comment, wrapped."""
    out: list[str] = []
    for line in lines:
        out += textwrap.wrap(line, WIDTH - 4 - len(indent)) or [""]
    if len(out) == 1:
        return f"{indent}/* {out[0]} */"
    return "\n".join([f"{indent}/* {out[0]}"] + [f"{indent} * {line}".rstrip() for line in out[1:]] + [f"{indent} */"])


def source(program: Program, term: Term) -> tuple[str, str]:
    """Return (what a term multiplies, its unit) in words."""
    if term.source == LINE:
        return "line command", program.line.unit
    if term.source == MEMORY:
        memory = program.memory[term.place]
        return f"memory: {memory.name.replace('_', ' ')}", memory.unit
    reading = program.readings[term.place]
    return reading.name.replace("_", " ").replace(".", ": "), reading.unit


def meaning(program: Program, row: Row, term: Term) -> str:
    """Return what one gain is: its unit and what it multiplies."""
    name, unit = source(program, term)
    return f"{row.unit} per {unit} of {name}"


def table(program: Program, name: str, row: Row, values: Sequence[Sequence[str]], kind: str, origin: str) -> str:
    """Return a constant table [stances][terms] whose every number has its unit and meaning beside it."""
    terms = row.terms
    lines = [
        comment(f"{row.says}, in {row.unit}: {origin}"),
        f"static const {kind} {name}[STANCES][{max(len(terms), 1)}] IN_FLASH = {{",
    ]
    for stance, numbers in zip(program.stances, values, strict=True):
        lines.append(f"    {{ /* {stance} */")
        rest = list(numbers) or ["0"]
        for k, number in enumerate(rest):
            says = meaning(program, row, terms[k]) if terms else "nothing"
            lines.append(f"        {number}{',' if k < len(rest) - 1 else ''} /* {says} */")
        lines.append("    }," if stance != program.stances[-1] else "    }")
    return "\n".join([*lines, "};"])


def per_stance(name: str, kind: str, values: Sequence[Sequence[str]], says: str) -> str:
    """Return a constant table [stances][n] on few lines."""
    width = max(len(row) for row in values)
    rows = ",\n".join("    { " + ", ".join(row) + " }" for row in values)
    return f"{comment(says)}\nstatic const {kind} {name}[STANCES][{width}] IN_FLASH = {{\n{rows}\n}};"


def origin(program: Program) -> str:
    """Return where the gains come from, in a few words."""
    law = {"lqr": "linear-quadratic regulator", "pid": "PID with momentum desaturation"}.get(program.kind, program.kind)
    return f"{law}, design {program.design}"
