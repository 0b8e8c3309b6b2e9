"""What a person wrote cannot become code, no two things get one name, and what is unstable does not become firmware."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from balance.design.margins import UNSTABLE
from balance.firmware.describe import NotAlikeError, describe
from balance.firmware.names import STANDARD_HEADERS, clashing, identifier, tame
from balance.firmware.package import make_package
from tests.firmware.builds import designs
from tests.firmware.targets.run import need
from tests.firmware.test_strict import GCC, run

HOSTILE = '8 */ int stolen(void) { return 1; } /* ??/ "x" é $(touch y)'


def code_of(text: str) -> str:
    """Return C without its comments."""
    return re.sub(r"/\*.*?\*/", "", text, flags=re.DOTALL)


def test_a_hostile_name_is_a_comment_and_nothing_else(tmp_path: Path) -> None:
    need("host")
    files = make_package(designs("bench-rig-pid"), HOSTILE).files
    for path, text in files.items():
        place = tmp_path / path
        place.parent.mkdir(parents=True, exist_ok=True)
        place.write_text(text, encoding="utf-8")
    sources = sorted((tmp_path / "src").glob("*.c"))
    assert sources
    for source in sources:
        done = run([*GCC, "-c", str(source), "-o", str(tmp_path / "x.o")])
        assert done.returncode == 0, done.stderr
        assert "stolen(" not in code_of(source.read_text(encoding="utf-8"))
    assert '"' not in files["zephyr/Kconfig"].split('"')[1]
    assert "stolen(" in code_of(f"/* {HOSTILE} */\n")                          # the twin: the name as it came


@given(st.text(max_size=60))
def test_any_text_is_tame_and_any_name_is_one_in_c(text: str) -> None:
    assert not re.search(r'[*/\\"?`$#\n]', tame(text))
    assert re.fullmatch(r"[a-z_][a-z0-9_]*", identifier(text))
    assert identifier(text) not in STANDARD_HEADERS


@pytest.mark.parametrize(("names", "clash"), [(["left-wheel", "left_wheel"], True), (["Left", "left"], True),
                                              (["left", "right"], False), ([], False)])
def test_two_names_that_are_one_in_c(names: list[str], clash: bool) -> None:
    assert bool(clashing(names)) is clash
    assert not clash or all(f"`{name}`" in clashing(names) for name in names)


def test_an_unstable_loop_does_not_become_firmware() -> None:
    first = designs("bench-rig-pid")[0]
    with pytest.raises(NotAlikeError, match=r"line: the loop as designed is not stable"):
        describe([replace(first, margins=UNSTABLE)], "x")
    assert describe([first], "x").stances == ("line",)                         # the twin


def test_stances_do_not_take_the_names_of_flags() -> None:
    """A stance called `safe` or `period`: all macros of a header differ."""
    first = designs("quay-gyros")[0]
    named = [replace(first, plant=replace(first.plant, stance=replace(first.plant.stance, name=name)))
             for name in ("safe", "period", "stamp")]
    header = make_package(named, "x").files["src/x.h"]
    macros = re.findall(r"#define (\w+)", header)
    assert {"X_STANCE_SAFE", "X_SAFE", "X_PERIOD", "X_STANCE_PERIOD"} <= set(macros)
    assert len(set(macros)) == len(macros)
