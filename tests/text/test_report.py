"""What a person reads in the report: complete, in order, in plain words, with every number the same as in the answer."""

from __future__ import annotations

import base64
import re
from dataclasses import replace
from functools import cache
from html.parser import HTMLParser
from pathlib import Path

import pytest

from balance.api.check import check
from balance.api.load import load
from balance.check.records import CheckResult
from balance.report.sheet import STYLE
from balance.report.write import compose


@cache
def answer(design: str, stance: str) -> CheckResult:
    job = load(str(ROOT / "designs" / f"{design}.yaml"), stance)
    few = dict(list(job.goal.trials.items())[:2])
    return check(replace(job, goal=replace(job.goal, trials=few)))


@cache
def page(design: str, stance: str) -> str:
    return compose(answer(design, stance))


ROOT = Path(__file__).parents[2]
PAGES = [("bench-rig-short", "line"), ("bench-rig-pid", "line"), ("scout-wheels", "on-fore-left"),
         ("quay-gyros", "on-left-right")]


class Reader(HTMLParser):
    """Headings, links, anchors, pictures and tables of a page."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.levels: list[int] = []
        self.links: list[str] = []
        self.anchors: list[str] = []
        self.pictures: list[dict[str, str]] = []
        self.head = 0
        self.rows: list[tuple[int, int]] = []
        self.cells = 0
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        told = dict(attrs)
        if re.fullmatch(r"h[1-6]", tag):
            self.levels.append(int(tag[1]))
        if "id" in told:
            self.anchors.append(told["id"])
        if tag == "a":
            self.links.append(told["href"])
        if tag == "img":
            self.pictures.append(told)
        if tag == "thead":
            self.head = 0
        if tag == "th" and told.get("scope") == "col":
            self.head += 1
        if tag == "tr":
            self.cells = 0
        if tag == "td" or (tag == "th" and told.get("scope") == "row"):
            self.cells += 1

    def handle_endtag(self, tag):
        if tag == "tr" and self.cells:
            self.rows.append((self.head, self.cells))


def words(text: str) -> str:
    bare = re.sub(r"<(style|script)>.*?</\1>", " ", text, flags=re.DOTALL)
    return re.sub(r"\s+", " ", re.sub(r"<[^>]+>", " ", bare)).replace("\u00a0", " ")


@pytest.mark.parametrize(("design", "stance"), PAGES)
def test_structure(design, stance):
    reader = Reader(page(design, stance))
    assert reader.levels[0] == 1
    assert reader.levels.count(1) == 1
    assert all(later - earlier <= 1 for earlier, later in zip(reader.levels, reader.levels[1:], strict=False))
    assert reader.links
    assert set(reader.links) <= {f"#{anchor}" for anchor in reader.anchors}
    assert len(set(reader.anchors)) == len(reader.anchors)
    assert reader.rows
    assert all(head == cells for head, cells in reader.rows), "every row fills every column"
    assert len({told["alt"] for told in reader.pictures}) == len(reader.pictures) >= 4 + 2
    assert all(told["alt"] for told in reader.pictures)


@pytest.mark.parametrize(("design", "stance"), PAGES)
def test_pictures_stand_inside_and_ask_for_nothing(design, stance):
    for told in Reader(page(design, stance)).pictures:
        svg = base64.b64decode(told["src"].partition("base64,")[2]).decode("utf-8")
        assert svg.startswith("<svg")
        for target in re.findall(r'(?:href|src)="([^"]*)"|url\(([^)]*)\)', svg):
            assert "".join(target).startswith("#"), "only marks inside the same drawing"
        named = set(re.findall(r' id="([^"]*)"', svg))
        used = {"".join(t)[1:] for t in re.findall(r'href="([^"]*)"|url\(([^)]*)\)', svg)}
        assert used <= named


@pytest.mark.parametrize(("design", "stance"), PAGES)
def test_the_numbers_are_those_of_the_answer(design, stance):
    result, said = answer(design, stance), words(page(design, stance))
    (one,) = result.designs
    for value, unit in ((one.plant.stance.mass, "kg"), (one.plant.momentum_capacity, "N·m·s"), (one.plant.pole, "rad/s"),
                        (one.margins.delay * 1e3, "ms"), (one.plant.stance.height * 1e3, "mm")):
        assert f"{value:#.3g}".rstrip(".") + f" {unit}" in said
    assert f"{one.margins.gain_lower:.3f}" in said
    if one.law.kind == "lqr":
        for gain in one.law.K[:2]:
            assert f"{gain:#.6g}".rstrip(".").replace("-", "−") in said
    for trial in result.trials:
        assert trial.reason in said
        assert f"{trial.name}, {trial.toward} {trial.verdict}" in said


def test_the_short_rig_says_first_that_it_is_not_enough():
    said = words(page("bench-rig-short", "line"))
    assert said.index("Not passed: ") < said.index("Every requirement against its limit") < said.index("NOT met")
    assert "fell outward" in said
    assert "more momentum" in said
    assert re.search(r"settling time line never ≤ 4\.00 s", said)


def test_the_twin_the_good_rig_does_not():
    said = words(page("bench-rig-pid", "line"))
    assert "Not passed" not in said
    assert "NOT met" not in said
    assert "Passed: all" in said


def test_what_was_not_asked_for_is_named():
    result = answer("bench-rig-pid", "line")
    require = replace(result.goal.require, phase_margin=None)
    said = words(compose(replace(result, goal=replace(result.goal, require=require))))
    assert re.search(r"not judged: phase margin", said), "the first of those left out"
    assert not re.search(r"not judged: phase margin", words(page("bench-rig-pid", "line")))


def test_two_wheels_say_how_the_command_is_shared():
    said = words(page("scout-wheels", "on-fore-left"))
    assert "How the command is shared" in said
    assert "side-wheel" in said
    assert "How the command is shared" not in words(page("bench-rig-pid", "line"))


def test_several_stances_fold_but_open_in_print():
    result = answer("scout-wheels", "on-fore-left")
    (one,) = result.designs
    other = replace(one, plant=replace(one.plant, stance=replace(one.plant.stance, name="on-two")))
    stances = {**result.machine.stances, "on-two": result.machine.stances["on-fore-left"]}
    twice = (*result.verdicts, *(replace(v, stance="on-two", passed=False) for v in result.verdicts))
    both = replace(result, machine=replace(result.machine, stances=stances), designs=(one, other), verdicts=twice)
    text = compose(both)
    said = words(text)
    assert said.index("Requirements by stance") < said.index("Not met") < said.index("on-fore-left: all")
    assert text.count("<details") > text.count("<details open")
    assert "beforeprint" in text
    assert "::details-content" in STYLE


def test_dark_ink_on_white_on_screen_and_paper():
    assert "prefers-color-scheme: dark" not in STYLE
    for colour in re.findall(r"background: (#[0-9a-f]{3,6})", STYLE):
        full = colour[1:] if len(colour) == 7 else "".join(2 * c for c in colour[1:])
        assert min(int(full[i:i + 2], 16) for i in (0, 2, 4)) >= 0xE0
    assert "@media print" in STYLE
    assert "url(" not in STYLE
    assert "@import" not in STYLE
