"""What flywheels in gimbals ask of drive, turntable, feet, spin motor and link: against vectors, integration, the kernel."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from balance.kernel import layout as at
from balance.kernel.equations import servo_torque
from balance.machine.read import read_machine
from balance.machine.stabilisers import GimballedFlywheel, Mount, Turntable
from balance.maths.rotations import about
from balance.plant.build import build_plant
from balance.plant.gyros import holds_lean_rate, needs_link, turn_times, turning
from balance.plant.motors import Drive
from balance.stance.build import build_stance
from balance.stance.rotors import wheel_drive


def quay(**changes):
    """Return the carrier with its unit changed, and its plants."""
    machine = read_machine("plants/quay-carrier.yaml")
    machine = replace(machine, stabilisers={"gyros": replace(machine.stabilisers["gyros"], **changes)})
    return machine, tuple(build_plant(machine, build_stance(machine, name)) for name in machine.stance_names())


def single(**changes):
    """Return the carrier with one flywheel of the pair."""
    machine = read_machine("plants/quay-carrier.yaml")
    pair = machine.stabilisers["gyros"]
    given = {name: getattr(pair, name) for name in GimballedFlywheel.__dataclass_fields__} | changes
    machine = replace(machine, stabilisers={"gyros": GimballedFlywheel(**given)})
    return machine, build_plant(machine, build_stance(machine, "on-left-right"))


def test_the_table_turns_by_the_angle_between_the_lines():
    _, plants = quay()
    feet = {"fore": np.array([420.0, 0]), "left": np.array([-210, 363.7]), "right": np.array([-210, -363.7])}
    lines = {"on-left-right": feet["left"] - feet["right"], "on-fore-right": feet["right"] - feet["fore"]}
    a, b = lines.values()
    angle = np.arccos(a @ b / np.linalg.norm(a) / np.linalg.norm(b))
    found = turn_times(plants, 0)
    assert len(found) == 3
    assert found["on-left-right", "on-fore-right"] == pytest.approx(angle / 2.0, rel=1e-9)   # at 2 rad/s
    _, fixed = quay(mount=None)
    assert turn_times(fixed, 0) == {}


@pytest.mark.parametrize("count", [1, 2])
def test_the_couple_is_how_fast_the_momentum_turns(count):
    """dL/dt of the rotors' momentum vectors by a finite turn of the table, over all gimbal angles."""
    machine, plants = quay()
    plant = single()[1] if count == 1 else plants[0]
    unit, row = plant.units[0], plant.unit_parameters[0]
    s, g, step = unit.axis_T, unit.gimbal_axis_T, 1e-6

    def momentum(gamma):
        return row[at.MOMENTUM] * sum(side * about(g, side * gamma) @ s for side in (1.0, -1.0)[:count])

    turned = about([0.0, 0.0, 1.0], step)
    couples = [np.linalg.norm(turned @ momentum(x) - momentum(x)) / step * 2.0
               for x in np.linspace(-row[at.ANGLE_STOP], row[at.ANGLE_STOP], 61)]
    found = turning(plant, 0)
    assert found.rate == 2.0
    assert found.stops == pytest.approx(max(couples), rel=1e-4)
    assert found.level == pytest.approx(couples[30], abs=1e-6)
    weight = plant.stance.mass * machine.gravity
    near = min(abs((plant.stance.com_W - foot) @ plant.stance.e_W) for foot in (plant.stance.p_a_W, plant.stance.p_b_W))
    assert found.share == pytest.approx(found.stops / (weight * near), rel=1e-9)       # moments about the farther foot


def test_no_table_no_couple():
    _, plants = quay(mount=None)
    assert turning(plants[0], 0) is None
    _, slower = quay(mount=Mount(Turntable(1.0)))
    _, plants = quay()
    assert turning(slower[0], 0).stops == pytest.approx(0.5 * turning(plants[0], 0).stops)


def one_wheel(table=None, axis=(1.0, 0.0, 0.0)):
    """Return the scout with its long wheel alone, and its plants."""
    machine = read_machine("plants/trellis-scout.yaml")
    wheel = replace(machine.stabilisers["long-wheel"], mount=None if table is None else Mount(Turntable(table)), axis=axis)
    machine = replace(machine, stabilisers={"wheel": wheel})
    return machine, tuple(build_plant(machine, build_stance(machine, name)) for name in machine.stance_names())


