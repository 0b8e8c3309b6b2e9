"""What the cautions say of rotors: published values, and this machine's own numbers worked by hand."""

from __future__ import annotations

from dataclasses import replace
from math import inf, nan, pi

import pytest

from balance.machine.motors import Supply
from balance.report.cautions import cautions, takes_back
from balance.report.rotors import RotorFact, rotor_facts

RPM = pi / 30


def fact(**changes: float) -> RotorFact:
    still = RotorFact("wheel", False, 1, 3000 * RPM, 0.05625, 5.0, 0.5 * 0.05625 * (3000 * RPM) ** 2, 0.15 * 3000 * RPM, nan)
    return replace(still, **changes)


def test_energy_of_the_published_disc(answered):
    """Disc of 5 kg, r = 0.15 m, 3000 rpm: 2775.83 J (references 10.04, derived; relative 1e-5 as printed)."""
    result = answered("bench-rig", "line")
    plant = result.designs[0].plant
    disc = replace(plant.units[0], inertia=0.05625, speed_limit=3000 * RPM)
    (one,) = rotor_facts(result.machine, replace(plant, units=(disc,)))
    assert one.energy == pytest.approx(2775.83, rel=1e-5)


@pytest.mark.parametrize(("grade", "rpm", "micrometres"), [
    (6.3e-3, 10000, 6.0161), (6.3e-3, 3000, 20.0535), (6.3e-3, 950, 63.3269), (2.5e-3, 3000, 7.95775),
    (2.5e-3, 6000, 3.97887)])
def test_permissible_unbalance(grade, rpm, micrometres):
    """ISO 21940-11: e = G/ω (references 10.05, read and derived; relative 1e-4 as printed)."""
    assert 1e6 * fact(top_speed=rpm * RPM).eccentricity(grade) == pytest.approx(micrometres, rel=1e-4)


def test_shaking_force_is_mass_times_eccentricity_times_speed_squared():
    one = fact()
    turning = one.mass * one.eccentricity(6.3e-3) * one.top_speed**2
    assert one.shaking(6.3e-3) == pytest.approx(turning, rel=1e-12)       # an identity: rounding only


def test_ring_stress_of_the_published_ring(answered):
    """A thin ring of 7800 kg/m³, R = 0.25 m, 6900 rpm: ρω²R² = 254.525 MPa (references 10.02, derived; 1e-5 as printed)."""
    result = answered("scout-wheels", "on-fore-left")
    wheel = result.machine.stabilisers["long-wheel"]
    size = replace(wheel.rotor.solid.rim_and_web, outer=0.5)
    rotor = replace(wheel.rotor, solid=replace(wheel.rotor.solid, rim_and_web=size), mass=None, density=7800.0)
    machine = replace(result.machine, stabilisers={"long-wheel": replace(wheel, rotor=rotor)})
    plant = result.designs[0].plant
    unit = replace(plant.units[0], speed_limit=6900 * RPM)
    (one,) = rotor_facts(machine, replace(plant, units=(unit,)))
    assert one.ring_stress == pytest.approx(254.525e6, rel=1e-5)
    assert one.rim_speed == pytest.approx(0.25 * 6900 * RPM, rel=1e-12)


def test_a_rotor_without_stated_size_claims_neither_rim_nor_stress(answered):
    result = answered("bench-rig", "line")
    said = dict(cautions(result))
    assert "rim runs" not in said["Stored energy"]
    assert "MPa" not in said["Burst and containment"]
    sized = dict(cautions(answered("scout-wheels", "on-fore-left")))
    assert "rim runs at 35.3" in sized["Stored energy"]           # 75 mm × 471.24 rad/s = 35.34 m/s
    assert "MPa" in sized["Burst and containment"]


def test_a_wheel_without_speed_limit_is_left_out(answered):
    result = answered("bench-rig", "line")
    plant = result.designs[0].plant
    assert rotor_facts(result.machine, replace(plant, units=(replace(plant.units[0], speed_limit=inf),))) == ()


def test_numbers_of_the_gyros(answered):
    """I = 0.0071376 kg·m², 6500 rpm: ½Iω² = 1653.5 J; a frame turned at 60 deg/s is pushed with I ω·1.0472 = 5.088 N·m."""
    said = dict(cautions(answered("quay-gyros", "on-left-right")))
    assert "each of the two rotors" in said["Stored energy"]
    assert "1654\u00a0J" in said["Stored energy"]
    assert "5.09\u00a0N·m" in said["Gimbals"]


def test_only_gimballed_machines_are_warned_of_gimbals(answered):
    assert "Gimbals" not in dict(cautions(answered("bench-rig", "line")))


@pytest.mark.parametrize(("supply", "words"), [
    (None, "states no supply"), (Supply(24.0, regenerates=True), "full battery"),
    (Supply(24.0, regenerates=False, brake_resistor=2.0), "brake resistor must be rated"),
    (Supply(24.0, regenerates=False, capacitance=0.01), "31.0\u00a0V"),
    (Supply(24.0, regenerates=False), "until something fails")])
def test_where_braking_energy_goes(answered, supply, words):
    machine = replace(answered("bench-rig", "line").machine, supply=supply)
    energy = 0.5 * 0.01 * (31.0**2 - 24.0**2)                    # what lifts 10 mF from 24 V to 31 V
    assert words in takes_back(machine, energy)
