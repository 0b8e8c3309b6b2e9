"""What must hold between the values of a machine file."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from balance.base.errors import InputError
from balance.machine.read import read_machine
from balance.machine.rules import check_gimballed
from balance.machine.solids import Tensor
from balance.machine.tensors import check_tensor, principal_moments
from balance.stance.build import build_stance


def changed(tmp_path, file, *edits):
    text = Path(f"plants/{file}.yaml").read_text(encoding="utf-8")
    for old, new in edits:
        assert old in text, old
        text = text.replace(old, new, 1)
    path = tmp_path / "m.yaml"
    path.write_text(text, encoding="utf-8")
    return str(path)


def problems(tmp_path, file, *edits):
    with pytest.raises(InputError) as caught:
        read_machine(changed(tmp_path, file, *edits))
    return caught.value.problems


@pytest.mark.parametrize("file", ["bench-rig", "bench-rig-short", "trellis-scout", "quay-carrier"])
def test_shipped_machines_are_read(file):
    assert read_machine(f"plants/{file}.yaml").machine == file


@pytest.mark.parametrize(("file", "old", "new", "key", "says"), [
    ("bench-rig", "motor: hub-motor", "motor: hub-moter", "stabilisers.wheel.motor", "hub-motor"),
    ("bench-rig", "inertia: 0.33 kg*m^2", "inertia: 0.2 kg*m^2", "lumped.inertia", "mass*(height^2"),
    ("bench-rig", "continuous_current: 6 A", "continuous_current: 60 A", "motors.hub-motor.continuous_current", "exchanged"),
    ("trellis-scout", "mass: 620 g,", "mass: 620 g, density: 900 kg/m^3,", "body.battery", "exactly one"),
    ("trellis-scout", "mass: 620 g,", "mass: 620 g, material: steel,", "body.battery", "exactly one"),
    ("trellis-scout", "mass: 1.75 kg,", "material: steal,", "body.deck.material", "did you mean `steel`"),
    ("trellis-scout", "mass: 410 g,", "material: steel,", "body.camera.material", "without `solid`"),
    ("trellis-scout", "mass: 620 g,   solid: {box: [140 mm, 45 mm, 35 mm]}", "material: brass, solid: {rod: {length: 9 cm}}",
     "body.battery.material", "without a volume"),
    ("bench-rig", "spin: 2.2e-3 kg*m^2", "spin: 2.2e-3 kg*m^2, material: steel", "stabilisers.wheel.rotor.material",
     "without `solid`"),
    ("trellis-scout", "outer: 30 mm, inner: 26 mm", "outer: 30 mm, inner: 36 mm", "body.mast.solid", "less than the outer"),
    ("trellis-scout", "xx: 8e-4 kg*m^2", "xx: 1e-4 kg*m^2", "body.camera.inertia", "triangle inequality"),
    ("trellis-scout", "down:   {left: [-130 mm, 225.2 mm, 0 mm], right", "down:   {lefft: [-130 mm, 225.2 mm, 0 mm], right",
     "stances.on-left-right", "left"),
    ("quay-carrier", "gimbal_axis: [0, 1, 0]", "gimbal_axis: [0, 1, 1]", "stabilisers.gyros.gimbal_axis", "square to"),
    ("quay-carrier", "angle_limit: 60 deg", "angle_limit: 95 deg", "stabilisers.gyros.gimbal.angle_limit", "less than"),
    ("bench-rig", "peak_current: 20 A}", "peak_current: 20 A, regenerates: false}", "supply.capacitance", "470 uF"),
    ("bench-rig", "peak_current: 20 A}", "peak_current: 20 A, brake_resistor: 4 ohm}", "supply.brake_resistor",
     "overvoltage"),
    ("bench-rig", "peak_current: 20 A}", "peak_current: 20 A, overvoltage: 20 V}", "supply.overvoltage",
     "more than `voltage`"),
    ("bench-rig", "coulomb: 3 mN*m", "coulomb: 3 mN*m, stiction: 1 mN*m", "stabilisers.wheel.drag.stiction",
     "at least `coulomb`"),
    ("bench-rig", "speed_limit: 3600 rpm", "speed_limit: 3600 rpm\n    bias_speed: 4000 rpm", "stabilisers.wheel.bias_speed",
     "speed_limit"),
    ("bench-rig", "motor: hub-motor", "motor: hub-motor\n    gear: {tooth_stiffness: 5 N*m/rad}",
     "stabilisers.wheel.gear.tooth_stiffness", "without `backlash`"),
    ("bench-rig", "lumped: {", "body: {a: {mass: 1 kg, solid: {point: 0 mm}}}\nlumped: {", "", "lumped")])
def test_each_rule(tmp_path, file, old, new, key, says):
    found = problems(tmp_path, file, (old, new))
    assert any(p.key.startswith(key) and says in str(p) and p.line > 0 for p in found), [str(p) for p in found]


def test_a_material_is_its_density(tmp_path):
    deck, wheel = "mass: 1.75 kg,", "mass: 420 g,"
    ways = (("material: aluminium,", "material: steel,"), ("density: 2700 kg/m^3,", "density: 7850 kg/m^3,"),
            ("material: brass,", "material: steel,"))
    one, same, heavier = (
        build_stance(read_machine(changed(tmp_path, "trellis-scout", (deck, of_deck), (wheel, of_wheel))), "on-left-right")
        for of_deck, of_wheel in ways)
    assert (one.mass, one.offset, one.inertia_locked) == (same.mass, same.offset, same.inertia_locked)
    plate = 0.24 * 0.24 * 0.05                                    # m³, the deck's box
    assert heavier.mass - one.mass == pytest.approx(plate * (8500.0 - 2700.0), rel=1e-12)   # rounding of sums of ten masses


def test_principal_moments_against_numpy():
    rng = np.random.default_rng(11)
    for _ in range(200):
        A = rng.standard_normal((3, 3))
        M = A @ A.T
        tensor = Tensor(M[0, 0], M[1, 1], M[2, 2], M[0, 1], M[0, 2], M[1, 2])
        # closed forms through the cubic are good to about the square root of rounding
        assert principal_moments(tensor) == pytest.approx(np.linalg.eigvalsh(M), abs=2e-7 * M.max())


def test_rule_and_moments_are_told():
    (fault,) = check_tensor(Tensor(1.0, 1.0, 3.0))
    assert "triangle" in fault.allowed
    assert "principal moments 1, 1 and 3" in fault.given
    (fault,) = check_tensor(Tensor(1.0, 1.0, 1.0, 2.0))
    assert "positive" in fault.allowed
    assert list(check_tensor(Tensor(1.0, 1.0, 2.0))) == []          # a flat plate: equality is allowed
    (fault,) = check_tensor(Tensor(0.0, 1.0, 1.0))                  # no body is that thin
    assert "solid: {rod" in fault.hint
    assert list(check_tensor(Tensor(1e-4, 1.0, 1.0))) == []


def test_bodies_of_real_parts_pass_and_shrunken_ones_do_not():
    """Any sum of point masses has a physical tensor; taking a moment away breaks the rule (the twin)."""
    rng = np.random.default_rng(12)
    for _ in range(100):
        r, m = rng.standard_normal((6, 3)), rng.uniform(0.1, 1, 6)
        r -= (m @ r) / m.sum()
        J = sum(mi * (ri @ ri * np.eye(3) - np.outer(ri, ri)) for mi, ri in zip(m, r, strict=True))
        assert list(check_tensor(Tensor(J[0, 0], J[1, 1], J[2, 2], J[0, 1], J[0, 2], J[1, 2]))) == []
        values = np.linalg.eigvalsh(J)
        assert list(check_tensor(Tensor(values[0], values[1], 1.01 * (values[0] + values[1]))))


def test_a_skew_gimbal_frame_is_refused():
    """Products between the axes the equations know would be lost in silence; 1 % of the largest moment is let pass."""
    straight = Tensor(4e-3, 5e-3, 6e-3)
    unit = replace(read_machine("plants/quay-carrier.yaml").stabilisers["gyros"], frame_inertia=straight)
    assert not list(check_gimballed(unit))
    for product in ("xy", "xz", "yz"):
        (fault,) = check_gimballed(replace(unit, frame_inertia=replace(straight, **{product: 1e-4})))
        assert fault.key == "frame_inertia"
        assert "product of 0.0001" in fault.given
        assert not list(check_gimballed(replace(unit, frame_inertia=replace(straight, **{product: 5e-5}))))
    # the same frame seen along turned axes is straight again
    c = 2**-0.5
    turned = replace(unit, spin_axis=(0.0, 0.0, 1.0), gimbal_axis=(c, c, 0.0),
                     frame_inertia=Tensor(4.5e-3, 4.5e-3, 6e-3, xy=-0.5e-3))
    assert not list(check_gimballed(turned))
