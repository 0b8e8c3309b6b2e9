"""Stabilisers as masses: wheels with gears, scissored pairs, and the turntable that faces the line."""

from __future__ import annotations

from dataclasses import replace
from math import cos, pi, sin

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.machine.motors import Gear
from balance.machine.read import read_machine
from balance.machine.solids import Disc, RoundSize
from balance.machine.stabilisers import Rotor
from balance.maths.rotations import about, unit
from balance.stance.build import build_stance
from balance.stance.facing import faced_axes, facing_turn
from balance.stance.rotors import rotor_mass, stabiliser_bodies, wheel_drive
from tests.stance.machines import MOTOR, pair, rig, three_legged, wheel

MOTORS = {"hub": MOTOR}
ROUNDING = 1e-13


class TestRotor:
    def test_solid_disc(self) -> None:
        found = rotor_mass(Rotor(mass=2.0, solid=Disc(RoundSize(0.01, 0.2))))
        assert found.spin == pytest.approx(0.5 * 2.0 * 0.01, rel=ROUNDING)
        assert found.transverse == pytest.approx(2.0 * (0.01 / 4.0 + 1e-4 / 12.0), rel=ROUNDING)

    def test_stated_inertias(self) -> None:
        assert rotor_mass(Rotor(mass=1.0, spin=0.02)).transverse == 0.01          # a thin disc
        assert rotor_mass(Rotor(mass=1.0, spin=0.02, transverse=0.013)).transverse == 0.013


class TestGear:
    @pytest.mark.parametrize(("sense", "s"), [("same", 1.0), ("reversed", -1.0)])
    def test_mass_matrix_is_that_of_two_rotors(self, sense: str, s: float) -> None:
        drive = wheel_drive(replace(wheel((1, 0, 0)), gear=Gear(ratio=5.0, sense=sense)), MOTORS)
        spin, J_r = rotor_mass(wheel((1, 0, 0)).rotor).spin, MOTOR.rotor_inertia
        # kinetic energy ½ I (θ' + Ω)² + ½ J_r (θ' + s N Ω)²: its Hessian in (θ', Ω)
        assert drive.locked == pytest.approx(spin + J_r, rel=ROUNDING)
        assert drive.coupled == pytest.approx(spin + s * 5.0 * J_r, rel=ROUNDING)
        assert drive.own == pytest.approx(spin + 25.0 * J_r, rel=ROUNDING)

    def test_direct_drive_is_one_rotor(self) -> None:
        drive = wheel_drive(wheel((1, 0, 0)), MOTORS)
        assert drive.locked == drive.coupled == drive.own

    def test_a_rotor_already_held_is_not_added_again(self) -> None:
        geared = replace(wheel((1, 0, 0)), gear=Gear(ratio=3.0, includes_rotor=True))
        stated = rotor_mass(geared.rotor).spin
        assert wheel_drive(geared, MOTORS).own == pytest.approx(stated, rel=ROUNDING)
        assert wheel_drive(replace(geared, gear=Gear(ratio=3.0)), MOTORS).own > 1.2 * stated

    def test_a_wheel_lighter_than_the_rotor_it_holds_is_refused(self) -> None:
        machine = rig()
        heavy = replace(machine, stabilisers={"wheel": replace(wheel((1, 0, 0)), gear=Gear(9.0, includes_rotor=True))})
        with pytest.raises(InputError, match="includes_rotor"):
            build_stance(heavy, "line")
        light = replace(machine, stabilisers={"wheel": replace(wheel((1, 0, 0)), gear=Gear(3.0, includes_rotor=True))})
        assert build_stance(light, "line").mass == 3.2

    @pytest.mark.parametrize("sense", ["same", "reversed"])
    def test_lumped_inertia_is_the_one_with_the_wheel_free(self, sense: str) -> None:
        unit_ = replace(wheel((1.0, 0.3, 0.0)), gear=Gear(4.0, sense=sense))
        machine = replace(rig(), stabilisers={"wheel": unit_})
        drive, share = wheel_drive(unit_, MOTORS), unit(unit_.axis)[0]
        J = build_stance(machine, "line").inertia_locked
        mass_matrix = np.array([[J, share * drive.coupled], [share * drive.coupled, drive.own]])
        # no torque on the wheel: the body answers with the inverse of (M⁻¹)₀₀
        assert 1.0 / np.linalg.inv(mass_matrix)[0, 0] == pytest.approx(0.33, rel=ROUNDING)