def test_a_wheel_on_a_table_is_a_wheel_along_each_line():
    """The table's plant is that of a fixed wheel whose axis the file lays along the line; a fixed one loses the cosine."""
    machine, turned = one_wheel(3.0)
    for i, name in enumerate(machine.stance_names()):
        stance = turned[i].stance
        e_T = stance.R_WT.T @ stance.e_W
        laid = one_wheel(axis=tuple(float(x) for x in e_T))[1][i]
        assert turned[i].units[0].axis_share == pytest.approx(1.0, rel=1e-12)
        assert turned[i].inertia_locked == pytest.approx(laid.inertia_locked, rel=1e-12)
        assert pytest.approx(laid.model.A, rel=1e-10, abs=1e-12) == turned[i].model.A      # rounding of one more turn
        assert turned[i].torque_limit == pytest.approx(laid.torque_limit, rel=1e-12)
        assert abs(one_wheel()[1][i].units[0].axis_share) < 0.9, name                     # the twin


def test_turning_a_fast_wheel_loads_the_feet():
    machine, plants = one_wheel(3.0)
    unit = plants[0].units[0]
    found = turning(plants[0], 0)
    rotor = wheel_drive(machine.stabilisers["wheel"], machine.motors)
    assert found.stops == pytest.approx(3.0 * rotor.coupled * unit.speed_limit, rel=1e-9)    # ψ̇ × I Ω, axis level
    assert found.level == 0.0
    assert turning(one_wheel()[1][0], 0) is None
    times = turn_times(plants, 0)
    assert times["on-fore-right", "on-fore-left"] == pytest.approx(2.0 * np.pi / 3.0 / 3.0, rel=1e-3)    # feet to 0.1 mm


def test_the_lean_rate_that_is_held_takes_all_of_the_drive():
    _, plants = quay()
    row = plants[0].unit_parameters[:1].copy()
    row[0, [at.GIMBAL_DAMPING, at.GIMBAL_SPRING]] = 0.0
    rate = holds_lean_rate(row[0])
    X = np.array([0.0, rate, 0.0, 0.0])
    assert abs(servo_torque(0, X, 0.0, 0.0, row)) == pytest.approx(row[0, at.DRIVE_TORQUE], rel=1e-12)
    rig = read_machine("plants/bench-rig.yaml")
    wheel = build_plant(rig, build_stance(rig, "line"))
    assert holds_lean_rate(wheel.unit_parameters[0]) == np.inf


@pytest.mark.parametrize(("volts", "speed"), [(48.0, 300.0), (48.0, 900.0), (20.0, 600.0), (np.inf, 900.0)])
def test_spinning_up_against_an_integration(volts, speed):
    drive, inertia = Drive(0.028, 0.028, 0.18, volts, 20.0, 1e3), 7e-3
    if np.isinf(volts):
        due = inertia * speed / (20.0 * 0.028)
    else:
        reached = lambda _, w: w[0] - speed                                  # noqa: E731
        reached.terminal = True
        due = solve_ivp(lambda _, w: [drive.torque_at(w[0]) / inertia], (0.0, 1e4), [0.0], events=reached, rtol=1e-9,
                        atol=1e-9).t[-1]
    assert drive.spin_up(inertia, speed) == pytest.approx(due, rel=1e-4)     # the integrator sees the kink of the line
    assert np.isinf(volts) or drive.spin_up(inertia, 1.01 * volts / 0.028) == np.inf


def test_energy_and_spin_motor():
    machine, plants = quay()
    unit = plants[0].units[0]
    speed = 6500 * 2 * np.pi / 60
    assert unit.energy == pytest.approx(2 * 0.5 * unit.inertia * speed**2)
    motor = machine.motors["spindle"]
    drive = Drive(0.028, 0.028, 0.18, 48.0, 20.0, 1e3)
    assert unit.spin_up == pytest.approx(drive.spin_up(unit.inertia + motor.rotor_inertia, speed))
    _, unstated = quay(spin_motor=None)
    assert np.isnan(unstated[0].units[0].spin_up)


def test_a_pair_off_its_line_needs_a_link():
    """κ ≠ 0 or e·s₀ ≠ 0 about one of the lines: a pair fixed on the trunk, free gimbals."""
    _, faced = quay()
    assert not any(needs_link(p, 0) for p in faced)
    _, fixed = quay(mount=None)
    assert [needs_link(p, 0) for p in fixed] == [True, True, True]            # its gimbal axis y is square to no line
    _, geared = quay(mount=None, linked=True)
    assert not any(needs_link(p, 0) for p in geared)
