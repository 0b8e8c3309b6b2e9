"""Build a C program for a target, run it there (emulated where it is not this machine), and read what it says.

A program has `int main(void)` and talks through `board.h`. All of it comes from Debian's packages; where they are
missing a test skips with a word, or fails where `.ci/run` has said (BALANCE_ALL_TARGETS) that nothing may be skipped.
"""

from __future__ import annotations

import os
import shutil
import subprocess
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import pytest

HERE = Path(__file__).parent
LONGEST = 240.0
"""s of real time a program may take: the slowest known needs 10 s on a loaded machine."""


@dataclass(frozen=True)
class Target:
    """A processor a program can be built for and run on."""

    name: str
    says: str
    compiler: str
    flags: tuple[str, ...]
    machine: str        # the emulator's board; empty: not under QEMU
    packages: str


_ARM = "gcc-arm-none-eabi libnewlib-arm-none-eabi qemu-system-arm"

TARGETS: dict[str, Target] = {each.name: each for each in (
    Target("host", "this machine", "gcc", ("-ffp-contract=off",), "", "gcc"),
    Target("m4f", "Cortex-M4F", "arm-none-eabi-gcc",
           ("-mthumb", "-mcpu=cortex-m4", "-mfloat-abi=hard", "-mfpu=fpv4-sp-d16"), "mps2-an386", _ARM),
    Target("m3", "Cortex-M3", "arm-none-eabi-gcc", ("-mthumb", "-mcpu=cortex-m3"), "lm3s6965evb", _ARM),
    Target("m0", "Cortex-M0", "arm-none-eabi-gcc", ("-mthumb", "-mcpu=cortex-m0"), "microbit", _ARM),
    Target("avr", "ATmega2560", "avr-gcc", ("-mmcu=atmega2560",), "",
           "gcc-avr avr-libc simavr libsimavr-dev libelf-dev"),
)}


@dataclass(frozen=True)
class Span:
    """What was measured between one pair of marks."""

    count: float        # instructions (ARM, to about 100), cycles (AVR, exact)
    stack: int          # bytes below the caller's stack pointer


@dataclass(frozen=True)
class TargetRun:
    """What a program said and how large it is."""

    lines: tuple[str, ...]
    spans: tuple[Span, ...]
    text: int           # bytes of code and constants in flash
    data: int           # bytes of RAM, initialised or not, without the stack


def missing(name: str) -> str:
    """Return the packages a target needs and this machine lacks; empty: it can run."""
    target = TARGETS[name]
    needed = [target.compiler] + (["qemu-system-arm"] if target.machine else [])
    lacks = any(shutil.which(each) is None for each in needed)
    if name == "avr" and not lacks:
        lacks = not Path("/usr/include/simavr/sim_avr.h").exists() or not Path("/usr/include/libelf.h").exists()
    return target.packages if lacks else ""


def need(name: str) -> None:
    """Skip the calling test where a target cannot run here; fail it where nothing may be skipped."""
    packages = missing(name)
    if packages and os.environ.get("BALANCE_ALL_TARGETS"):
        pytest.fail(f"target {name} needs the packages {packages}, and CI must not skip it")
    if packages:
        pytest.skip(f"target {name} needs the Debian packages {packages}")


def run_on(name: str, sources: Sequence[Path], folder: Path, include: Sequence[Path] = (),
           flags: Sequence[str] = ("-O2",)) -> TargetRun:
    """Build C sources for a target in `folder`, run the program, return what it said; raises where either fails."""
    target = TARGETS[name]
    folder.mkdir(parents=True, exist_ok=True)
    program = folder / f"{name}.elf"
    _do([target.compiler, "-std=c99", *flags, *target.flags, *_board(name, folder, flags),
         *(f"-I{each}" for each in (HERE, *include)), *map(str, sources), "-o", str(program), "-lm"])
    said = _do(_launch(name, program, folder))
    text, data = _size(name, program)
    return _read(said, text, data)


def _board(name: str, folder: Path, flags: Sequence[str]) -> list[str]:
    """Return the words that add the board's own object file to a build."""
    target = TARGETS[name]
    kind = {"host": "host", "avr": "avr"}.get(name, "arm")
    board = folder / f"{name}_board.o"
    _do([target.compiler, "-std=gnu99", "-O2", *target.flags, f"-I{HERE}", "-c", str(HERE / f"{kind}_board.c"),
         "-o", str(board)])
    words = [str(board), "-ffunction-sections", "-fdata-sections", "-Wl,--gc-sections"]
    if kind == "avr":
        words.append("-Dmain=program")
    if kind == "arm":
        words += ["-nostartfiles", "--specs=nano.specs", "-T", str(HERE / "arm.ld")]
    return words



def _launch(name: str, program: Path, folder: Path) -> list[str]:
    """Return the command that runs a built program."""
    target = TARGETS[name]
    if target.machine:
        return ["qemu-system-arm", "-M", target.machine, "-display", "none", "-monitor", "none", "-serial", "none",
                "-icount", "shift=0", "-chardev", "stdio,id=said", "-semihosting-config",
                "enable=on,target=native,chardev=said", "-kernel", str(program)]
    if name == "avr":
        runner = folder / "avr_runner"
        _do(["gcc", "-O2", str(HERE / "avr_runner.c"), "-o", str(runner), "-lsimavr", "-lelf"])
        return [str(runner), str(program)]
    return [str(program)]


def _do(words: Sequence[str]) -> str:
    """Run a command; return its standard output; fail the test with what it said if it fails."""
    done = subprocess.run(words, capture_output=True, text=True, timeout=LONGEST, stdin=subprocess.DEVNULL, check=False)
    assert done.returncode == 0, f"{' '.join(words)}\n{done.stdout[-2000:]}\n{done.stderr[-4000:]}"
    return done.stdout


def _size(name: str, program: Path) -> tuple[int, int]:
    """Return (bytes in flash, bytes of RAM) as the target's `size` tells them."""
    tool = TARGETS[name].compiler.replace("gcc", "size")
    text, data, bss = (int(each) for each in _do([tool, str(program)]).splitlines()[1].split()[:3])
    return text + data, data + bss


def _read(said: str, text: int, data: int) -> TargetRun:
    """Take what the program said apart from what the board said."""
    lines, spans = [], []
    scale, stack = 1.0, 0
    for line in said.splitlines():
        word, _, value = line.partition(" ")
        if word == "#million":
            scale = 1e6 / int(value, 16)
        elif word == "#stack":
            stack = int(value, 16)
        elif word in ("#ticks", "#cycles"):
            spans.append(Span(int(value, 16) * (scale if word == "#ticks" else 1.0), stack))
        else:
            lines.append(line)
    return TargetRun(tuple(lines), tuple(spans), text, data)
