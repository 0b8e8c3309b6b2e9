"""Every kind of mistake in a record: where, what was given, what is allowed, how to mend it; all at once."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import dataclass

import pytest

from balance.base.errors import InputError
from balance.files.document import load
from balance.files.fields import choice, direction, flag, number, quantity, section, table, text, variant, vector
from balance.files.reader import read


@dataclass(frozen=True)
class Inner:
    """A section."""

    size: float = quantity("length", above=0)


@dataclass(frozen=True)
class Other:
    """Another variant."""

    speed: float = quantity("angular speed", default=1.0)


@dataclass(frozen=True)
class Outer:
    """A file with one of everything."""

    name: str = text()
    mass: float = quantity("mass", above=0)
    share: float = number(least=0, most=1, default=0.5)
    way: str = choice(["left", "right"], default="left")
    on: bool = flag(default=False)
    at: tuple[float, float, float] = vector("length", default=(0.0, 0.0, 0.0))
    axis: tuple[float, float, float] = direction(default=(1.0, 0.0, 0.0))
    parts: dict[str, Inner] | None = table(Inner, default=None)
    kind: Inner | Other | None = variant({"inner": Inner, "other": Other}, default=None)
    sub: Inner | None = section(Inner, default=None)


@pytest.fixture
def reading(tmp_path):
    def run(body):
        path = tmp_path / "x.yaml"
        path.write_text(body, encoding="utf-8")
        return read(load(str(path)), Outer)
    return run


def faults(reading, body):
    with pytest.raises(InputError) as caught:
        reading(body)
    return caught.value.problems


GOOD = "name: a\nmass: 2 kg\n"


def test_everything_is_read(reading):
    got = reading(GOOD + "share: 1e-1\nway: right\non: true\nat: [1 mm, 2 mm, 3 mm]\naxis: [0, 3, 4]\n"
                         "parts: {b: {size: 1 m}, a: {size: 2 m}}\nkind: {kind: other, speed: 60 rpm}\nsub: {size: 3 m}\n")
    assert (got.mass, got.share, got.way, got.on) == (2.0, 0.1, "right", True)
    assert got.at == pytest.approx((0.001, 0.002, 0.003))
    assert got.axis == pytest.approx((0.0, 0.6, 0.8))
    assert list(got.parts) == ["b", "a"]
    assert got.kind.speed == pytest.approx(6.283185307)
    assert got.sub.size == 3.0


@pytest.mark.parametrize(("line", "key", "given", "says"), [
    ("mass: 2", "mass", "`2`", "add the unit, as in `2 kg`"), ("mass: 2 m", "mass", "`2 m`", "a mass"),
    ("mass: -2 kg", "mass", "`-2 kg`", "more than 0"), ("masss: 2 kg", "masss", "unknown key", "did you mean `mass`"),
    ("share: 2", "share", "`2`", "at most 1"), ("share: 50 %", "share", "50 %", "a bare number"),
    ("way: lefft", "way", "lefft", "did you mean `left`"), ("on: yes", "on", "yes", "write `true`"),
    ("at: [1 mm, 2 mm]", "at", "list", "3"), ("axis: [0, 0, 0]", "axis", "no length", "[1, 0, 0]"),
    ("parts: {a: {}}", "parts.a.size", "nothing", "add `size:`"),
    ("kind: {kind: innr}", "kind", "innr", "did you mean `inner`"),
    ("sub: 3 m", "sub", "3 m", "mapping"), ("name: ''", "name", "", "text")])
def test_each_mistake(reading, line, key, given, says):
    body = "\n".join([row for row in GOOD.splitlines() if not row.startswith(line.split(":")[0] + ":")] + [line]) + "\n"
    problem = next(p for p in faults(reading, body) if p.key.startswith(key))
    assert problem.line == body.count("\n")
    assert problem.column >= 1
    assert given in problem.given
    assert says in f"{problem.allowed} {problem.hint}"
    assert problem.where.endswith("x.yaml")


def test_all_mistakes_at_once_sorted_by_line(reading):
    found = faults(reading, "way: up\nshare: 7\nname: a\nsub: {size: 1 kg, sise: 2 m}\n")
    assert [p.line for p in found] == sorted(p.line for p in found)
    assert {p.key for p in found} == {"way", "share", "mass", "sub.size", "sub.sise"}


def test_words_stay_words_and_numbers_stay_numbers(reading):
    """YAML 1.1 turns `no` into false and `1e-3` into text; here neither happens."""
    assert reading("name: no\nmass: 2 kg\nshare: 1e-3\n").name == "no"
    assert reading("name: on\nmass: 2 kg\nshare: 1e-3\n").share == 1e-3


def test_an_error_in_a_file_waits_for_no_library(tmp_path):
    """A fresh interpreter reads a wrong design without loading anything heavy; and the twin: with check it would."""
    (tmp_path / "d.yaml").write_text("format: 1\ndesign: x\nloop: {rate: 500}\n", encoding="utf-8")
    code = ("import sys\nfrom balance.cli.main import main\ncode = main(['check', sys.argv[1]])\n"
            "heavy = [m for m in ('numpy', 'scipy', 'control', 'numba', 'matplotlib') if m in sys.modules]\n"
            "print('code', code, 'heavy', heavy)")
    done = subprocess.run([sys.executable, "-c", code, str(tmp_path / "d.yaml")], capture_output=True, text=True, check=True)
    assert done.stdout.strip().endswith("code 2 heavy []")
    fine = subprocess.run([sys.executable, "-c", code, "plants/bench-rig.yaml"], capture_output=True, text=True, check=True)
    assert "code 2" in fine.stdout
    both = code.replace("'check'", "'plant'")
    loads = subprocess.run([sys.executable, "-c", both, "plants/bench-rig.yaml"], capture_output=True, text=True, check=True)
    assert "'numpy'" in loads.stdout
