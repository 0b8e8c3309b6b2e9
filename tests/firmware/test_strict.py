"""The generated C under every strict reader: GCC, G++, Clang, cppcheck with its MISRA rules, sanitisers on extreme input."""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

import pytest

from tests.firmware.builds import CASES, package, written
from tests.firmware.targets.run import need

GCC = ("gcc", "-std=c99", "-Wall", "-Wextra", "-Wpedantic", "-Wconversion", "-Wdouble-promotion", "-Werror", "-O2")
CLANG = ("clang", "-std=c99", "-Weverything", "-Wno-padded", "-Werror")
"""Stated exception: padding at the end of the state struct is of no interest."""

VARIANTS = ["", "_fixed"]

REQUIRED = {
    "1.1", "1.3", "2.1", "2.2", "3.1", "3.2", "4.1", "5.1", "5.2", "5.3", "5.4", "5.5", "5.6", "5.7", "5.8", "6.1", "6.2",
    "7.1", "7.2", "7.3", "7.4", "8.1", "8.2", "8.3", "8.4", "8.5", "8.6", "8.8", "8.10", "8.12", "8.14", "9.1", "9.2",
    "9.3", "9.4", "9.5", "10.1", "10.2", "10.3", "10.4", "10.6", "10.7", "10.8", "11.1", "11.2", "11.3", "11.6", "11.7",
    "11.8", "11.9", "12.2", "12.5", "13.1", "13.2", "13.5", "13.6", "14.1", "14.2", "14.3", "14.4", "15.2", "15.3", "15.6",
    "15.7", "16.1", "16.2", "16.3", "16.4", "16.5", "16.6", "16.7", "17.1", "17.2", "17.3", "17.4", "17.6", "17.7", "18.1",
    "18.2", "18.3", "18.6", "18.7", "18.8", "19.1", "20.2", "20.3", "20.4", "20.6", "20.7", "20.8", "20.9", "20.11", "20.12",
    "20.13", "20.14", "21.1", "21.2", "21.3", "21.4", "21.5", "21.6", "21.7", "21.8", "21.9", "21.10", "21.11", "22.1",
    "22.2", "22.3", "22.4", "22.5", "22.6"}
"""Required and mandatory rules of MISRA C:2012, from memory; what is left is advisory."""

DEVIATIONS = {"10.1": 1}
"""Rule -> how often: `down` shifts a signed number, in one place, guarded; stated in the folder's README."""


def run(words: list[str]) -> subprocess.CompletedProcess[str]:
    return subprocess.run(words, capture_output=True, text=True, check=False, timeout=240)


def tool(name: str) -> None:
    """Skip where a tool is missing; in CI nothing may be."""
    import os

    if shutil.which(name) is None:
        (pytest.fail if os.environ.get("BALANCE_ALL_TARGETS") else pytest.skip)(f"{name} is not installed")


def sources(case: str, variant: str, folder: Path) -> tuple[Path, list[Path], str]:
    home, p = written(case, folder), package(case).program.prefix + variant
    return home / "src", [home / "src" / f"{p}.c", home / "src" / f"{p}_selftest.c"], p


@pytest.mark.parametrize("variant", VARIANTS, ids=["float32", "fixed"])
@pytest.mark.parametrize("case", CASES)
def test_compilers_find_nothing(case: str, variant: str, tmp_path: Path) -> None:
    tool("clang")
    home, files, p = sources(case, variant, tmp_path)
    for compiler in (GCC, CLANG):
        for file in files:
            done = run([*compiler, f"-D{p.upper()}_SELFTEST", "-c", str(file), "-o", str(tmp_path / "x.o")])
            assert done.returncode == 0, done.stderr
    (tmp_path / "it.cpp").write_text(f'#include "{p}.h"\nint period() {{ return {p.upper()}_PERIOD('
                                     f'{package(case).program.period_us}); }}\n')
    done = run(["g++", "-std=c++11", "-Wall", "-Wextra", "-Wpedantic", "-Werror", f"-I{home}", "-c",
                str(tmp_path / "it.cpp"), "-o", str(tmp_path / "x.o")])
    assert done.returncode == 0, done.stderr


def test_another_period_does_not_compile(tmp_path: Path) -> None:
    home, _, p = sources("scout-wheels", "", tmp_path)
    for period, good in ((2000, True), (1000, False)):
        (tmp_path / "it.c").write_text(f'#include "{p}.h"\nint main(void) {{ {p}_state s; {p}_init(&s, 0u, '
                                       f'{p.upper()}_PERIOD({period})); return 0; }}\n')
        assert (run(["gcc", f"-I{home}", "-c", str(tmp_path / "it.c"), "-o", str(tmp_path / "x.o")]).returncode == 0) is good


