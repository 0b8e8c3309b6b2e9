"""The vectors in C, and the function that runs them on the target."""

from __future__ import annotations

from balance.firmware.dialect import commands_of
from balance.firmware.fields import fields_of
from balance.firmware.program import Program
from balance.firmware.text import comment
from balance.firmware.vectors import REPEATS
from balance.firmware.vectors_float import Vectors


def write_selftest(program: Program, vectors: Vectors, kind: str, suffix: str) -> str:
    """Return the text of PREFIX_selftest.c for a variant; `kind`: "float" or "int32_t"."""
    p, fields, commands = program.prefix + suffix, fields_of(program), commands_of(program)
    n, big = len(vectors.flags), (program.prefix + suffix).upper()
    reading = "\n".join(f"    reading->{f.name} = {_value('readings', str(i), kind)};" for i, f in enumerate(fields))
    reading += "\n    reading->held = FETCH_BYTE(held[at]);"
    checks = "\n".join(
        f"    if (alike(command->{name}, {_value('answers', str(i), kind)}, {_limit(program, i, kind)}) == 0u) "
        "{ same = 0u; }"
        for i, name in enumerate(commands)
    )
    return f"""{
        comment(
            f"{program.design}: {n} vectors, answered by a model of the arithmetic that is not this C.",
            f"Design stamp (SHA-256): {program.seal}",
        )
    }
#include "{p}.h"

#ifdef {big}_SELFTEST

#if defined(__AVR__)
#include <avr/pgmspace.h>
#define IN_FLASH PROGMEM
#define FETCH_WORD(place) pgm_read_dword(&(place))
#define FETCH_BYTE(place) pgm_read_byte(&(place))
#else
#define IN_FLASH
#define FETCH_WORD(place) (place)
#define FETCH_BYTE(place) (place)
#endif

#define VECTORS {n}u

{
        _bytes(
            "actions",
            vectors.actions,
            f"before the reading: 0 nothing, 1 reset, 2 init, 3 the same reading {REPEATS} times",
        )
    }

{_bytes("stances", vectors.stances, "the stance to init")}

{_bytes("held", vectors.held, "whether the machine is held")}

{_bytes("flags_due", vectors.flags, "flags")}

{_words("readings", vectors.readings.tolist())}

{_words("answers", vectors.commands.tolist())}

{_number(kind, big)}

static void read_vector(uint16_t at, {p}_reading *reading)
{{
{reading}
}}

static uint8_t compare(uint16_t at, const {p}_command *command)
{{
    uint8_t same = 1u;
{checks}
    return same;
}}

uint16_t {p}_selftest(void)
{{
    {p}_state state;
    {p}_reading reading;
    {p}_command command;
    uint16_t differ = 0u;
    uint16_t at;
    {p}_init(&state, 0u, {big}_PERIOD({program.period_us}));
    for (at = 0u; at < VECTORS; at++) {{
        const uint8_t action = FETCH_BYTE(actions[at]);
        uint8_t more = (action == 3u) ? {REPEATS}u : 0u;
        uint16_t flags;
        if (action == 2u) {{ {p}_init(&state, FETCH_BYTE(stances[at]), {big}_PERIOD({program.period_us})); }}
        if (action == 1u) {{ {p}_reset(&state); }}
        read_vector(at, &reading);
        while (more > 0u) {{
            (void){p}_update(&state, &reading, &command);
            more--;
        }}
        flags = {p}_update(&state, &reading, &command);
        if ((compare(at, &command) == 0u) || (flags != FETCH_BYTE(flags_due[at]))) {{ differ++; }}
    }}
    return differ;
}}

#endif
"""


def _value(table: str, place: str, kind: str) -> str:
    word = f"FETCH_WORD({table}[at][{place}])"
    return f"number_of({word})" if kind == "float" else f"(int32_t){word}"


def _limit(program: Program, i: int, kind: str) -> str:
    """Return the largest limit of a unit, which the tolerance is a part of."""
    most = max(program.inputs[i].limits)
    return (
        f"{most:.9g}f"
        if kind == "float" and any(c in f"{most:.9g}" for c in ".e")
        else (f"{most:.9g}.0f" if kind == "float" else "0")
    )


def _number(kind: str, big: str) -> str:
    if kind != "float":
        return """#if defined(TOLERANCE)
static uint8_t alike(int32_t given, int32_t due, int32_t most)
{
    const int32_t apart = given - due;
    (void)most;
    return ((apart <= (TOLERANCE)) && (apart >= -(TOLERANCE))) ? 1u : 0u;
}
#else
static uint8_t alike(int32_t given, int32_t due, int32_t most)
{
    (void)most;
    return (given == due) ? 1u : 0u;
}
#endif""".replace("TOLERANCE", f"{big}_TOLERANCE")
    return """typedef union { uint32_t word; float number; } both;

static float number_of(uint32_t word)
{
    both it;
    it.word = word;
    return it.number;
}

#if defined(TOLERANCE)
static uint8_t alike(float given, float due, float most)
{
    const float apart = given - due;
    return ((apart <= (TOLERANCE * most)) && (apart >= -(TOLERANCE * most))) ? 1u : 0u;
}
#else
static uint8_t alike(float given, float due, float most)
{
    both a;
    both b;
    (void)most;
    a.number = given;
    b.number = due;
    return (a.word == b.word) ? 1u : 0u;
}
#endif""".replace("TOLERANCE", f"{big}_TOLERANCE")


def _bytes(name: str, values: tuple[int, ...], says: str) -> str:
    lines = [", ".join(f"{v}u" for v in values[i : i + 24]) for i in range(0, len(values), 24)]
    return f"/* {says} */\nstatic const uint8_t {name}[VECTORS] IN_FLASH = {{\n    " + ",\n    ".join(lines) + "\n};"


def _words(name: str, rows: list[list[int]]) -> str:
    lines = ["{ " + ", ".join(f"0x{v & 0xFFFFFFFF:08x}u" for v in row) + " }" for row in rows]
    return f"static const uint32_t {name}[VECTORS][{len(rows[0])}] IN_FLASH = {{\n    " + ",\n    ".join(lines) + "\n};"
