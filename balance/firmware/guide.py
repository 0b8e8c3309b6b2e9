"""The page a firmware engineer reads first: how to call it, build it, prove it, and what to look out for."""

from __future__ import annotations

from collections.abc import Sequence

from balance.design.records import Design
from balance.firmware.dialect import commands_of
from balance.firmware.fields import fields_of
from balance.firmware.gain_table import gain_tables
from balance.firmware.header import CAUTION
from balance.firmware.names import macro
from balance.firmware.program import Program
from balance.firmware.quantised import Rounding
from balance.firmware.reach import settling_samples
from balance.firmware.rounding_tables import rounding_tables
from balance.firmware.scaling import Fixed


def write_guide(
    designs: Sequence[Design],
    program: Program,
    fixed: Fixed | None,
    refused: str,
    float_cost: Sequence[Rounding],
    fixed_cost: Sequence[Rounding],
) -> str:
    """Return the text of README.md in a firmware folder."""
    p, big = program.prefix, program.prefix.upper()
    variants = f"`{p}` (float32)" + (f" and `{p}_fixed` (32-bit signals, 16-bit gains)" if fixed else "")
    return f"""# {program.design}: balance law for {program.machine}

{CAUTION}

Written by {program.tool}. Design stamp (SHA-256) `{program.seal}`: the same design gives the same files. `sha256sum --check
SHA256SUMS` tells whether anything was changed since.

## Calling it

```c
#include "{p}.h"

static {p}_state state;                 /* yours: nothing is kept anywhere else */

void control_setup(void)
{{
    {p}_init(&state, {big}_STANCE_{macro(program.stances[0])}, {big}_PERIOD({program.period_us}));
}}

void control_tick(void)                 /* every {program.period_us} microseconds, from a timer */
{{
    {p}_reading reading;
    {p}_command command;
    uint16_t flags;
{_fill(program)}
    reading.held = /* not 0 while more feet are down or a hand holds it */;
    flags = {p}_update(&state, &reading, &command);
{_use(program)}
    if ((flags & {big}_SAFE) != 0u) {{ /* no good reading for too long: catch the machine */ }}
}}
```

A sample that was missed (sensor late, bus error): call `update` all the same, with any number out of range (`NAN`, or
`INT32_MIN` in fixed point). The last good reading stands in, and after {program.patience} of them in a row all
commands are zero.

{_before_release(designs)}

The command must reach the actuators {program.latency * 1e3:g} ms after the readings were taken: the gains count on it. Call
`init` with another stance when other feet are down. Variants: {variants}.
{_refused(refused)}
## Building it

- Arduino: put the folder among the libraries. PlatformIO: name it under `lib_extra_dirs` or put it into `lib/`.
- CMake: `add_subdirectory` the folder, link `{p}`. Zephyr: add the folder to `ZEPHYR_EXTRA_MODULES`, set
  `CONFIG_{big}=y`.
- Anything else: compile `src/{p}.c` as C99. It needs `stdint.h` and nothing more (on AVR also `avr/pgmspace.h`: all
  tables stay in flash).

Two roundings in every multiply-add are part of the float32 law: the sources switch fused multiply-add off for GCC and Clang
(`-ffp-contract=off` for others). Where that cannot be done, the last bits differ and the machine does not notice.
`-ffast-math` is refused: it lets the compiler take a number that is none for a good one.

## Proving it

Compile with `{big}_SELFTEST` defined and call `{p}_selftest()` on the target: it runs vectors whose answers come from a
model of the arithmetic in Python, and returns how many differ; 0 means bit for bit. With `{big}_TOLERANCE` defined
as, say, `1e-5f`, the commands may differ by that part of each unit's limit.

MISRA C:2012: the fixed-point source shifts signed numbers right in one function (`down`, rule 10.1); a line beside it
makes sure that the compiler rounds down. The float self-test reads bits through a union (advisory rule 19.2).

## What rounding costs

{rounding_tables("float32", float_cost)}
{rounding_tables("fixed point", fixed_cost)}
## Gains

u = -K x on the stated states; positive lean is outward. Every number the firmware multiplies with is here once more under
"per sample"; with "whole number g, shift n" the fixed-point term is ((signal * g) >> 16) * 2^n.

{gain_tables(designs, program, fixed)}
"""


def _fill(program: Program) -> str:
    return "\n".join(f"    reading.{f.name} = /* {f.says}, {f.unit} */;" for f in fields_of(program))


def _use(program: Program) -> str:
    return "\n".join(
        f"    /* put out command.{name} ({row.unit}) */"
        for name, row in zip(commands_of(program), program.inputs, strict=True)
    )


def _before_release(designs: Sequence[Design]) -> str:
    """Return how long the memory needs before the machine may be let go."""
    counts = [settling_samples(design.law) for design in designs]
    if min(counts) == 0:
        return "The memory starts empty and does not forget by itself: set `held` from `init` to the moment of release."
    seconds = max(counts) * designs[0].law.sample_time
    return (
        "The memory (past commands, filters, the estimate of the lean) starts empty. Before the machine is let go, call\n"
        f"`update` with `held` set for at least {max(counts)} samples, {seconds:.3g} s: 1 % of the wrong start is left.\n"
        "The same holds after a spell of SAFE: catch the machine, then begin anew."
    )


def _refused(why: str) -> str:
    return f"\nNo fixed-point variant was written: {why}.\n" if why else ""
