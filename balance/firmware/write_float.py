"""The float32 law as C99."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from balance.firmware.atan import SERIES
from balance.firmware.dialect import Dialect, commands_of, hold_alone, look_at_voltage, rows, take, update
from balance.firmware.fields import fields_of
from balance.firmware.flags import FLAGS
from balance.firmware.program import DIRECT, LINE, MEMORY, TILT, Program, Row
from balance.firmware.text import comment, origin, per_stance, table


def number(value: float) -> str:
    """Return a float32 constant: nine digits give the same bits back."""
    short = f"{np.float32(value):.9g}"
    return f"{short}f" if any(mark in short for mark in ".en") else f"{short}.0f"


def write_float(program: Program) -> str:
    """Return the text of PREFIX.c; FLAG_ words are still to be named."""
    dialect = Dialect(program.prefix, "float", "0.0f", "FETCH")
    blocks = [_head(program), *_tables(program), _small(program), _along(program)]
    if any(reading.kind == TILT for reading in program.readings):
        blocks.append(_tilt())
    blocks += [_take(dialect, program), _rows(dialect, program), _share(dialect, program), _short(dialect, program)]
    blocks.append(update(dialect, program))
    return "\n\n".join(block for block in blocks if block) + "\n"


def _head(program: Program) -> str:
    p = program.prefix
    return "\n".join(
        [
            comment(
                f"{program.design} on {program.machine}: the law in float32. Written by {program.tool}; do not edit: "
                "change the design and write it again.",
                f"Design stamp (SHA-256): {program.seal}",
            ),
            f'#include "{p}.h"',
            "",
            "/* those switches let the compiler believe that there is no not-a-number: a broken reading would be taken */",
            "#if defined(__FAST_MATH__) || (defined(__FINITE_MATH_ONLY__) && (__FINITE_MATH_ONLY__ > 0))",
            '#error "compile this file without -ffast-math, -Ofast and -ffinite-math-only"',
            "#endif",
            "",
            comment(
                "No multiply-add may be fused: two roundings in every term, or the results differ in the last bits from "
                "the vectors. Compilers that know neither word need -ffp-contract=off; where fusing cannot be "
                f"switched off, build the self-test with {p.upper()}_TOLERANCE."
            ),
            "#if defined(__clang__) || !defined(__GNUC__)",
            "#pragma STDC FP_CONTRACT OFF",
            "#else",
            '#pragma GCC optimize ("fp-contract=off")',
            "#endif",
            "",
            "#if defined(__AVR__)",
            "#include <avr/pgmspace.h>",
            "#define IN_FLASH PROGMEM",
            "#define FETCH(place) pgm_read_float(&(place))",
            "#else",
            "#define IN_FLASH",
            "#define FETCH(place) (place)",
            "#endif",
            "",
            f"#define STANCES {len(program.stances)}u",
            *([f"#define UNITS {len(program.units)}u"] if len(program.units) > 1 else []),
            f"#define PATIENCE {program.patience}u",
        ]
    )


def _tables(program: Program) -> list[str]:
    said = origin(program)
    out = [table(program, "line_gains", program.line, _values(program.line, program), "float", said)]
    for i, row in enumerate(program.moves):
        out.append(table(program, f"memory_{i}_gains", row, _values(row, program), "float", said))
    for i, row in enumerate(program.held_moves):
        if row.terms:
            out.append(table(program, f"held_{i}_gains", row, _values(row, program), "float", said))
    for i, row in enumerate(program.inputs):
        out.append(
            table(
                program,
                f"unit_{i}_gains",
                row,
                _values(row, program),
                "float",
                "share of the line command, and what keeps several units level",
            )
        )
    n = range(len(program.stances))
    out.append(
        per_stance(
            "line_limit",
            "float",
            [[number(program.line.limits[s])] for s in n],
            f"largest line command, {program.line.unit}",
        )
    )
    out.append(
        per_stance(
            "unit_limits",
            "float",
            [[number(row.limits[s]) for row in program.inputs] for s in n],
            f"largest command of each unit ({', '.join(program.units)}), {program.inputs[0].unit}",
        )
    )
    out.append(
        per_stance(
            "rests",
            "float",
            [[number(r.rest[s]) for r in program.readings] for s in n],
            "what each reading is counted from; lean: from the balanced lean",
        )
    )
    if len(program.units) > 1:
        out.append(
            per_stance(
                "line_share",
                "float",
                [[number(row[s]) for row in program.line_share] for s in n],
                "torque about the line per unit of each unit's command",
            )
        )
        out.append(
            per_stance(
                "unit_per_line",
                "float",
                [[number(1.0 / row[s] if row[s] else 0.0) for row in program.line_share] for s in n],
                "the other way round; zero where a unit cannot act about the line",
            )
        )
    if program.inertial:
        out.append(
            per_stance(
                "axes",
                "float",
                [[number(x) for axis in stance for x in axis] for stance in program.axes],
                "e along the contact line, u up, w outward, each in the trunk's x, y, z",
            )
        )
    return out


def _values(row: Row, program: Program) -> Sequence[Sequence[str]]:
    return [[number(term.gains[s]) for term in row.terms] or ["0.0f"] for s in range(len(program.stances))]


def _small(program: Program) -> str:
    return """/* one term of a sum: two roundings */
static float plus(float sum, float gain, float value)
{
    const float part = gain * value;
    return sum + part;
}

static float within(float value, float most)
{
    float held = value;
    if (held < -most) { held = -most; }
    if (held > most) { held = most; }
    return held;
}

/* false for a value that is no number */
static uint8_t believed(float value, float most)
{
    return ((value >= -most) && (value <= most)) ? 1u : 0u;
}"""


def _along(program: Program) -> str:
    if not program.inertial:
        return ""
    return """/* a vector's part along e (0), u (3) or w (6) */
