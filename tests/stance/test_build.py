"""The stance of small machines whose numbers can be written down, and every refusal with its line."""

from __future__ import annotations

from dataclasses import replace
from math import atan, cos, pi, sin

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.machine.legs import Feet, JointLimits, Leg, Link
from balance.machine.machine import Machine, Pose, StancePlan
from balance.machine.solids import Box, Part, PointMass, Sphere
from balance.stance.build import build_stance
from balance.stance.stiffness import balanced_lean, toppling_stiffness
from tests.stance.machines import FEET, on_circle, rig, three_legged

ROUNDING = 1e-13
"""Relative: some tens of roundings."""


def two_points(lifted: dict[str, tuple[float, float, float]] | None = None, up: float = 0.0, at: float = 0.0) -> Machine:
    """Return 2 kg at (at, 0, 0.5) and 1 kg at (at, 0, 0.8) over feet at y = ±0.2, foot `b` `up` higher."""
    body = {"low": Part(mass=2.0, solid=PointMass(), at=(0.0, 0.0, 0.0)),
            "high": Part(mass=1.0, solid=PointMass(), at=(0.0, 0.0, 0.3))}
    plan = StancePlan(down={"a": (0.0, -0.2, 0.0), "b": (0.0, 0.2, up)}, lifted=lifted, trunk=Pose((at, 0.0, 0.5)))
    return Machine(format=1, machine="points", stabilisers={}, body=body, stances={"s": plan})


class TestNumbers:
    def test_two_point_masses(self) -> None:
        s = build_stance(two_points(at=-0.03), "s")
        assert s.mass == 3.0
        assert s.height == pytest.approx(0.6, rel=ROUNDING)
        assert s.inertia_locked == pytest.approx(2.0 * (0.25 + 9e-4) + 1.0 * (0.64 + 9e-4), rel=ROUNDING)
        assert s.e_W == pytest.approx([0.0, 1.0, 0.0], abs=0.0)
        assert s.w_W == pytest.approx([1.0, 0.0, 0.0], abs=0.0)      # y × z = x
        assert s.offset == pytest.approx(-0.03, rel=ROUNDING)
        assert balanced_lean(s) == pytest.approx(atan(0.03 / 0.6), rel=ROUNDING)
        assert (s.slope, s.length, s.touch_down_lean) == (0.0, 0.4, None)

    def test_balanced_lean_has_no_moment(self) -> None:
        s = build_stance(two_points(at=0.05), "s")
        G_s, G_c = toppling_stiffness(s)
        theta = balanced_lean(s)
        assert G_s * sin(theta) + G_c * cos(theta) == pytest.approx(0.0, abs=1e-14)
        assert G_s == pytest.approx(3.0 * 9.80665 * 0.6, rel=ROUNDING)

    def test_rounded_feet_take_their_radius_from_the_height(self) -> None:
        machine = replace(two_points(at=0.05), feet=Feet(radius=0.1))
        s = build_stance(machine, "s")
        assert toppling_stiffness(s)[0] == pytest.approx(3.0 * 9.80665 * 0.5, rel=ROUNDING)
        assert balanced_lean(s) == pytest.approx(-atan(0.05 / 0.5), rel=ROUNDING)

    def test_sloping_line(self) -> None:
        up = 0.4 * 0.75                                              # feet 0.4 apart in plan: a 3-4-5 triangle
        s = build_stance(two_points(up=up), "s")
        assert s.slope == pytest.approx(atan(0.75), rel=ROUNDING)
        assert s.u_W == pytest.approx([0.0, -0.6, 0.8], abs=ROUNDING)
        assert s.w_W == pytest.approx([1.0, 0.0, 0.0], abs=ROUNDING)
        # centre (0, 0, 0.6) from foot a (0, −0.2, 0): arm · u = −0.6·0.2 + 0.8·0.6
        assert s.height == pytest.approx(0.36, rel=ROUNDING)
        # one foot higher turns gravity, not the masses: each point's own distance from the line counts
        d_low, d_high = 0.8 * 0.5 - 0.12, 0.8 * 0.8 - 0.12
        assert s.inertia_locked == pytest.approx(2.0 * d_low**2 + d_high**2, rel=ROUNDING)
        assert toppling_stiffness(s)[0] == pytest.approx(3.0 * 9.80665 * 0.36 * 0.8, rel=ROUNDING)

    def test_density_and_mass_say_the_same(self) -> None:
        machine = two_points()
        ball = replace(machine, body={"ball": Part(density=2700.0, solid=Sphere(0.2))})
        same = replace(machine, body={"ball": Part(mass=2700.0 * pi * 0.2**3 / 6.0, solid=Sphere(0.2))})
        s, t = build_stance(ball, "s"), build_stance(same, "s")
        assert s.mass == pytest.approx(11.3097336, rel=1e-8)         # 2700 π/750, digits written
        assert s.inertia_locked == pytest.approx(t.inertia_locked, rel=ROUNDING)
        assert s.inertia_locked == pytest.approx(s.mass * (0.25 + 0.4 * 0.01), rel=ROUNDING)

    def test_turn_of_a_part(self) -> None:
        long = two_points()
        upright = replace(long, body={"bar": Part(mass=1.0, solid=Box((0.0001, 0.0001, 0.6)))})
        lying = replace(long, body={"bar": Part(mass=1.0, solid=Box((0.0001, 0.0001, 0.6)), turn=(pi / 2, 0.0, 0.0))})
        # roll by 90° lays the bar along y, the contact line: only its place counts
        assert build_stance(lying, "s").inertia_locked == pytest.approx(0.25, rel=1e-7)
        assert build_stance(upright, "s").inertia_locked == pytest.approx(0.25 + 0.03, rel=1e-7)

    def test_feet_on_a_circle_stand_half_a_radius_from_the_middle(self) -> None:
        machine = three_legged(radius=0.25)
        for name in machine.stance_names():
            s = build_stance(machine, name)
            across = np.cross(s.e_W, -s.p_a_W)
            assert np.linalg.norm(across) == pytest.approx(0.125, rel=ROUNDING)      # common practice
            assert (-s.p_a_W) @ s.w_W == pytest.approx(-0.125, rel=ROUNDING)         # the middle lies inward


