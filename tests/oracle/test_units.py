"""15.02: unit conversions. Exact definitions of NIST SP 811 / BIPM; a supplier's table (read) for three of them."""

from __future__ import annotations

import pytest

from balance.base.units import to_si


@pytest.mark.parametrize(("text", "dimension", "value"), [
    ("1 kgf*cm", "torque", 0.0980665), ("1 ozf*in", "torque", 0.00706155181), ("1 lbf*in", "torque", 0.112984829),
    ("1 lbf*ft", "torque", 1.35581795), ("1 gf*cm", "torque", 9.80665e-05), ("1 oz*in^2", "inertia", 1.82899783e-05),
    ("1 lb*ft^2", "inertia", 0.0421401101), ("1 ozf*in*s^2", "inertia", 0.00706155181),
    ("1 rpm", "angular speed", 0.104719755), ("1 g*cm^2", "inertia", 1e-7)])
def test_conversions(text, dimension, value):
    assert to_si(text, dimension) == pytest.approx(value, rel=1e-8)


def test_ways_back():
    """1 N·m = 141.611932 ozf·in = 8.85074579 lbf·in; 1 kg·m² = 54674.7504 oz·in²."""
    assert 1 / to_si("1 ozf*in", "torque") == pytest.approx(141.611932, rel=1e-8)
    assert 1 / to_si("1 lbf*in", "torque") == pytest.approx(8.85074579, rel=1e-8)
    assert 1 / to_si("1 oz*in^2", "inertia") == pytest.approx(54674.7504, rel=1e-8)


def test_the_trap_of_the_suppliers_table():
    """oz·in² and ozf·in·s² differ by 386.1 (standard gravity in in/s²); the table read mislabels one as the other."""
    ratio = to_si("1 ozf*in*s^2", "inertia") / to_si("1 oz*in^2", "inertia")
    assert ratio == pytest.approx(9.80665 / 0.0254, rel=1e-9)


def test_torque_constant_from_speed_constant():
    """12.01: 285 rpm/V and 33.5 mN·m/A are one motor (thesis README and firmware header, read)."""
    assert to_si("285 rpm/V", "torque constant") == pytest.approx(0.0335, rel=5e-4)
    assert to_si("33.5 mN*m/A", "torque constant") == pytest.approx(0.0335, rel=1e-12)
    assert to_si("0.0335 V*s/rad", "torque constant") == pytest.approx(0.0335, rel=1e-12)
    per = to_si("1 ozf*in/A", "torque constant") * 1.3524
    assert per == pytest.approx(to_si("1 V/rpm", "torque constant") / 1000, rel=1e-4)      # oz·in/A per V/krpm