static float along(uint8_t stance, uint8_t first, float x, float y, float z)
{
    float sum = 0.0f;
    sum = plus(sum, FETCH(axes[stance][first]), x);
    sum = plus(sum, FETCH(axes[stance][first + 1u]), y);
    sum = plus(sum, FETCH(axes[stance][first + 2u]), z);
    return sum;
}"""


def _tilt() -> str:
    steps = "\n".join(f"    series = (series + {_signed(c)}) * square;" for c in reversed(SERIES))
    return f"""/* the angle between the specific force and u, about e; its arctangent is r + r c(r^2), good to 1e-6 rad */
static float tilt_of(float up, float force_out, uint16_t *flags)
{{
    const float across = -force_out;
    const float size = (across < 0.0f) ? -across : across;
    float ratio;
    float square;
    float series = 0.0f;
    if ((size <= up) && (up > 0.0f)) {{
        ratio = across / up;
    }} else {{
        ratio = (across >= 0.0f) ? 1.0f : -1.0f;
        *flags |= FLAG_TILT_LIMITED;
    }}
    square = ratio * ratio;
{steps}
    series = ratio * series;
    return ratio + series;
}}"""


def _signed(value: float) -> str:
    return f"({number(value)})" if value < 0 else number(value)


def _take(dialect: Dialect, program: Program) -> str:
    values = []
    for reading in program.readings:
        if reading.kind == DIRECT:
            values.append(f"reading->{reading.field}")
        elif reading.kind == TILT:
            forces = ", ".join(f"reading->accel_{axis}_m_s2" for axis in "xyz")
            values.append(f"tilt_of(along(s, 3u, {forces}), along(s, 6u, {forces}), flags)")
        else:
            values.append("along(s, 0u, " + ", ".join(f"reading->gyro_{axis}_rad_s" for axis in "xyz") + ")")
    tests = [f"(believed(reading->{f.name}, {number(f.most)}) != 0u)" for f in fields_of(program)]
    return take(dialect, tests, values)


def _sum(row: Row, name: str, target: str) -> str:
    """Return the statements that work out one row into `target`."""
    where = {MEMORY: "state->memory[{}]", LINE: "line"}
    lines = [f"    {target} = 0.0f;"]
    for k, term in enumerate(row.terms):
        value = where.get(term.source, "state->last[{}]").format(term.place)
        lines.append(f"    {target} = plus({target}, FETCH({name}[s][{k}]), {value});")
    return "\n".join(lines)


def _rows(dialect: Dialect, program: Program) -> str:
    moves = [_sum(row, f"memory_{i}_gains", f"next[{i}]") for i, row in enumerate(program.moves)]
    asks = [
        _sum(row, f"unit_{i}_gains", f"command->{field}")
        for i, (row, field) in enumerate(zip(program.inputs, commands_of(program), strict=True))
    ]
    held = [_sum(row, f"held_{i}_gains", f"next[{i}]") for i, row in enumerate(program.held_moves)]
    return rows(dialect, _sum(program.line, "line_gains", "sum"), moves, held, asks)


def _share(dialect: Dialect, program: Program) -> str:
    names = commands_of(program)
    if len(names) == 1:
        return hold_alone(dialect, names[0])
    loads = "\n".join(f"    u[{i}] = command->{name};" for i, name in enumerate(names))
    stores = "\n".join(f"    command->{name} = u[{i}];" for i, name in enumerate(names))
    return f"""/* hold each command within its limit; what is missing about the line the others take over, by their room */
static void hold({program.prefix}_command *command, uint8_t s, uint16_t *flags)
{{
    float u[UNITS];
    float rooms[UNITS];
    float missing = 0.0f;
    float room = 0.0f;
    uint8_t i;
{loads}
    for (i = 0u; i < UNITS; i++) {{
        const float held = within(u[i], FETCH(unit_limits[s][i]));
        if ((held < u[i]) || (held > u[i])) {{
            *flags |= FLAG_UNIT_LIMITED;
            missing = plus(missing, FETCH(line_share[s][i]), u[i] - held);
        }}
        u[i] = held;
    }}
    if ((missing < 0.0f) || (missing > 0.0f)) {{
        for (i = 0u; i < UNITS; i++) {{
            const float share = FETCH(line_share[s][i]);
            const float size = (share < 0.0f) ? -share : share;
            const float toward = ((missing * share) >= 0.0f) ? u[i] : -u[i];
            rooms[i] = size * (FETCH(unit_limits[s][i]) - toward);
            room = room + rooms[i];
        }}
        if (room > 0.0f) {{
            float part = ((missing < 0.0f) ? -missing : missing) / room;
            if (part > 1.0f) {{ part = 1.0f; }}
            for (i = 0u; i < UNITS; i++) {{
                const float given = part * rooms[i];
                const float more = given * FETCH(unit_per_line[s][i]);
                u[i] = within((missing > 0.0f) ? (u[i] + more) : (u[i] - more), FETCH(unit_limits[s][i]));
            }}
            *flags |= FLAG_SHARED_OUT;
        }}
    }}
{stores}
}}"""


def _short(dialect: Dialect, program: Program) -> str:
    calls = []
    for name, window in zip(commands_of(program), program.windows, strict=True):
        if window is not None:
            sag = f"{number(window.slope)} * state->last[{window.reading}]"
            calls.append(f"command->{name}, {sag}, {number(window.stall)}, {number(window.most)}")
    return look_at_voltage(dialect, calls)


def flag_names(prefix: str, text: str) -> str:
    """Return the text with every FLAG_ word under the C prefix of a design."""
    for name in FLAGS:
        text = text.replace(f"FLAG_{name}", f"{prefix.upper()}_{name}")
    return text
