"""What the C is a copy of: description against designed law, ranges, rounding, refusals, arctangent, folder."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from math import atan, radians

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from balance.base.errors import InputError
from balance.design.loop import sample_plant
from balance.firmware.atan import SERIES
from balance.firmware.describe import NotAlikeError, describe
from balance.firmware.fixed_model import FixedModel, product, ratio
from balance.firmware.flags import BIT
from balance.firmware.float_model import FloatModel
from balance.firmware.folder import write_folder
from balance.firmware.quantised import SHARE, fixed_laws, roundings, to_places, too_dear
from balance.firmware.reach import memory_reach, settling_samples
from balance.firmware.scaling import NARROW, NoRoomError, scale
from balance.kernel.tick import law_tick, share_out
from balance.simulate.setup import line_share
from tests.firmware.builds import CASES, designs, package


def law_in_doubles(design, readings):
    """Run the kernel's own tick over rows of measurements; return the units' commands, (n, units)."""
    law, out = design.law, []
    x, spare = np.zeros(len(law.memory)), np.zeros(len(law.memory))
    for y in readings:
        _, v = law_tick(x, y, law.A, law.B, law.E, law.C, law.D, law.output_limit, spare)
        given = np.zeros(len(law.allotment))
        share_out(v, y, law.allotment, law.levelling, law.input_limits, line_share(design.plant), given)
        out.append(given)
    return np.array(out)


def walk(design, n=200, size=0.02, seed=3):
    """Return rows of measurements a machine might show, (n, m): in and out of saturation."""
    rng, law = np.random.default_rng(seed), design.law
    scale_of = [size if name in ("lean", "tilt") else 5 * size if name in ("lean_rate", "gyro") else
                0.3 if "gimbal_angle" in name else 0.5 if "gimbal_rate" in name else 40.0 for name in law.measurements]
    steps = rng.standard_normal((n, len(scale_of))) * scale_of
    return np.cumsum(steps, axis=0) / 8.0


def raw_of(program, stance, row):
    """Return the numbers a caller would fill in for one row of measurements."""
    e, u, w = (np.array(axis) for axis in program.axes[stance])
    direct = [value + reading.rest[stance] for value, reading in zip(row, program.readings, strict=True)
              if reading.kind == "direct"]
    if not program.inertial:
        return np.array(direct)
    tilt, rate = row[0] + program.readings[0].rest[stance], row[1]
    return np.concatenate([direct, program.gravity * (np.cos(tilt) * u - np.sin(tilt) * w), rate * e])


@pytest.mark.parametrize("case", CASES)
def test_both_models_do_what_the_kernels_law_does(case):
    """Within rounding: float32 to 1e-5 of each limit, 16-bit gains to 2e-3; an estimate of lean good to 2e-4 rad, 1e-2."""
    program, fixed = package(case).program, package(case).fixed
    close = 1e-2 if program.inertial else 2e-3
    for s, design in enumerate(designs(case)):
        rows = walk(design)
        due = law_in_doubles(design, rows)
        floats, wholes = FloatModel(program, s), FixedModel(fixed, s)
        limits = design.law.input_limits
        assert np.any(np.abs(due) >= limits * (1 - 1e-9))
        assert np.any(np.abs(due) < 0.9 * limits)
        for row, expected in zip(rows, due, strict=True):
            raw = raw_of(program, s, row)
            _, given = floats.update(raw.astype(np.float32))
            assert np.abs(np.array(given, dtype=float) - expected).max() < 1e-5 * limits.max()
            _, whole = wholes.update([round(x * 2.0**p) for x, p in zip(raw, fixed.fields, strict=True)])
            given = [x / 2.0**r.places for x, r in zip(whole, fixed.inputs, strict=True)]
            assert np.abs(np.array(given) - expected).max() < close * limits.max()


def test_a_law_of_another_machine_is_not_done():
    """The twin: the same rows through the law of another stance's design differ."""
    first, second = designs("quay-gyros")[:2]
    rows = walk(first)
    changed = replace(second, law=replace(second.law, D=1.01 * second.law.D))
    assert np.abs(law_in_doubles(first, rows) - law_in_doubles(changed, rows)).max() > 1e-3


