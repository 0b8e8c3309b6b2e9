"""The C against its Python models, vector by vector: on this machine and on every emulated target, both variants."""

from __future__ import annotations

from pathlib import Path

import pytest

from balance.firmware.flags import FLAGS
from balance.firmware.vectors import plan_vectors
from balance.firmware.vectors_float import float_vectors
from tests.firmware.builds import CASES, package, written
from tests.firmware.targets.run import TARGETS, TargetRun, need, run_on

MAIN = """
#include "{prefix}.h"
#include "board.h"

static {prefix}_state state;
static {prefix}_reading reading;
static {prefix}_command command;

int main(void)
{{
    static char line[] = "differ 0000";
    uint16_t differ = {prefix}_selftest();
    uint8_t i;
    for (i = 0u; i < 4u; i++) {{ line[10u - i] = "0123456789abcdef"[(differ >> (4u * i)) & 15u]; }}
    put_line(line);
    {prefix}_init(&state, 0u, {big}_PERIOD({period}));
    mark_start();
    for (i = 0u; i < 100u; i++) {{ (void){prefix}_update(&state, &reading, &command); }}
    mark_stop();
    mark_start();
    (void){prefix}_update(&state, &reading, &command);
    mark_stop();
    return 0;
}}
"""


def run_case(case: str, variant: str, target: str, folder: Path, *, spoil: str = "") -> TargetRun:
    """Build and run a case's self-test on a target; `spoil`: a number in the C that is made wrong."""
    home, p = written(case, folder), package(case).program.prefix + variant
    main = home / f"main{variant}.c"
    main.write_text(MAIN.format(prefix=p, big=p.upper(), period=package(case).program.period_us), encoding="utf-8")
    source = home / "src" / f"{p}.c"
    if spoil:
        text = source.read_text(encoding="utf-8")
        assert spoil in text
        source.write_text(text.replace(spoil, "1", 1), encoding="utf-8")
    return run_on(target, [source, home / "src" / f"{p}_selftest.c", main], home / target / (variant or "float"),
                  [home / "src"], ["-O2", f"-D{p.upper()}_SELFTEST"])


@pytest.mark.parametrize("case", CASES)
def test_the_vectors_are_many_and_meet_everything(case: str) -> None:
    program = package(case).program
    plan = plan_vectors(program)
    vectors = float_vectors(program, plan)
    assert len(vectors.flags) >= 512
    met = {name for name, (bit, _) in FLAGS.items() if any(flags & bit for flags in vectors.flags)}
    expected = {"LINE_LIMITED", "STALE", "SAFE", "HELD"}
    if len(program.units) > 1:
        expected |= {"UNIT_LIMITED", "SHARED_OUT"}
    if program.inertial:
        expected |= {"TILT_LIMITED"}
    if any(program.windows):
        expected |= {"VOLTAGE_SHORT"}
    assert expected <= met
    assert sum(flags == 0 for flags in vectors.flags) > 20           # and ordinary motion
    assert {1, 2} <= set(plan.actions)


@pytest.mark.parametrize("variant", ["", "_fixed"], ids=["float32", "fixed"])
@pytest.mark.parametrize("target", TARGETS)
@pytest.mark.parametrize("case", CASES)
def test_every_target_gives_the_models_bits(case: str, target: str, variant: str, tmp_path: Path) -> None:
    need(target)
    assert package(case).refused == ""
    run = run_case(case, variant, target, tmp_path)
    assert run.lines == ("differ 0000",)


@pytest.mark.parametrize("variant", ["", "_fixed"], ids=["float32", "fixed"])
def test_one_gain_off_is_seen(variant: str, tmp_path: Path) -> None:
    """The twin: one number of the C's first table changed."""
    need("host")
    table = (written("scout-wheels", tmp_path) / "src" / f"scout_wheels{variant}.c").read_text(encoding="utf-8")
    first = table.split("line_gains[STANCES]")[1].split("        ")[1].split(" ")[0].rstrip(",")
    run = run_case("scout-wheels", variant, "host", tmp_path, spoil=first)
    assert run.lines[0] != "differ 0000"


def test_tables_stay_in_flash_on_an_eight_bit_processor(tmp_path: Path) -> None:
    need("avr")
    run = run_case("scout-wheels", "_fixed", "avr", tmp_path)
    # the vectors alone are over 10 kB: with them in RAM the program could not even be linked into 8 kB; state and text stay
    assert run.text > 10_000
    assert run.data < 250


@pytest.mark.parametrize(("variant", "little", "much"), [("", "1e-9f", "2.0f"), ("_fixed", "1", "1073741823")],
                         ids=["float32", "fixed"])
def test_the_tolerance_mode_forgives_as_much_as_it_says(variant: str, little: str, much: str, tmp_path: Path) -> None:
    """One gain spoiled: the commands agree within a tolerance of the whole range (flags may not), and not within none."""
    need("host")
    home, p = written("bench-rig-pid", tmp_path), package("bench-rig-pid").program.prefix + variant
    source = home / "src" / f"{p}.c"
    text = source.read_text(encoding="utf-8")
    first = text.split("unit_0_gains[STANCES]")[1].split("        ")[1].split(" ")[0].rstrip(",")
    head, tail = text.split("unit_0_gains[STANCES]", 1)
    halved = f"{0.9 * float(first.rstrip('f')):.6g}f" if not variant else str(int(0.9 * int(first)))
    source.write_text(f"{head}unit_0_gains[STANCES]{tail.replace(first, halved, 1)}", encoding="utf-8")
    main = home / "main.c"
    period = package("bench-rig-pid").program.period_us
    main.write_text(MAIN.format(prefix=p, big=p.upper(), period=period), encoding="utf-8")
    differ = []
    for tolerance in (little, much):
        run = run_on("host", [source, home / "src" / f"{p}_selftest.c", main], home / f"t{tolerance}", [home / "src"],
                     ["-O2", f"-D{p.upper()}_SELFTEST", f"-D{p.upper()}_TOLERANCE={tolerance}"])
        differ.append(int(run.lines[0].split()[1], 16))
    assert differ[0] > 300
    assert differ[1] < 0.5 * differ[0]
