"""The feet's table: the worst of each foot over the trials, and what lifted or slipped first."""

from __future__ import annotations

from dataclasses import replace
from math import nan

from balance.report.ground import foot_table
from balance.simulate.records import FootLoad


def test_worst_of_each_foot_and_the_first_to_slip(answered):
    one = answered("quay-gyros", "on-left-right").trials[0]
    calm = replace(one, name="calm", feet=(FootLoad("left", 80.0, 0.1, nan, nan), FootLoad("right", 60.0, 0.3, nan, nan)))
    wild = replace(one, name="wild", feet=(FootLoad("left", 50.0, 0.9, nan, 0.4), FootLoad("right", 70.0, 0.2, nan, nan)))
    table = foot_table((calm, wild))
    left, right = table.rows
    assert (left.label, left.mark, right.label, right.mark) == ("left", "unmet", "right", "")
    assert [cell.replace("\xa0", " ") for cell in left.cells] == [
        "50.0 N (wild outward)", "0.90 (wild outward)", "slips at 0.400 s (wild outward)"]
    assert [cell.replace("\xa0", " ") for cell in right.cells] == ["60.0 N (calm outward)", "0.30 (calm outward)", "stays"]


def test_no_table_where_nothing_is_known_of_the_feet(answered):
    assert foot_table(answered("bench-rig", "line").trials) is None
