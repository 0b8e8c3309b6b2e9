"""Quantities: what is read, what is refused and why, and that no odd text hangs or crashes the guard."""

from __future__ import annotations

import math
import time

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from balance.base.dimensions import DIMENSIONS
from balance.base.units import UnitError, factor_of, to_si


@pytest.mark.parametrize(("text", "dimension", "value"), [
    ("120 mm", "length", 0.12), ("0.35 Nm", "torque", 0.35), ("20 kgf*cm", "torque", 20 * 0.0980665),
    ("4500 rpm", "angular speed", 4500 * math.pi / 30), ("900 g*cm^2", "inertia", 9e-5),
    ("30 mN*m/A", "torque constant", 0.03),
    ("0.005 deg/s/sqrt(Hz)", "gyro noise", math.radians(0.005)), ("120 ug/sqrt(Hz)", "acceleration noise", 120e-6 * 9.80665),
    ("24 V", "voltage", 24.0), ("2 ms", "time", 0.002), ("3 deg", "angle", math.radians(3)),
    ("1e-3 kg*m^2", "inertia", 1e-3),
    ("12 N*m", "angular stiffness", 12.0), ("12 N*m/rad", "angular stiffness", 12.0), ("5000 mAh", "charge", 18000.0),
    ("-2.5 mm", "length", -0.0025), ("300 µH", "inductance", 3e-4)])
def test_what_is_read(text, dimension, value):
    assert to_si(text, dimension) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize("dimension", list(DIMENSIONS))
def test_every_dimension_reads_its_own_example(dimension):
    assert math.isfinite(to_si(DIMENSIONS[dimension].example, dimension))


@pytest.mark.parametrize(("text", "dimension", "says"), [
    ("120", "length", "add the unit, as in `120 m"), ("0.4 olm", "resistance", "nearest known: `ohm`"),
    ("50 Hz", "angular speed", "3000 rpm"), ("3000 rpm", "frequency", "50 Hz"), ("2 kg", "length", "a length"),
    ("1,5 mm", "length", "write the decimal point as `.`"), ("20 kg*cm", "torque", "kgf"),
    ("9**9**9 m", "length", "a length"),
    ("1e999 m", "length", "too large"), ("mm", "length", "begin with a number"), ("nan m", "length", "begin with a number"),
    ("1 m" + " " * 200, "length", "at most")])
def test_what_is_refused_and_why(text, dimension, says):
    with pytest.raises(UnitError) as caught:
        to_si(text, dimension)
    assert says in f"{caught.value.allowed} {caught.value.hint} {caught.value.given}"


@settings(max_examples=400, deadline=None)
@given(st.one_of(st.text(max_size=120), st.from_regex(r"-?[0-9]{1,6}(\.[0-9]+)?(e[0-9]{1,4})? [a-zA-Zµ°Ω*/^()0-9.-]{0,40}",
                                                      fullmatch=True)), st.sampled_from(list(DIMENSIONS)))
@example("9**9**9**9 m", "length")
@example("1 m^999999999", "length")
@example("1 " + "(" * 70, "length")
@example("1 sqrt(sqrt(sqrt(m)))", "length")
@example("1 m/0", "length")
@example("٣ m", "length")
def test_odd_text_neither_hangs_nor_crashes(text, dimension):
    """A value or one clear refusal, at once: a hang would take far longer than the second allowed here."""
    begun = time.monotonic()
    try:
        told = str(to_si(text, dimension))
    except UnitError as error:
        told = error.allowed
    assert told not in ("", "inf", "-inf", "nan")
    assert time.monotonic() - begun < 1.0


def test_factor_of_is_the_way_back():
    assert 0.12 / factor_of("mm") == pytest.approx(120.0)