@pytest.mark.parametrize("case", CASES)
def test_no_admissible_reading_overflows(case):
    """The model raises where 32 bits do not hold; readings stand at the edges of belief, where every sum is largest."""
    fixed = package(case).fixed
    rng = np.random.default_rng(11)
    for s in range(len(fixed.program.stances)):
        model = FixedModel(fixed, s)
        for _ in range(400):
            model.update([int(rng.choice([-1, 1])) * most for most in fixed.believed])
        for sign in (1, -1):
            for _ in range(200):
                model.update([sign * most for most in fixed.believed])


def test_one_place_too_many_overflows():
    """The twin: with three more binary places for the line command the same edges leave 32 bits."""
    fixed = package("quay-gyros").fixed
    terms = tuple(replace(term, shift=term.shift + 3) for term in fixed.line.terms)
    tight = replace(fixed, line=replace(fixed.line, terms=terms))
    rng = np.random.default_rng(11)
    model = FixedModel(tight)

    def storm():
        for _ in range(400):
            model.update([int(rng.choice([-1, 1])) * most for most in fixed.believed])

    with pytest.raises(OverflowError, match="32 bits"):
        storm()


@given(st.integers(-(2**31), 2**31 - 1), st.integers(-NARROW, NARROW))
def test_two_small_products_make_the_large_one(x, gain):
    assert product(x, gain) == (x * gain) >> 16


@given(st.integers(0, 2**30 - 1), st.integers(1, 2**30), st.integers(1, 25))
def test_division_bit_by_bit(part, whole, places):
    part %= whole
    assert ratio(part, whole, places) == (part << places) // whole


def test_the_arctangent_is_good_to_a_millionth():
    """Against the C library's atan; 45 degrees is the end of the range."""
    r = np.linspace(-1.0, 1.0, 4001)
    ours = r * (1.0 + sum(c * r ** (2 * n + 2) for n, c in enumerate(SERIES)))
    assert np.abs(ours - np.arctan(r)).max() < 4e-7
    assert abs(1.0 + sum(SERIES[:-1]) - atan(1.0)) > 1e-3             # the twin: without its last coefficient


@pytest.mark.parametrize(("accel", "tilt", "limited"), [
    ((0.0, 0.0, 9.81), 0.0, False), ((0.0, -9.81 * np.sin(0.2), 9.81 * np.cos(0.2)), 0.2, False),
    ((0.0, 9.81 * np.sin(0.7), 9.81 * np.cos(0.7)), -0.7, False), ((0.0, 0.0, -9.81), radians(45.0), True),
    ((0.0, -9.81, 0.1), radians(45.0), True), ((0.0, 0.0, 0.0), radians(45.0), True)])
def test_tilt_from_three_accelerations(accel, tilt, limited):
    """At rest and leaning by `tilt` outward about the line the specific force is g (cos u − sin w)."""
    case = "bench-rig-sensed"
    program, fixed = package(case).program, package(case).fixed
    _, u, w = (np.array(axis) for axis in program.axes[0])
    force = accel[2] * u + accel[1] * w
    raw = np.concatenate([[0.0], force, np.zeros(3)])
    floats, wholes = FloatModel(program), FixedModel(fixed)
    flags, _ = floats.update(raw.astype(np.float32))
    assert bool(flags & BIT["TILT_LIMITED"]) is limited
    assert floats.last[0] == pytest.approx(tilt, abs=1e-6)
    flags, _ = wholes.update([round(x * 2.0**p) for x, p in zip(raw, fixed.fields, strict=True)])
    assert bool(flags & BIT["TILT_LIMITED"]) is limited
    close = 2e-4 if limited else 1e-4                                   # rad: 16-bit series and axes
    assert wholes.last[0] / 2.0 ** fixed.readings[0] == pytest.approx(tilt, abs=close)


def test_one_refused_reading_is_stood_in_for_and_many_make_it_safe():
    program = package("bench-rig-sensed").program
    good = raw_of(program, 0, np.array([0.01, 0.0, 5.0])).astype(np.float32)
    bad = good.copy()
    bad[2] = np.nan
    model, calm = FloatModel(program), FloatModel(program)
    for _ in range(20):
        model.update(good)
        calm.update(good)
    flags, given = model.update(bad)
    assert flags & BIT["STALE"]
    assert given == calm.update(good)[1]                                # as if the last reading had come again
    assert np.isfinite(np.array(model.memory)).all()                    # nothing of it went into the estimator
    for _ in range(program.patience):
        flags, given = model.update(bad)
    assert flags & BIT["SAFE"]
    assert given == [0.0]
    flags, given = model.update(good)
    assert not flags & (BIT["SAFE"] | BIT["STALE"])
    assert given[0] != 0.0