@pytest.mark.parametrize("variant", VARIANTS, ids=["float32", "fixed"])
@pytest.mark.parametrize("case", CASES)
def test_no_required_rule_is_broken_beyond_the_listed_deviation(case: str, variant: str, tmp_path: Path) -> None:
    tool("cppcheck")
    _, files, _ = sources(case, variant, tmp_path)
    done = run(["cppcheck", "--std=c99", "--addon=misra", "--template={id}", "--enable=style", "-q", *map(str, files)])
    found: dict[str, int] = {}
    for line in done.stderr.splitlines():
        if line.startswith("misra-c2012-"):
            rule = line.removeprefix("misra-c2012-")
            found[rule] = found.get(rule, 0) + 1
    assert found                                                     # the add-on did run: it always has advice
    broken = {rule: count for rule, count in found.items() if rule in REQUIRED}
    assert broken == (DEVIATIONS if variant else {})


STORM = """
#include "{prefix}.h"
#include <stdio.h>
#include <string.h>

static uint64_t now = 88172645463325252u;

static uint32_t drawn(void)
{{
    now ^= now << 13; now ^= now >> 7; now ^= now << 17;
    return (uint32_t)(now >> 16);
}}

int main(void)
{{
    {prefix}_state state;
    {prefix}_reading reading;
    {prefix}_command command;
    uint32_t words[sizeof reading / 4];
    double most = 0.0;
    long i;
    {prefix}_init(&state, 0u, {big}_PERIOD({period}));
    for (i = 0; i < 1000000L; i++) {{
        size_t k;
        for (k = 0; k < sizeof words / 4; k++) {{
            const uint32_t kind = drawn() % 16u;
            words[k] = (kind == 0u) ? {extreme0} : (kind == 1u) ? {extreme1} : (kind == 2u) ? {extreme2} : {ordinary};
        }}
        memcpy(&reading, words, sizeof reading);
        (void){prefix}_update(&state, &reading, &command);
        if ((i % 5000L) == 0L) {{ {prefix}_init(&state, (uint8_t)drawn(), {big}_PERIOD({period})); }}
        {{
            {kind} out[sizeof command / 4];
            memcpy(out, &command, sizeof command);
            for (k = 0; k < sizeof command / 4; k++) {{
                const double size = (out[k] < 0) ? -(double)out[k] : (double)out[k];
                if (!(size <= most)) {{ most = size; }}
            }}
        }}
    }}
    printf("%.9g\\n", most);
    return 0;
}}
"""

EXTREMES = {
    "": {"kind": "float", "extreme0": "0x7FC00000u", "extreme1": "0x7F7FFFFFu", "extreme2": "drawn()",
         "ordinary": "((drawn() & 0x807FFFFFu) | ((118u + (drawn() % 16u)) << 23))"},
    "_fixed": {"kind": "int32_t", "extreme0": "0x80000000u", "extreme1": "0x7FFFFFFFu", "extreme2": "drawn()",
               "ordinary": "(uint32_t)((int32_t)drawn() / (1 << (drawn() % 12u)))"},
}


@pytest.mark.parametrize("variant", VARIANTS, ids=["float32", "fixed"])
@pytest.mark.parametrize("case", ["scout-wheels", "bench-rig-sensed"])
def test_a_million_extreme_readings_break_nothing(case: str, variant: str, tmp_path: Path) -> None:
    """Two million for each variant: no undefined behaviour, no stray access, and never a command beyond its limit."""
    need("host")
    home, files, p = sources(case, variant, tmp_path)
    program, fixed = package(case).program, package(case).fixed
    storm = tmp_path / "storm.c"
    storm.write_text(STORM.format(prefix=p, big=p.upper(), period=program.period_us, **EXTREMES[variant]))
    built = run(["gcc", "-std=c99", "-O1", "-g", "-fsanitize=undefined,address,float-divide-by-zero",
                 "-fno-sanitize-recover=all", f"-I{home}", str(files[0]), str(storm), "-o", str(tmp_path / "storm")])
    assert built.returncode == 0, built.stderr
    done = run([str(tmp_path / "storm")])
    assert done.returncode == 0, done.stderr[-3000:]
    assert fixed is not None
    limit = max(max(row.limits) for row in (fixed.inputs if variant else program.inputs))
    assert 0.5 * limit < float(done.stdout) <= limit * (1.0 + 1e-6)  # the limit as float32 may be a bit above
