"""The targets themselves: they print, they count what is known beforehand, and they notice a deep stack."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.firmware.targets.run import TARGETS, missing, need, run_on

PROGRAM = """
#include "board.h"
#include <stdint.h>

static volatile uint32_t kept;

static void __attribute__((noinline)) deep(void)
{
    volatile uint8_t room[300];
    for (unsigned i = 0u; i < 300u; i++) { room[i] = (uint8_t)i; }
    kept = room[7];
}

static void __attribute__((noinline)) turns(uint32_t count)
{
#if defined(__arm__)
    __asm__ volatile(".syntax unified\\n1: subs %0, #1\\n bne 1b" : "+l"(count) : : "cc");
#elif defined(__AVR__)
    uint16_t rest = (uint16_t)count;
    __asm__ volatile("1: sbiw %0, 1\\n brne 1b" : "+w"(rest));
#else
    (void)count;
#endif
}

int main(void)
{
    put_line("begun");
    mark_start(); turns(10000u); mark_stop();
    mark_start(); turns(20000u); mark_stop();
    mark_start(); deep(); mark_stop();
    put_line(sizeof(int) == 2u ? "two" : "four");
    return 0;
}
"""

PER_TURN = {"m4f": 2.0, "m3": 2.0, "m0": 2.0, "avr": 4.0}
"""Instructions (ARM) or cycles (AVR: sbiw 2, brne taken 2; instruction set manual, from memory) in a turn."""


@pytest.mark.parametrize("name", TARGETS)
def test_a_program_runs_is_counted_and_its_stack_is_measured(name: str, tmp_path: Path) -> None:
    need(name)
    source = tmp_path / "program.c"
    source.write_text(PROGRAM)
    run = run_on(name, [source], tmp_path)
    assert run.lines == ("begun", "two" if name == "avr" else "four")
    assert run.text > 100
    if name == "host":
        assert run.spans == ()
        return
    once, twice, deep = run.spans
    # the timer of the coarsest board counts 80 instructions a tick, one tick either way at both ends
    assert twice.count - once.count == pytest.approx(10000 * PER_TURN[name], abs=0.5 if name == "avr" else 170)
    assert 300 <= deep.stack < 360      # the array, and what calling costs
    assert once.stack < 60 < deep.stack


def test_a_program_that_does_not_compile_fails_its_test(tmp_path: Path) -> None:
    need("host")
    source = tmp_path / "program.c"
    source.write_text("int main(void) { return nothing; }\n")
    with pytest.raises(AssertionError, match="nothing"):
        run_on("host", [source], tmp_path)


def test_a_missing_target_skips_and_in_ci_it_fails(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", "")
    monkeypatch.delenv("BALANCE_ALL_TARGETS", raising=False)
    assert "qemu" in missing("m3")
    with pytest.raises(pytest.skip.Exception, match="gcc-avr"):
        need("avr")
    monkeypatch.setenv("BALANCE_ALL_TARGETS", "1")
    with pytest.raises(pytest.fail.Exception, match="must not skip"):
        need("avr")