def test_torque_bounds_do_not_cross_above_the_no_load_speed():
    """Trap of physics: 1.9 times the no-load speed a motor brakes with all it has; intersecting would leave nothing."""
    program = package("bench-rig-pid").program
    window, speed = program.windows[0], replace(package("bench-rig-pid").program.readings[2], most=2000.0)
    model = FloatModel(replace(program, readings=(*program.readings[:2], speed)))
    fast = 1.9 * window.stall / window.slope
    assert fast < speed.most
    flags, given = model.update(np.array([-0.2, -1.0, fast], dtype=np.float32))
    assert flags & BIT["VOLTAGE_SHORT"] or given[0] == pytest.approx(-window.most, rel=1e-6)
    low = min(max(-window.stall - window.slope * fast, -window.most), window.most)
    high = min(max(window.stall - window.slope * fast, -window.most), window.most)
    assert low == high == -window.most


def test_rounding_exported_gains_to_ten_and_thirteen_places():
    """References 15.03 (derived): an edge-balancing cube's sampled gain, largest |z| after rounding."""
    l_b, l_w, m_b, m_w, i_b, i_w, c_b, c_w, g, T = 0.075, 0.085, 0.419, 0.204, 3.34e-3, 0.57e-3, 1.02e-3, 0.05e-3, 9.81, 0.02
    inertia = i_b + m_w * l_w**2
    A = np.array([[0, 1, 0], [(m_b * l_b + m_w * l_w) * g / inertia, -c_b / inertia, c_w / inertia],
                  [-(m_b * l_b + m_w * l_w) * g / inertia, c_b / inertia, -c_w * (inertia + i_w) / (inertia * i_w)]])
    B = np.array([[0.0], [-1 / inertia], [(inertia + i_w) / (inertia * i_w)]])
    from scipy.linalg import expm

    block = expm(T * np.block([[A, B], [np.zeros((1, 4))]]))
    Ad, Bd = block[:3, :3], block[:3, 3:]
    K = np.array([-4.633296, -0.4820459, -0.0210895])
    assert to_places(K[2], 10) == pytest.approx(-0.021484375, rel=1e-9)
    assert to_places(K[2], 13) == pytest.approx(-0.0211181641, rel=3e-9)
    for places, radius in ((60, 0.8288517), (10, 0.8257117), (13, 0.8286081)):
        rounded = np.array([[to_places(k, places) for k in K]])
        assert np.abs(np.linalg.eigvals(Ad - Bd @ rounded)).max() == pytest.approx(radius, rel=1e-5)


def test_coarse_gains_are_refused_and_fine_ones_are_not():
    """The share of the disk margin that rounding may cost; the twin keeps four bits of every gain."""
    case = "bench-rig-pid"
    found = package(case).fixed_cost
    assert too_dear(found) == ""
    assert all(each.cost < SHARE for each in found)

    def coarse(row):
        return replace(row, terms=tuple(replace(t, gains=tuple((g >> 13) << 13 for g in t.gains)) for t in row.terms))

    fixed = package(case).fixed
    rough = replace(fixed, line=coarse(fixed.line), moves=tuple(coarse(r) for r in fixed.moves))
    refused = too_dear(roundings(designs(case), fixed_laws(designs(case), rough)))
    assert "disk margin" in refused or "unstable" in refused


def test_memory_without_a_bound_is_refused_in_words():
    program = package("bench-rig-pid").program
    loose = replace(program, memory=tuple(replace(m, most=np.inf) for m in program.memory))
    with pytest.raises(NoRoomError, match="no bound"):
        scale(loose)


def test_the_reach_of_a_memory_is_met_by_the_worst_readings():
    """The l1 bound of a first-order lag x⁺ = a x + (1 − a) y is the reading's own bound, and bang-bang readings meet it."""
    law = designs("bench-rig-sensed")[0].law
    bounds = np.array([0.7, 60.0, 700.0])
    reach = memory_reach(law, bounds)
    i = law.memory.index("lean_estimate")
    a = law.A[i, i]
    assert reach[i] == pytest.approx((law.B[i] @ bounds) / (1 - a), rel=1e-6)
    x = 0.0
    for _ in range(20000):
        x = a * x + law.B[i] @ bounds
    assert x == pytest.approx(reach[i], rel=1e-6)