class TestOutward:
    @pytest.mark.parametrize("order", [1, -1])
    @pytest.mark.parametrize("lifted", FEET)
    def test_points_away_from_the_lifted_foot(self, lifted: str, order: int) -> None:
        s = build_stance(three_legged(order=order), f"without-{lifted}")
        across, clearance = s.lifted[lifted]
        assert across == pytest.approx(-0.375, rel=ROUNDING)        # 1½ radii
        assert clearance == pytest.approx(0.04, rel=ROUNDING)
        assert s.touch_down_lean == pytest.approx(atan(0.04 / 0.375), rel=ROUNDING)
        assert s.w_W @ np.array(on_circle(1.0, FEET[lifted])) == pytest.approx(-1.0, rel=ROUNDING)
        assert np.cross(s.e_W, s.u_W) == pytest.approx(s.w_W, abs=ROUNDING)

    def test_both_orders_of_the_file_are_one_stance(self) -> None:
        s, t = (build_stance(three_legged(order=order), "without-left") for order in (1, -1))
        assert (s.foot_from, s.foot_to) == (t.foot_from, t.foot_to)
        assert s.offset == pytest.approx(t.offset, abs=1e-16)

    def test_lifted_on_both_sides_keeps_the_file_order(self) -> None:
        both = {"front": (0.3, 0.0, 0.05), "back": (-0.2, 0.0, 0.03)}
        s = build_stance(two_points(both), "s")
        assert s.foot_from == "a"
        assert s.touch_down_lean == pytest.approx(atan(0.03 / 0.2))     # only the foot on the inward side, −x
        in_front = build_stance(two_points({"front": (0.3, 0.0, 0.05)}), "s")
        assert in_front.foot_from == "b"
        assert in_front.lifted["front"][0] == pytest.approx(-0.3)

    def test_touching_down_is_a_turn_about_the_line(self) -> None:
        s = build_stance(three_legged(), "without-fore")
        assert s.touch_down_lean is not None
        across, clearance = s.lifted["fore"]
        c, sn = cos(-s.touch_down_lean), sin(-s.touch_down_lean)         # inward is negative; θ turns u toward w
        assert clearance * c - across * sn == pytest.approx(0.0, abs=1e-16)


