"""The page: everything is in it, nothing is fetched, a hostile name stays a name."""

from __future__ import annotations

import re
from dataclasses import replace
from html.parser import HTMLParser
from pathlib import Path

import pytest

from balance.api.check import check
from balance.api.load import load
from balance.report.write import compose, write_report

ROOT = Path(__file__).parents[2]
HOSTILE = '<script>alert("x")</script>'


class Links(HTMLParser):
    """Collect what a browser would fetch or run, and whether every tag is closed."""

    def __init__(self):
        super().__init__()
        self.fetched, self.scripts, self.open = [], 0, []

    def handle_starttag(self, tag, attrs):
        self.fetched += [value for name, value in attrs if name in ("src", "href", "data") and value]
        self.scripts += tag == "script"
        if tag not in ("meta", "img", "br", "link"):
            self.open.append(tag)

    def handle_endtag(self, tag):
        assert self.open.pop() == tag


def read(text):
    links = Links()
    links.feed(text)
    return links


def test_nothing_is_fetched(answered):
    links = read(compose(answered("bench-rig", "line")))
    assert links.open == []
    assert links.fetched
    assert all(at.startswith(("data:image/svg+xml;base64,", "#")) for at in links.fetched)
    assert links.scripts == 1


def test_the_twin_a_page_that_fetches_is_seen():
    assert not read('<img src="http://elsewhere/x.png">').fetched[0].startswith("data:")


@pytest.mark.parametrize(("design", "stance"), [
    ("bench-rig", "line"), ("bench-rig-short", "line"), ("bench-rig-pid", "line"), ("quay-gyros", "on-left-right"),
    ("scout-wheels", "on-fore-left")])
def test_everything_is_said(answered, design, stance):
    result = answered(design, stance)
    text = re.sub(r"\s+", " ", re.sub(r"<[^>]+>", " ", compose(result)))
    for verdict in result.verdicts:
        assert verdict.name.replace("_", " ") in text
    for words in ("Cautions", "Burst and containment", "Stored energy", "Tether", "Battery", "Local codes",
                  "Margins", "toppling stiffness G", "What is assumed", "delay margin",
                  "u = −K x" if design != "bench-rig-pid" else "parallel form"):
        assert words in text
    assert ("Not passed" in text) is (not result.passed)


def test_hostile_names_are_escaped(answered):
    result = answered("bench-rig", "line")
    text = compose(replace(result, goal=replace(result.goal, design=HOSTILE),
                           machine=replace(result.machine, machine=HOSTILE)))
    assert HOSTILE not in text
    assert "&lt;script&gt;" in text


def test_a_stabiliser_square_to_the_line_is_reported():
    job = load(str(ROOT / "designs" / "bench-rig.yaml"))
    wheel = replace(job.machine.stabilisers["wheel"], axis=(0.0, 0.0, 1.0))
    result = check(replace(job, machine=replace(job.machine, stabilisers={"wheel": wheel})))
    assert not result.passed
    assert "cannot act about this line" in compose(result)


def test_a_loop_that_is_not_stable_is_reported(answered):
    result = answered("bench-rig", "line")
    design = result.designs[0]
    names = ("phase", "gain_lower", "gain_upper", "delay", "modulus", "disk", "peak_sensitivity", "peak_complementary")
    lost = replace(design.margins, **dict.fromkeys(names, float("nan")), stable=False, crossings=())
    text = compose(replace(result, designs=(replace(design, margins=lost),)))
    assert "NOT stable" in text
    assert not re.search(r"\bnan\b", re.sub(r'src="[^"]*"', "", text), re.IGNORECASE)


def test_written_whole_or_not_at_all(answered, tmp_path, monkeypatch):
    path = write_report(answered("bench-rig", "line"), str(tmp_path / "new"))
    assert Path(path).read_text(encoding="utf-8").endswith("</html>\n")
    before = sorted((tmp_path / "new").iterdir())

    def fails(*_):
        raise OSError("disk full")

    monkeypatch.setattr("os.replace", fails)
    with pytest.raises(OSError, match="disk full"):
        write_report(answered("bench-rig", "line"), str(tmp_path / "new"))
    assert sorted((tmp_path / "new").iterdir()) == before


def test_same_answer_same_page(answered):
    result = answered("bench-rig-short", "line")
    assert compose(result) == compose(result)