def test_one_stance_without_a_law_is_answered_in_words():
    first = designs("quay-gyros")[0]
    with pytest.raises(NotAlikeError, match="cannot act"):
        describe([replace(first, refused="cannot act about this line")], "x")


def test_the_rounded_law_is_the_designed_one_to_the_bits_it_has():
    for case in ("scout-wheels", "quay-gyros"):
        for design, law in zip(designs(case), fixed_laws(designs(case), package(case).fixed), strict=True):
            assert pytest.approx(design.law.D, rel=2e-4, abs=1e-9) == law.D
            sampled = sample_plant(design.plant, law.sample_time, law.latency)
            assert sampled.sample_time == law.sample_time


def test_the_same_design_gives_the_same_files_and_another_does_not():
    from balance.firmware.package import make_package

    again = make_package(designs("bench-rig-pid"), "bench-rig-pid")
    assert again.files == package("bench-rig-pid").files
    changed = [replace(d, law=replace(d.law, D=1.001 * d.law.D)) for d in designs("bench-rig-pid")]
    other = make_package(changed, "bench-rig-pid")
    assert other.program.seal != again.program.seal
    assert not any(str(year) in text for text in (again.files["README.md"], again.files["src/bench_rig_pid.h"])
                   for year in range(2024, 2040))                        # no date


def test_a_changed_file_is_not_written_over(tmp_path):
    files = package("bench-rig-pid").files
    write_folder(files, str(tmp_path))
    write_folder(files, str(tmp_path))                                   # again: nothing stands in the way
    (tmp_path / "src" / "bench_rig_pid.c").write_text("mine\n")
    with pytest.raises(InputError) as caught:
        write_folder(files, str(tmp_path))
    assert "bench_rig_pid.c" in caught.value.problems[0].where
    assert (tmp_path / "src" / "bench_rig_pid.c").read_text() == "mine\n"


def test_manifests_name_files_that_are_there():
    files = package("scout-wheels").files
    listed = json.loads(files["library.json"])
    assert all(f"src/{header}" in files for header in listed["headers"])
    for path in ("CMakeLists.txt", "zephyr/CMakeLists.txt"):
        named = re.findall(r"src/(\w+\.c)", files[path])
        assert named
        assert all(f"src/{name}" in files for name in named)
    assert "includes=scout_wheels.h" in files["library.properties"]


@given(st.integers(-(2**31), 2**31 - 1), st.integers(-NARROW - 1, NARROW))
def test_the_short_way_to_a_product_is_the_same_number(x, gain):
    """What an AVR does: the gain's bits as unsigned, and what that adds taken off again; 32 bits hold every step."""
    part, high = x & 0xFFFF, (x >> 16) * gain
    low = (part * (gain & 0xFFFF)) >> 16
    assert -(2**31) <= high + low < 2**31
    assert (high + low - part if gain < 0 else high + low) == product(x, gain)


def test_a_held_machine_forgets_a_wrong_start_in_the_time_the_guide_states():
    """The estimate of the lean begins at zero; the page says for how long to hold the machine: 1 % is left then."""
    case, lean = "bench-rig-sensed", 0.05
    program, law = package(case).program, designs(case)[0].law
    samples = settling_samples(law)
    assert f"{samples} samples" in package(case).files["README.md"]
    raw = raw_of(program, 0, np.array([lean, 0.0, 0.0])).astype(np.float32)
    model, place = FloatModel(program), law.memory.index("lean_estimate")
    left = []
    for _ in range(samples):
        flags, given = model.update(raw, held=True)
        assert flags & BIT["HELD"]
        assert given == [0.0]
        left.append(abs(model.memory[place] - lean) / lean)
    assert left[-1] == pytest.approx(0.01, rel=0.02)                   # the last sample alone takes 0.3 % of it
    assert left[samples // 2] > 0.05                                    # the twin: half the time is not enough
    assert settling_samples(replace(law, A=np.eye(len(law.memory)))) == 0
