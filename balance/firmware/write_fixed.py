"""The law in whole numbers as C99: 32-bit signals, 16-bit gains, constant shifts, no 64-bit product, no division."""

from __future__ import annotations

from collections.abc import Sequence

from balance.firmware.atan import SERIES
from balance.firmware.dialect import Dialect, commands_of, hold_alone, look_at_voltage, rows, take, update
from balance.firmware.fields import fields_of
from balance.firmware.fixed_model import AXIS, RATIO
from balance.firmware.fixed_snippets import ALONG, RATIO_OF, SIZE, SMALL
from balance.firmware.program import DIRECT, LINE, MEMORY, TILT, Program, Row
from balance.firmware.scaling import Fixed, FixedRow, FixedTerm
from balance.firmware.text import comment, origin, per_stance, table


def write_fixed(fixed: Fixed) -> str:
    """Return the text of PREFIX_fixed.c; FLAG_ words are still to be named."""
    program = fixed.program
    dialect = Dialect(f"{program.prefix}_fixed", "int32_t", "0", "FETCH_LONG")
    blocks = [_head(program), *_tables(fixed), SMALL]
    if program.inertial or len(program.units) > 1:
        blocks += [SIZE, RATIO_OF]
    if program.inertial:
        blocks.append(ALONG)
    if any(reading.kind == TILT for reading in program.readings):
        blocks.append(_tilt())
    blocks += [_take(dialect, fixed), _rows(dialect, fixed), _share(dialect, fixed), _short(dialect, fixed)]
    blocks.append(update(dialect, program))
    return "\n\n".join(block for block in blocks if block) + "\n"


def _head(program: Program) -> str:
    return "\n".join(
        [
            comment(
                f"{program.design} on {program.machine}: the law in fixed point. Written by {program.tool}; do not edit: "
                "change the design and write it again.",
                f"Design stamp (SHA-256): {program.seal}",
                "Every signal is a 32-bit whole number, value = number / 2^places; every gain has 16 bits and a "
                "constant shift. No admissible reading takes any product or sum out of 32 bits: all ranges were worked "
                "out when this was written.",
            ),
            f'#include "{program.prefix}_fixed.h"',
            "",
            "#if defined(__AVR__)",
            "#include <avr/pgmspace.h>",
            "#define IN_FLASH PROGMEM",
            "#define FETCH(place) ((int16_t)pgm_read_word(&(place)))",
            "#define FETCH_LONG(place) ((int32_t)pgm_read_dword(&(place)))",
            "#else",
            "#define IN_FLASH",
            "#define FETCH(place) (place)",
            "#define FETCH_LONG(place) (place)",
            "#endif",
            "",
            "#if defined(__GNUC__)",
            "#define INLINED static inline __attribute__((always_inline))",
            "#else",
            "#define INLINED static inline",
            "#endif",
            "",
            f"#define STANCES {len(program.stances)}u",
            *([f"#define UNITS {len(program.units)}u"] if len(program.units) > 1 else []),
            f"#define PATIENCE {program.patience}u",
            "",
            "/* shifting a negative number right must round down, as every compiler we know does: checked here */",
            "typedef char shift_rounds_down[((-3 >> 1) == -2) ? 1 : -1];",
        ]
    )


