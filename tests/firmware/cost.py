"""What one update costs on every target: `python -m tests.firmware.cost` prints the table that stands in the README."""

from __future__ import annotations

import subprocess
import sys
import tempfile
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from balance.firmware.fields import fields_of
from tests.firmware.builds import package, written
from tests.firmware.targets.run import TARGETS, run_on
from tests.firmware.test_arithmetic import raw_of

CASES = ("scout-wheels", "bench-rig-sensed", "quay-gyros", "bench-rig-pid")
BUILD = ("-O2",)
UPDATES = 200
HEAD = ("| design | variant | code, bytes (M4F) | RAM state | stack (M4F) | instructions M4F | M3 | M0 "
        "| cycles ATmega2560 | limited |", "| --- | --- | --- | --- | --- | --- | --- | --- | --- | --- |")

MAIN = """
#include "{prefix}.h"
#include "board.h"
static {prefix}_state state;
static {prefix}_reading reading;
static {prefix}_command command;
volatile uint16_t said;
int main(void)
{{
    uint8_t i;
    {prefix}_init(&state, 0u, {big}_PERIOD({period}));
{fill}
    mark_start();
    for (i = 0u; i < {updates}u; i++) {{ said = {prefix}_update(&state, &reading, &command); }}
    mark_stop();
    mark_start();
    for (i = 0u; i < {updates}u; i++) {{ said = i; }}
    mark_stop();
    return 0;
}}
"""


@dataclass(frozen=True)
class Cost:
    """One update on one target."""

    count: float        # instructions, cycles on the ATmega2560
    stack: int          # bytes


def cost(case: str, variant: str, target: str, folder: Path, *, limited: bool = False) -> Cost:
    """Measure one update, in ordinary motion or with every limit at work; the empty loop is taken off."""
    home, program, fixed = written(case, folder), package(case).program, package(case).fixed
    p = program.prefix + variant
    values = _reading(case, variant, limited=limited)
    assert fixed is not None
    fill = "\n".join(f"    reading.{name} = {value};" for name, value in values.items())
    main = home / f"cost{variant}.c"
    text = MAIN.format(prefix=p, big=p.upper(), period=program.period_us, fill=fill, updates=UPDATES)
    main.write_text(text, encoding="utf-8")
    run = run_on(target, [home / "src" / f"{p}.c", main], home / target / f"cost{variant}", [home / "src"], BUILD)
    work, empty = run.spans
    return Cost((work.count - empty.count) / UPDATES, work.stack)


def code_bytes(case: str, variant: str, target: str, folder: Path) -> int:
    """Return the bytes of code and tables of the law's own object file."""
    home, p = written(case, folder), package(case).program.prefix + variant
    made = folder / f"{p}_{target}.o"
    words = TARGETS[target]
    subprocess.run([words.compiler, "-std=c99", *BUILD, *words.flags, "-c", str(home / "src" / f"{p}.c"), "-o", str(made)],
                   check=True, capture_output=True)
    size = subprocess.run([words.compiler.replace("gcc", "size"), str(made)], check=True, capture_output=True, text=True)
    return int(size.stdout.splitlines()[1].split()[0])


def _reading(case: str, variant: str, *, limited: bool) -> dict[str, str]:
    """Return a reading as C constants: a hundredth of a radian of lean, or more lean than any command holds."""
    program, fixed = package(case).program, package(case).fixed
    assert fixed is not None
    lean = 0.5 if limited else 0.01
    row = [lean if r.name in ("lean", "tilt") else 2.0 * lean if r.name in ("lean_rate", "gyro") else
           0.4 * r.most if limited else min(3.0, 0.1 * r.most) for r in program.readings]
    raw = raw_of(program, 0, np.array(row))
    return {field.name: f"INT32_C({round(value * 2.0**places)})" if variant else f"{value:.6f}f"
            for field, value, places in zip(fields_of(program), raw, fixed.fields, strict=True)}


def line(case: str, variant: str, folder: Path) -> str:
    """Return one row of the table."""
    program = package(case).program
    found = {name: cost(case, variant, name, folder) for name in ("m4f", "m3", "m0", "avr")}
    ram = 4 * (max(len(program.memory), 1) + len(program.readings)) + 4
    counts = " | ".join([f"{each.count:,.0f}" for each in found.values()]
                        + [f"{cost(case, variant, 'avr', folder, limited=True).count:,.0f}"])
    return (f"| {case} | {'fixed point' if variant else 'float32'} | {code_bytes(case, variant, 'm4f', folder):,} | {ram} | "
            f"{found['m4f'].stack} | {counts} |")


def main() -> None:
    """Print the table."""
    with tempfile.TemporaryDirectory() as folder:
        rows = [line(case, variant, Path(folder)) for case in CASES for variant in ("", "_fixed")]
    sys.stdout.write("\n".join([*HEAD, *rows]) + "\n")


if __name__ == "__main__":
    main()
