"""The header of either variant: axes and signs drawn, types, flags, the check of the sample period."""

from __future__ import annotations

from dataclasses import dataclass

from balance.firmware.dialect import commands_of
from balance.firmware.fields import fields_of
from balance.firmware.flags import FLAGS
from balance.firmware.names import macro
from balance.firmware.program import Program
from balance.firmware.text import comment

DRAWING = """\
/*  Looking along the contact line from the first foot to the second (e into the page):
 *
 *            u up                     e  along the line, from foot a to foot b
 *            ^    o centre of mass    u  up, square to the line
 *            |   /                    w  outward, away from the lifted foot: w = e x u
 *            |  / lean > 0
 *            | /                      lean, lean rate   positive: outward, about e
 *            |/                       wheel speed       positive: about the wheel's own axis, relative to the body
 *     -------x--------> w outward     wheel torque      what the motor gives the wheel; the body feels the opposite
 *       contact line (feet)           gimbal rate       positive: about the gimbal axis
 *
 *  Trunk axes, of the inertial sensor: x forward, y left, z up. Specific force at rest reads +9.81 m/s^2 on z.
 */"""

CAUTION = (
    "CAUTION. A flywheel stores energy and a falling machine does not wait. First runs on a tether and a hinge, the "
    "rotor contained and nobody in its plane, hands clear of gimbals and legs, battery fused. Check every sign with the "
    "actuators off: tilt it outward by hand and the torque must point as drawn. Local codes and a licensed "
    "engineer's judgement go before this file."
)


@dataclass(frozen=True)
class Numbers:
    """How a variant holds its numbers: C type, and how each field is scaled (words for the header)."""

    kind: str  # "float" | "int32_t"
    suffix: str  # of the prefix: "" | "_fixed"
    scales: dict[str, int]  # field -> binary places; empty for float


def write_header(program: Program, numbers: Numbers) -> str:
    """Return the text of PREFIX.h or PREFIX_fixed.h."""
    p = program.prefix + numbers.suffix
    big, scaled = p.upper(), _scaled() if numbers.scales else " SI."
    return f"""{_title(program, numbers)}
{DRAWING}
#ifndef {big}_H
#define {big}_H

#include <stdint.h>

#ifdef __cplusplus
extern "C" {{
#endif

{_period(program)}
#define {big}_PERIOD(microseconds) ((uint8_t)sizeof(char[((microseconds) == {program.period_us}L) ? 1 : -1]))

#define {big}_STAMP "{program.seal}"

/* stances: which feet are down */
{_stances(program, big)}

/* what an update says beside its commands */
{_flags(big)}

{comment("What is measured at the sampling instant." + scaled)}
typedef struct {{
{_fields(program, numbers)}
    uint8_t held; /* not 0 while the machine cannot fall (more feet down): commands stay zero, the estimator goes on */
}} {p}_reading;

{comment("What the units are asked for." + scaled)}
typedef struct {{
{_commands(program, numbers)}
}} {p}_command;

/* The caller's own; nothing in it is for reading. */
typedef struct {{
    {numbers.kind} memory[{max(len(program.memory), 1)}];
    {numbers.kind} last[{len(program.readings)}];
    uint8_t stance;
    uint8_t refused;
}} {p}_state;

/* Forget everything and stand on these feet; call it before the first update and whenever the feet change. `period`:
 * {big}_PERIOD(your period in microseconds). */
void {p}_init({p}_state *state, uint8_t stance, uint8_t period);

/* Forget everything, keep the stance. */
void {p}_reset({p}_state *state);

{_sample(program)}
uint16_t {p}_update({p}_state *state, const {p}_reading *reading, {p}_command *command);

#ifdef {big}_SELFTEST
{_proof(big, bool(numbers.scales))}
uint16_t {p}_selftest(void);
#endif

#ifdef __cplusplus
}}
#endif

#endif
"""


def _title(program: Program, numbers: Numbers) -> str:
    what = f"{program.design} on {program.machine}: balance law, {_words(numbers)}."
    return comment(
        f"{what} Written by {program.tool}; do not edit.", f"Design stamp (SHA-256): {program.seal}", "", CAUTION
    )


def _period(program: Program) -> str:
    return comment(
        f"The law is made for one period of the control loop, {program.period_us} microseconds; from sampling to the "
        f"command it counts on {program.latency * 1e3:g} ms. Give init your own period in microseconds through this: "
        "another one does not compile."
    )


def _sample(program: Program) -> str:
    samples = "1 sample" if program.patience == 1 else f"{program.patience} samples"
    return comment(
        "One sample: the command to put out now, and flags. A reading with a number that is no number or beyond "
        f"belief is refused; the last good one stands in for {samples}, then all commands are zero until a good one "
        "comes. No pointer may be null."
    )


def _proof(big: str, whole: bool) -> str:
    within = "of the command's last place" if whole else "parts of each unit's limit"
    return comment(
        "Run the vectors that came with the design; returns how many of them differ (0: all agree). Exact; with "
        f"{big}_TOLERANCE defined, within that many {within}."
    )


def _stances(program: Program, big: str) -> str:
    return "\n".join(f"#define {big}_STANCE_{macro(name)} {i}u" for i, name in enumerate(program.stances))


def _flags(big: str) -> str:
    return "\n".join(f"#define {big}_{name} {bit}u /* {says} */" for name, (bit, says) in FLAGS.items())


def _words(numbers: Numbers) -> str:
    return "float32" if numbers.kind == "float" else "fixed point, 32-bit signals and 16-bit gains"


def _scaled() -> str:
    return " Whole numbers; the binary places of each stand beside it: value = number / 2^places."


def _fields(program: Program, numbers: Numbers) -> str:
    lines = []
    for field in fields_of(program):
        scale = f", {numbers.scales[field.name]} binary places" if numbers.scales else ""
        lines.append(
            f"    {numbers.kind} {field.name}; /* {field.says}, {field.unit}{scale}; refused beyond {field.most:.6g} */"
        )
    return "\n".join(lines)


def _commands(program: Program, numbers: Numbers) -> str:
    lines = []
    for name, row in zip(commands_of(program), program.inputs, strict=True):
        scale = f", {numbers.scales[name]} binary places" if numbers.scales else ""
        lines.append(f"    {numbers.kind} {name}; /* {row.says}, {row.unit}{scale} */")
    return "\n".join(lines)