def _tables(fixed: Fixed) -> list[str]:
    program, said = fixed.program, origin(fixed.program)
    out = [_table(program, "line_gains", program.line, fixed.line, said)]
    for i, (row, scaled) in enumerate(zip(program.moves, fixed.moves, strict=True)):
        out.append(_table(program, f"memory_{i}_gains", row, scaled, said))
    for i, (row, scaled) in enumerate(zip(program.held_moves, fixed.held_moves, strict=True)):
        if row.terms:
            out.append(_table(program, f"held_{i}_gains", row, scaled, said))
    for i, (row, scaled) in enumerate(zip(program.inputs, fixed.inputs, strict=True)):
        out.append(
            _table(program, f"unit_{i}_gains", row, scaled, "share of the line command, and what keeps units level")
        )
    n = range(len(program.stances))
    out.append(
        per_stance(
            "line_limit",
            "int32_t",
            [[f"INT32_C({fixed.line.limits[s]})"] for s in n],
            f"largest line command, {fixed.line.places} places",
        )
    )
    out.append(
        per_stance(
            "unit_limits",
            "int32_t",
            [[f"INT32_C({row.limits[s]})" for row in fixed.inputs] for s in n],
            f"largest command of each unit ({', '.join(program.units)})",
        )
    )
    out.append(
        per_stance(
            "rests",
            "int32_t",
            [[f"INT32_C({r[s]})" for r in fixed.rests] for s in n],
            "what each reading is counted from; lean: from the balanced lean",
        )
    )
    if fixed.share:
        out.append(
            per_stance(
                "line_share",
                "int16_t",
                [[str(t.gains[s]) for t in fixed.share] for s in n],
                "torque about the line per unit of each unit's command",
            )
        )
        out.append(
            per_stance(
                "unit_per_line",
                "int16_t",
                [[str(t.gains[s]) for t in fixed.back] for s in n],
                "the other way round; zero where a unit cannot act about the line",
            )
        )
    if program.inertial:
        out.append(
            per_stance(
                "axes",
                "int16_t",
                [[str(round(x * 2**AXIS)) for axis in stance for x in axis] for stance in program.axes],
                f"e along the contact line, u up, w outward, each in the trunk's x, y, z; {AXIS} places",
            )
        )
    return out


def _table(program: Program, name: str, row: Row, scaled: FixedRow, said: str) -> str:
    values: Sequence[Sequence[str]] = [[str(t.gains[s]) for t in scaled.terms] for s in range(len(program.stances))]
    kept = "; what the old value keeps is its distance from one" if scaled.keeps else ""
    return table(program, name, row, values, "int16_t", f"{said}; result has {scaled.places} places{kept}")


def _tilt() -> str:
    steps = "\n".join(
        f"    series = down((series + INT32_C({round(c * 2**15)})) * square, 15u);" for c in reversed(SERIES)
    )
    return f"""/* the angle between the specific force and u, about e, with {RATIO} places; its arctangent is r + r c(r^2) */
static int32_t tilt_of(int32_t up, int32_t force_out, uint16_t *flags)
{{
    const int32_t across = -force_out;
    const int32_t size = size_of(across);
    int32_t ratio = INT32_C({2**RATIO});
    int32_t narrow;
    int32_t square;
    int32_t series = 0;
    if ((size > up) || (up <= 0)) {{
        *flags |= FLAG_TILT_LIMITED;
    }} else if (size < up) {{
        ratio = ratio_of(size, up, {RATIO}u);
    }} else {{
        /* exactly 45 degrees */
    }}
    narrow = down(ratio, {RATIO - 15}u);
    if (narrow > INT32_C(32767)) {{ narrow = INT32_C(32767); }}
    square = down(narrow * narrow, 15u);
    if (square > INT32_C(32767)) {{ square = INT32_C(32767); }}
{steps}
    ratio = ratio + (product(ratio, (int16_t)series) * 2);
    return (across >= 0) ? ratio : -ratio;
}}"""


def _moved(expression: str, shift: int) -> str:
    """Return a whole number times 2^shift, rounded down."""
    if shift == 0:
        return expression
    return f"({expression} * INT32_C({2**shift}))" if shift > 0 else f"down({expression}, {-shift}u)"


def _take(dialect: Dialect, fixed: Fixed) -> str:
    program, values, moved, direct = fixed.program, [], "", 0
    for reading, places in zip(program.readings, fixed.readings, strict=True):
        if reading.kind == DIRECT:
            values.append(_moved(f"reading->{reading.field}", places - fixed.fields[direct]))
            direct += 1
        elif reading.kind == TILT:
            forces = ", ".join(f"reading->accel_{axis}_m_s2" for axis in "xyz")
            values.append(f"tilt_moved(tilt_of(along(s, 3u, {forces}), along(s, 6u, {forces}), flags))")
            moved = _tilt_moved(places) + "\n\n"
        else:
            values.append("along(s, 0u, " + ", ".join(f"reading->gyro_{axis}_rad_s" for axis in "xyz") + ")")
    tests = [
        f"(believed(reading->{f.name}, INT32_C({most})) != 0u)"
        for f, most in zip(fields_of(program), fixed.believed, strict=True)
    ]
    return moved + take(dialect, tests, values)


