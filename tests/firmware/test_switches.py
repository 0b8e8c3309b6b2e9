"""Compiler switches that firmware projects really use: fused multiply-add, other levels, and the ones that are refused."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.firmware.builds import package, written
from tests.firmware.targets.run import need
from tests.firmware.test_strict import run

CASE = "bench-rig-sensed"
FUSE = '#pragma GCC optimize ("fp-contract=off")'
ARM = ("arm-none-eabi-gcc", "-std=gnu11", "-O2", "-mthumb", "-mcpu=cortex-m4", "-mfloat-abi=hard", "-mfpu=fpv4-sp-d16")
"""gnu11, as most firmware is built: there GCC fuses unless told not to; with -std=c99 it never does."""


def fused(folder: Path, pragma: bool) -> int:
    """Return how many fused multiply-adds GCC writes for a Cortex-M4F."""
    source = written(CASE, folder) / "src" / f"{package(CASE).program.prefix}.c"
    text = source.read_text(encoding="utf-8")
    assert FUSE in text
    source.write_text(text if pragma else text.replace(FUSE, ""), encoding="utf-8")
    done = run([*ARM, "-S", str(source), "-o", str(folder / "x.s")])
    assert done.returncode == 0, done.stderr
    return sum(word in line for line in (folder / "x.s").read_text().splitlines() for word in ("vfma", "vfms", "vfnm"))


def test_no_multiply_add_is_fused(tmp_path: Path) -> None:
    need("m4f")
    assert fused(tmp_path, pragma=True) == 0
    assert fused(tmp_path, pragma=False) > 10                         # the twin: the pragma is what keeps them apart


@pytest.mark.parametrize("switch", ["-ffast-math", "-Ofast", "-ffinite-math-only"])
@pytest.mark.parametrize("compiler", ["gcc", "clang"])
def test_switches_that_would_take_a_broken_reading_are_refused(compiler: str, switch: str, tmp_path: Path) -> None:
    need("host")
    p = package(CASE).program.prefix
    home = written(CASE, tmp_path) / "src"
    for name, allowed in ((p, False), (f"{p}_fixed", True)):          # whole numbers do not mind
        done = run([compiler, "-O2", switch, "-c", str(home / f"{name}.c"), "-o", str(tmp_path / "x.o")])
        assert (done.returncode == 0) is allowed
        assert allowed or "-ffast-math" in done.stderr
    assert run([compiler, "-O3", "-c", str(home / f"{p}.c"), "-o", str(tmp_path / "x.o")]).returncode == 0


def test_a_counter_of_refusals_that_wraps_is_seen(tmp_path: Path) -> None:
    """The vectors hold one spell of over 256 refusals; the twin is a C whose counter wraps after 255."""
    need("host")
    p = package(CASE).program.prefix
    home = written(CASE, tmp_path)
    (home / "main.c").write_text(f'#include "{p}.h"\nint main(void) {{ return {p}_selftest() != 0u; }}\n')
    source = home / "src" / f"{p}.c"
    text = source.read_text(encoding="utf-8")
    guard = "if (state->refused < 255u) { state->refused++; }"
    assert guard in text
    for body, good in ((text, True), (text.replace(guard, "state->refused++;"), False)):
        source.write_text(body, encoding="utf-8")
        built = run(["gcc", "-std=c99", "-O2", f"-D{p.upper()}_SELFTEST", f"-I{home / 'src'}", str(source),
                     str(home / "src" / f"{p}_selftest.c"), str(home / "main.c"), "-o", str(tmp_path / "x")])
        assert built.returncode == 0, built.stderr
        assert (run([str(tmp_path / "x")]).returncode == 0) is good


@pytest.mark.parametrize("variant", ["", "_fixed"], ids=["float32", "fixed"])
def test_cmake_builds_the_folder_as_it_is(variant: str, tmp_path: Path) -> None:
    need("host")
    home, p = written(CASE, tmp_path), package(CASE).program.prefix + variant
    user = tmp_path / "user"
    user.mkdir()
    (user / "main.c").write_text(f'#include "{p}.h"\nint main(void) {{ return {p}_selftest() != 0u; }}\n')
    (user / "CMakeLists.txt").write_text(
        f"cmake_minimum_required(VERSION 3.13)\nproject(user C)\nadd_compile_definitions({p.upper()}_SELFTEST)\n"
        f"add_subdirectory({home} law)\nadd_executable(user main.c)\n"
        f"target_link_libraries(user {package(CASE).program.prefix})\n")
    need_cmake()
    for words in (["cmake", "-S", str(user), "-B", str(tmp_path / "b")], ["cmake", "--build", str(tmp_path / "b")],
                  [str(tmp_path / "b" / "user")]):
        done = run(words)
        assert done.returncode == 0, done.stdout + done.stderr


def need_cmake() -> None:
    """Skip where cmake is missing; in CI nothing may be."""
    from tests.firmware.test_strict import tool

    tool("cmake")