class TestLumped:
    def test_line_is_forward_and_outward_is_right(self) -> None:
        s = build_stance(rig(offset=0.01), "line")
        assert s.e_W == pytest.approx([1.0, 0.0, 0.0], abs=0.0)
        assert s.u_W == pytest.approx([0.0, 0.0, 1.0], abs=0.0)
        assert s.w_W == pytest.approx([0.0, -1.0, 0.0], abs=0.0)
        assert s.com_W == pytest.approx([0.0, -0.01, 0.28], abs=1e-16)
        assert (s.drag, s.foot_radius) == (0.01, 0.0)
        assert s.outward_is_fall_only

    @pytest.mark.parametrize(("axis", "share"), [((1.0, 0.0, 0.0), 1.0), ((1.0, 1.0, 0.0), 0.5), ((0.0, 0.0, 1.0), 0.0)])
    def test_locked_inertia_adds_the_wheel_with_its_motor(self, axis: tuple[float, float, float], share: float) -> None:
        machine = rig(axis=axis)
        # rim and web worked out apart: ρ from the mass, ½ m (r₁² + r₂²) each
        rim, web = (0.075**2 - 0.06**2) * 0.014, (0.06**2 - 0.004**2) * 0.003
        density = 0.42 / (rim + web)
        spin = density * (rim * (0.075**2 + 0.06**2) + web * (0.06**2 + 0.004**2)) / 2.0 + 8.5e-5
        assert build_stance(machine, "line").inertia_locked == pytest.approx(0.33 + share * spin, rel=ROUNDING)

    def test_an_inertia_less_than_a_point_mass_is_refused(self) -> None:
        least = 3.2 * 0.28**2
        assert build_stance(rig(inertia=least), "line").mass == 3.2
        with pytest.raises(InputError, match=r"lumped\.inertia"):
            build_stance(rig(inertia=0.999 * least), "line")


class TestRefusals:
    def refusal(self, machine: Machine, name: str = "without-fore") -> InputError:
        with pytest.raises(InputError) as caught:
            build_stance(machine, name)
        return caught.value

    def moved(self, **places: object) -> Machine:
        machine = three_legged()
        assert machine.stances is not None
        return replace(machine, stances={"without-fore": replace(machine.stances["without-fore"], **places)})

    def test_unknown_stance_names_the_nearest(self) -> None:
        problem = self.refusal(three_legged(), "without-for").problems[0]
        assert problem.line == 3
        assert "without-fore" in problem.hint

    def test_out_of_reach_gives_distance_reach_and_line(self) -> None:
        problems = self.refusal(self.moved(trunk=Pose((0.0, 0.0, 0.5)))).problems
        left = next(p for p in problems if p.key == "stances.without-fore.down.left")
        assert (left.line, left.column) == (7, 12)
        distance = 1e3 * np.hypot(0.14, 0.5)
        assert f"{distance:.4g} mm" in left.given
        assert "20 mm to 400 mm" in left.allowed
        assert {p.key.rpartition(".")[2] for p in problems} == {"fore", "left", "right"}      # all at once

    def test_feet_in_one_place(self) -> None:
        place = on_circle(0.25, FEET["left"])
        problem = self.refusal(self.moved(down={"left": place, "right": place})).problems[0]
        assert "in one place" in problem.given
        assert problem.key == "stances.without-fore.down.right"

    def test_feet_one_above_the_other(self) -> None:
        x, y, _ = on_circle(0.25, FEET["left"])
        problem = self.refusal(self.moved(down={"left": (x, y, 0.0), "right": (x, y, 0.1)})).problems[0]
        assert "one above the other" in problem.given

    def test_three_feet_down(self) -> None:
        down = {name: on_circle(0.25, angle) for name, angle in FEET.items()}
        assert "3 feet" in self.refusal(self.moved(down=down, lifted=None)).problems[0].given

    def test_a_leg_without_a_place_and_a_foot_without_a_leg(self) -> None:
        problems = self.refusal(self.moved(lifted={"fort": on_circle(0.25, 0.0, 0.04)})).problems
        assert any("fore" in p.hint and p.given == "fort" for p in problems)
        assert any("no place for the leg fore" in p.given for p in problems)

    def test_a_lifted_foot_below_the_ground(self) -> None:
        problem = self.refusal(self.moved(lifted={"fore": on_circle(0.25, 0.0, -0.01)})).problems[0]
        assert "10 mm below" in problem.given
        build_stance(self.moved(lifted={"fore": on_circle(0.25, 0.0, 0.0)}), "without-fore")     # on it is allowed

    @pytest.mark.parametrize(("limits", "joint"), [
        (JointLimits(swing=0.02), "swing"), (JointLimits(hip=0.6), "hip"), (JointLimits(knee=1.0), "knee")])
    def test_joint_limits(self, limits: JointLimits, joint: str) -> None:
        machine = self.moved(trunk=Pose((0.0, 0.03, 0.32)))
        assert machine.legs is not None
        legs = dict(machine.legs)
        legs["left"] = replace(legs["left"], limits=limits)
        problem = self.refusal(replace(machine, legs=legs)).problems[0]
        assert problem.given.startswith(joint)
        assert problem.key == "stances.without-fore.down.left"
        legs["left"] = replace(legs["left"], limits=JointLimits())
        assert build_stance(replace(machine, legs=legs), "without-fore").joints["left"]


