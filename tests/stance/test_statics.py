"""How far the trunk must shift, and the margins to the edges of the support polygon."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.machine.machine import Pose, StancePlan
from balance.stance.build import build_stance
from balance.stance.shift import shift_to_balance
from balance.stance.support import all_down, support_edges
from tests.stance.machines import FEET, on_circle, rig, three_legged


class TestShift:
    @pytest.mark.parametrize("lifted", FEET)
    def test_the_shifted_machine_is_in_balance(self, lifted: str) -> None:
        machine = three_legged(trunk=(0.0, 0.0, 0.3))
        stance = build_stance(machine, f"without-{lifted}")
        found = shift_to_balance(machine, stance)
        assert found.reached
        assert abs(found.stance.offset) < 1e-12                    # the search stops at 1e-12 of the machine's size
        assert abs(stance.offset) > 0.1                            # it was far from it
        # feet stay behind, so the trunk moves further than the centre of mass must
        assert found.distance > -stance.offset
        moved = found.stance.p_WT - stance.p_WT
        assert moved == pytest.approx(found.distance * stance.w_W, abs=1e-15)

    def test_a_leg_that_cannot_follow_is_named(self) -> None:
        machine = three_legged(radius=0.36, trunk=(0.0, 0.0, 0.25))
        found = shift_to_balance(machine, build_stance(machine, "without-fore"))
        assert not found.reached
        assert "from hip to foot" in found.reason
        assert found.distance > 0.0                                # outward, toward the line

    def test_lumped_machine_moves_as_a_whole(self) -> None:
        machine = rig(offset=0.012)
        assert shift_to_balance(machine, build_stance(machine, "line")).distance == -0.012


class TestSupport:
    def test_margins_of_a_centred_machine(self) -> None:
        machine = three_legged(stabilisers={})
        assert machine.body is not None
        plain = replace(machine, body={"deck": replace(machine.body["deck"], turn=(0.0, 0.0, 0.0))})
        support = all_down(plain, build_stance(plain, "without-left"))
        assert [edge.margin for edge in support.edges] == pytest.approx([0.125] * 3, rel=1e-12)   # half the radius
        assert support.margin == pytest.approx(0.125)
        assert support.com_W[:2] == pytest.approx([0.0, 0.0], abs=1e-15)
        assert set(support.joints) == set(FEET)
        assert support.joints["left"] == pytest.approx(support.joints["fore"], abs=1e-14)

    def test_a_trunk_moved_over_the_line_has_no_margin_left_there(self) -> None:
        machine = three_legged(trunk=(0.0, 0.0, 0.28))
        found = shift_to_balance(machine, build_stance(machine, "without-fore")).stance
        assert machine.stances is not None
        x, y, z = (float(c) for c in found.p_WT)
        over = replace(machine, stances={"s": replace(machine.stances["without-fore"], trunk=Pose((x, y, z)))})
        edges = {frozenset((e.foot_from, e.foot_to)): e.margin for e in all_down(over, build_stance(over, "s")).edges}
        near = edges[frozenset(("left", "right"))]
        # lowering the leg moves its links a little, so balance on two feet is only nearly the edge
        assert abs(near) < 2e-3
        assert min(edges[pair] for pair in edges if "fore" in pair) > 0.15

    def test_lowered_feet_stand_on_the_sloping_ground(self) -> None:
        machine = three_legged(stabilisers={})
        down = {"left": on_circle(0.25, FEET["left"], 0.05), "right": on_circle(0.25, FEET["right"], -0.02)}
        plan = StancePlan(down=down, lifted={"fore": on_circle(0.25, 0.0, 0.06)}, trunk=Pose((0.0, 0.0, 0.33)))
        sloping = replace(machine, stances={"s": plan})
        stance = build_stance(sloping, "s")
        foot = all_down(sloping, stance).contacts_W["fore"]
        assert (foot - stance.p_a_W) @ stance.u_W == pytest.approx(0.0, abs=1e-15)
        assert foot[:2] == pytest.approx([0.25, 0.0], abs=0.0)

    def test_outside_is_negative_and_hidden_feet_make_no_edge(self) -> None:
        square = {"a": (0.0, 0.0), "b": (1.0, 0.0), "c": (1.0, 1.0), "d": (0.0, 1.0), "inside": (0.5, 0.4)}
        contacts = {name: np.array([x, y, 0.0]) for name, (x, y) in square.items()}
        edges = {(e.foot_from, e.foot_to): e.margin for e in support_edges(contacts, np.array([0.3, -0.2, 0.7]))}
        assert edges == pytest.approx({("a", "b"): -0.2, ("b", "c"): 0.7, ("c", "d"): 1.2, ("d", "a"): 0.3})

    def test_two_feet_have_no_polygon(self) -> None:
        machine = rig()
        support = all_down(machine, build_stance(machine, "line"))
        assert support.edges == ()
        assert np.isnan(support.margin)