def _tilt_moved(places: int) -> str:
    return f"""/* from {RATIO} places to the signal's own, rounding the magnitude down */
static int32_t tilt_moved(int32_t angle)
{{
    const int32_t size = {_moved("size_of(angle)", places - RATIO)};
    return (angle >= 0) ? size : -size;
}}"""


def _term(term: FixedTerm, table_name: str, k: int, value: str) -> str:
    return _moved(f"product({value}, FETCH({table_name}[s][{k}]))", term.shift)


def _sum(row: FixedRow, name: str, target: str, old: str) -> str:
    where = {MEMORY: "state->memory[{}]", LINE: "line"}
    lines = [f"    {target} = {old if row.keeps else '0'};"]
    for k, term in enumerate(row.terms):
        value = where.get(term.source, "state->last[{}]").format(term.place)
        lines.append(f"    {target} = {target} + {_term(term, name, k, value)};")
    return "\n".join(lines)


def _rows(dialect: Dialect, fixed: Fixed) -> str:
    moves = [_sum(row, f"memory_{i}_gains", f"next[{i}]", f"state->memory[{i}]") for i, row in enumerate(fixed.moves)]
    asks = [
        _sum(row, f"unit_{i}_gains", f"command->{field}", "0")
        for i, (row, field) in enumerate(zip(fixed.inputs, commands_of(fixed.program), strict=True))
    ]
    held = [_sum(row, f"held_{i}_gains", f"next[{i}]", f"state->memory[{i}]") for i, row in enumerate(fixed.held_moves)]
    return rows(dialect, _sum(fixed.line, "line_gains", "sum", "0"), moves, held, asks)


def _share(dialect: Dialect, fixed: Fixed) -> str:
    names, p = commands_of(fixed.program), dialect.prefix
    if not fixed.share:
        return hold_alone(dialect, names[0])
    n = range(len(names))
    clips = "\n".join(
        f"""    held = within(command->{names[i]}, FETCH_LONG(unit_limits[s][{i}]));
    if (held != command->{names[i]}) {{
        *flags |= FLAG_UNIT_LIMITED;
        missing = missing + {_term(fixed.share[i], "line_share", i, f"(command->{names[i]} - held)")};
    }}
    command->{names[i]} = held;"""
        for i in n
    )
    rooms = "\n".join(
        f"""        rising[{i}] = ((FETCH(line_share[s][{i}]) >= 0) == (missing > 0)) ? 1u : 0u;
        held = FETCH_LONG(unit_limits[s][{i}]) - ((rising[{i}] != 0u) ? command->{names[i]} : -command->{names[i]});
        rooms[{i}] = size_of({_term(fixed.share[i], "line_share", i, "held")});
        room = room + rooms[{i}];"""
        for i in n
    )
    gives = "\n".join(
        f"""            held = product(rooms[{i}], part) * 2;
            held = size_of({_term(fixed.back[i], "unit_per_line", i, "held")});
            command->{names[i]} = within((rising[{i}] != 0u) ? (command->{names[i]} + held) : (command->{names[i]} - held),
                FETCH_LONG(unit_limits[s][{i}]));"""
        for i in n
    )
    return f"""/* hold each command within its limit; what is missing about the line the others take over, by their room */
static void hold({p}_command *command, uint8_t s, uint16_t *flags)
{{
    int32_t rooms[UNITS];
    uint8_t rising[UNITS];
    int32_t missing = 0;
    int32_t room = 0;
    int32_t held;
{clips}
    if (missing != 0) {{
{rooms}
        if (room > 0) {{
            const int32_t size = size_of(missing);
            const int16_t part = (size >= room) ? (int16_t)32767 : (int16_t)ratio_of(size, room, 15u);
{gives}
            *flags |= FLAG_SHARED_OUT;
        }}
    }}
}}"""


def _short(dialect: Dialect, fixed: Fixed) -> str:
    calls = []
    for name, window in zip(commands_of(fixed.program), fixed.windows, strict=True):
        if window is not None:
            sag = _moved(f"product(state->last[{window.reading}], (int16_t){window.gain})", window.shift)
            asked = _moved(f"command->{name}", window.drop)
            calls.append(f"{asked}, {sag}, INT32_C({window.stall}), INT32_C({window.most})")
    return look_at_voltage(dialect, calls)
