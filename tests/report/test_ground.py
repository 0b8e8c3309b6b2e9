"""What trials leave behind, in words: the feet's table, what lifted or slipped first, the swing that stays."""

from __future__ import annotations

from dataclasses import replace
from math import inf, nan, radians

from balance.report.facts import settled
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


def test_a_swing_that_stays_is_told_where_it_can_be_seen(answered):
    one = replace(answered("bench-rig", "line").trials[0], settling_time=1.25)
    told = [settled(replace(one, standing_swing=radians(swing))).replace("\xa0", " ") for swing in (0.04, 0.004)]
    assert told == ["1.25 s, ±0.0400° left", "1.25 s"]
    assert settled(replace(one, settling_time=inf, standing_swing=inf)) == "never"