class TestLegs:
    def test_ball_stands_on_its_contact(self) -> None:
        s = build_stance(three_legged(foot_radius=0.008), "without-fore")
        for foot in ("left", "right"):
            hip, knee, end = s.points_W[foot]
            assert end == pytest.approx(np.array(on_circle(0.25, FEET[foot], 0.008)), abs=1e-15)
            assert np.linalg.norm(knee - hip) == pytest.approx(0.19, rel=ROUNDING)
            assert np.linalg.norm(end - knee) == pytest.approx(0.21, rel=ROUNDING)

    def test_knee_sides_are_mirror_images_about_the_line_to_the_foot(self) -> None:
        machine = three_legged()
        assert machine.legs is not None
        inward = replace(machine, legs={n: replace(leg, knee="inward") for n, leg in machine.legs.items()})
        s, t = build_stance(machine, "without-fore"), build_stance(inward, "without-fore")
        hip, knee_out, end = s.points_W["left"]
        knee_in = t.points_W["left"][1]
        middle = (knee_out + knee_in) / 2.0
        assert np.linalg.norm(np.cross(middle - hip, end - hip)) == pytest.approx(0.0, abs=1e-15)
        assert np.linalg.norm(knee_out[:2]) > np.linalg.norm(knee_in[:2])
        assert s.joints["left"][2] == pytest.approx(-t.joints["left"][2], rel=ROUNDING)

    def test_one_link_leg_spans_hip_to_foot(self) -> None:
        leg = Leg(hip=(0.0, 0.2, 0.0), upper=Link(0.5, 0.4, 0.25))
        other = replace(leg, hip=(0.0, -0.2, 0.0))
        machine = replace(two_points(), legs={"b": leg, "a": other})
        s = build_stance(machine, "s")
        assert s.joints["b"] == pytest.approx((0.0, 0.0), abs=0.0)
        # 0.4 kg rods 0.5 long, centre at 0.375 above the foot, with m l²/12 about it
        rods = 2.0 * 0.4 * (0.375**2 + 0.25 / 12.0)
        assert s.inertia_locked == pytest.approx(2.0 * 0.25 + 0.64 + rods, rel=ROUNDING)
        with pytest.raises(InputError, match="the one link's length, 490 mm"):
            build_stance(replace(machine, legs={"b": replace(leg, upper=Link(0.49, 0.4)), "a": other}), "s")

    def test_stated_link_inertia_replaces_the_rod(self) -> None:
        from balance.machine.solids import Tensor
        rod = 0.4 * 0.25 / 12.0
        plain = Leg(hip=(0.0, 0.2, 0.0), upper=Link(0.5, 0.4))
        stated = replace(plain, upper=Link(0.5, 0.4, inertia=Tensor(0.0, rod, rod)))
        fat = replace(plain, upper=Link(0.5, 0.4, inertia=Tensor(0.001, rod + 0.002, rod + 0.004)))
        other = replace(plain, hip=(0.0, -0.2, 0.0))
        J = [build_stance(replace(two_points(), legs={"b": leg, "a": other}), "s").inertia_locked
             for leg in (plain, stated, fat)]
        assert J[1] == pytest.approx(J[0], rel=ROUNDING)
        # the leg hangs straight down at y: outward is y, so its hinge is −x and the line sees the link's y
        assert J[2] - J[0] == pytest.approx(0.004, rel=1e-9)
