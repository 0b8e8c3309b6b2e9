"""A report that somebody wrote into is not overwritten; one that nobody touched is."""

from __future__ import annotations

from pathlib import Path

from balance.report.seal import free_place, sealed, untouched
from balance.report.write import write_report


def test_a_page_knows_that_it_was_edited(tmp_path):
    page = tmp_path / "report.html"
    page.write_text(sealed("<html><body>all well\n"), encoding="utf-8")
    assert untouched(str(page))
    page.write_text(page.read_text(encoding="utf-8").replace("all well", "all very well"), encoding="utf-8")
    assert not untouched(str(page))


def test_foreign_files_count_as_a_persons(tmp_path):
    for name, what in (("a.html", b"<html>notes</html>"), ("b.html", b"\xff\xfe\x00"), ("c.html", b"")):
        (tmp_path / name).write_bytes(what)
        assert not untouched(str(tmp_path / name))
    (tmp_path / "d.html").mkdir()
    assert not untouched(str(tmp_path / "d.html"))
    assert untouched(str(tmp_path / "nothing.html"))


def test_an_earlier_report_is_replaced_an_edited_one_is_kept(answered, tmp_path):
    result = answered("bench-rig", "line")
    first = Path(write_report(result, str(tmp_path)))
    assert Path(write_report(result, str(tmp_path))) == first
    first.write_text(first.read_text(encoding="utf-8").replace("Passed", "Passed, says a reader"), encoding="utf-8")
    second = Path(write_report(result, str(tmp_path)))
    assert second.name == "report-2.html"
    assert "says a reader" in first.read_text(encoding="utf-8")
    assert Path(free_place(str(tmp_path), "report.html")) == second