class TestFacing:
    def test_every_line_is_faced(self) -> None:
        rng = np.random.default_rng(11)
        for _ in range(50):
            tilt = rng.uniform(-0.2, 0.2)
            yaw = rng.uniform(-pi, pi)
            e_T = np.array([cos(tilt) * cos(yaw), cos(tilt) * sin(yaw), sin(tilt)])
            s_T, g_T, R = faced_axes(pair(turntable=True), e_T)
            # the couple lies in the table's plane: a line tilted out of it leaves its cosine
            assert e_T @ np.cross(g_T, s_T) == pytest.approx(cos(tilt), rel=ROUNDING)
            assert (R @ [0.0, 0.0, 1.0]).tolist() == [0.0, 0.0, 1.0]

    def test_no_other_turn_faces_better(self) -> None:
        rng = np.random.default_rng(12)
        for _ in range(20):
            s_T = unit(rng.normal(size=3))
            g_T = unit(np.cross(s_T, rng.normal(size=3)))
            e_T = unit(rng.normal(size=3))
            best = facing_turn(s_T, g_T, e_T)
            share = [e_T @ about([0, 0, 1], turn) @ np.cross(g_T, s_T) for turn in np.linspace(-pi, pi, 721)]
            at_best = e_T @ about([0, 0, 1], best) @ np.cross(g_T, s_T)
            assert at_best >= max(share) - 1e-15
            assert at_best == pytest.approx(max(share), abs=1e-5)      # grid of half a degree: (0.0044)²/2

    def test_a_fixed_mount_stays_as_written(self) -> None:
        s_T, g_T, R = faced_axes(pair(turntable=False), np.array([1.0, 0.0, 0.0]))
        assert (s_T.tolist(), g_T.tolist()) == ([0.0, 0.0, 1.0], [0.0, 1.0, 0.0])
        assert np.array_equal(R, np.eye(3))

    def test_nothing_to_turn_is_no_turn(self) -> None:
        x, z = np.array([1.0, 0.0, 0.0]), np.array([0.0, 0.0, 1.0])
        assert facing_turn(x, np.cross(z, x), np.array([1.0, 0.0, 0.0])) == 0.0     # g × s₀ along z
        assert facing_turn(z, x, z) == 0.0


class TestPair:
    def test_two_rotors_a_spacing_apart_along_the_turned_gimbal_axis(self) -> None:
        e_T = np.array([0.0, 1.0, 0.0])
        one, other = stabiliser_bodies("gyros", pair(turntable=True), MOTORS, e_T)
        assert other.centre - one.centre == pytest.approx([-0.2, 0.0, 0.0], abs=1e-16)   # y turned by +90°
        assert (one.centre + other.centre) / 2.0 == pytest.approx([0.0, 0.0, 0.12], abs=1e-16)
        assert one.mass == pytest.approx(0.72)

    def test_inertia_about_the_line_by_hand(self) -> None:
        none = build_stance(three_legged(stabilisers={}), "without-fore")
        both = build_stance(three_legged(stabilisers={"gyros": pair(turntable=True)}), "without-fore")
        rotor = rotor_mass(pair(True).rotor)
        # line x = −0.125 along y, pair at height 0.32 + 0.12; gimbal axis turned square to the line: rotors at x = ±0.1
        squares = sum(0.72 * ((x + 0.125) ** 2 + 0.44**2) for x in (-0.1, 0.1))
        own = 2.0 * (rotor.transverse + 1e-3)                     # spin up, line across: transverse; frame as stated
        assert both.inertia_locked - none.inertia_locked == pytest.approx(squares + own, rel=1e-12)   # a difference
        fixed = build_stance(three_legged(stabilisers={"gyros": pair(turntable=False)}), "without-fore")
        assert fixed.inertia_locked < both.inertia_locked - 1e-3  # rotors along the line: nearer to it


def test_play_needs_a_rotor_that_crosses_it():
    machine = read_machine("plants/bench-rig.yaml")
    wheel = machine.stabilisers["wheel"]
    for inertia, wrong in ((0.0, True), (6e-5, False)):
        motors = {"hub-motor": replace(machine.motors["hub-motor"], rotor_inertia=inertia)}
        geared = replace(machine, motors=motors, stabilisers={"wheel": replace(wheel, gear=Gear(3.0, backlash=0.01))})
        if wrong:
            with pytest.raises(InputError, match=r"gear\.backlash.*rotor_inertia"):
                build_stance(geared, "line")
        else:
            assert build_stance(geared, "line").mass > 0.0
