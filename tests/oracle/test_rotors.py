"""Rotor strength, energy and balance against published values (references 10.02 to 10.05)."""

from math import log, pi, sqrt

import numpy as np
import pytest

from balance.maths import discs
from balance.maths.unbalance import offset_allowed, residual

RPM = pi / 30.0
STEEL = (7800.0, 0.3)
B = 0.25
W = 6900 * RPM


def solid(density, poisson, outer=B, bore=0.0):
    return discs.stresses(np.array([bore, outer]), np.array([0.02]), density, poisson)


def test_disc_ring_and_uniform_strength():
    """10.02: Ugural & Fenster example 8.6 (read: uniform strength); Timoshenko & Goodier (from memory)."""
    found = solid(*STEEL)
    scale = W**2 / 1e6
    assert found.hoop[0] * scale == pytest.approx(104.9915, rel=1e-5)
    assert found.hoop[-1] * scale == pytest.approx(44.5418, rel=1e-5)
    assert discs.mean_hoop(np.array([0.0, B]), np.array([1.0]), STEEL[0]) * scale == pytest.approx(84.8416, rel=1e-5)
    thin = solid(*STEEL, bore=B * (1 - 1e-7))
    assert thin.hoop[0] * scale == pytest.approx(254.525, rel=1e-5)
    stress = STEEL[0] * W**2 * B**2 / (2 * log(5))
    assert stress / 1e6 == pytest.approx(79.07, rel=1e-4)
    # the same disc by our own solution: no ring may differ from σ; 400 rings with the rim loaded as by a shrunk-on ring
    edges, heights = discs.cut(lambda r: discs.uniform_strength(STEEL[0], W, stress, r), 0.0, B)
    ours = discs.stresses(edges, heights, *STEEL, rim_load=stress / W**2)
    # half the largest step of thickness from ring to ring, k r dr = 0.4 %
    assert ours.hoop * W**2 == pytest.approx(np.full(ours.hoop.shape, stress), rel=4.2e-3)
    assert -log(discs.uniform_strength(STEEL[0], W, stress, 1.0)) == pytest.approx(25.75, rel=1e-4)
    flat = discs.stresses(edges, np.ones(len(heights)), *STEEL, rim_load=stress / W**2)    # twin: a flat disc is not uniform
    assert flat.hoop.max() / flat.hoop.min() > 1.2


@pytest.mark.parametrize(("bore", "factor", "within"), [
    (1 - 1e-9, 0.5, 1e-6), (0.0, 0.606061, 1e-5), (1e-7, 0.30303, 1e-5), (0.2, 0.3125, 1e-9), (0.5, 0.359712, 1e-5),
    (0.9, 0.468063, 1e-5)])
def test_shape_factor(bore, factor, within):
    """10.03: K = (E/m) ρ/σ_max; Genta, "Kinetic Energy Storage", 1985 (roundings from memory)."""
    edges = np.array([bore, 1.0])
    mass, inertia = discs.inertia(edges, np.ones(1), 1.0)
    assert 0.5 * inertia / mass / discs.stresses(edges, np.ones(1), 1.0, 0.3).peak == pytest.approx(factor, rel=within)


def test_worked_flywheels():
    """10.04: Jindal 19-5 and Khurmi ch. 3 (read in stored companions); burst of a cast-iron disc (strength read)."""
    speed = 250 * RPM
    swing = 2.25 * pi * 125 / 2
    need = swing / (0.1 * speed**2)
    assert need == pytest.approx(6.446, rel=1e-3)
    radius = (2 * need / (pi * 7800 * 0.03)) ** 0.25
    assert radius == pytest.approx(0.364, rel=1e-3)
    assert discs.inertia(np.array([0.0, radius]), np.array([0.03]), 7800)[1] == pytest.approx(need, rel=1e-12)
    assert solid(7800, 0.3, radius).peak * speed**2 / 1e6 == pytest.approx(0.292, rel=1e-3)
    inch, ksi = 0.0254, 6.894757e6
    mass_density = 0.26 * 0.45359237 / inch**3 * (9.80665 / inch / 386.4)      # the source's g: 386.4 in/s²
    iron = solid(mass_density, 0.211, 6 * inch, 0.5 * inch)
    assert discs.speed_at(iron.peak, 31 * ksi) / RPM == pytest.approx(12046.8, rel=1e-4)
    assert 0.5 * discs.inertia(np.array([0.0, 0.15]), np.array([5 / (pi * 0.15**2)]), 1.0)[1] * (3000 * RPM) ** 2 \
        == pytest.approx(2775.83, rel=1e-5)
    after = sqrt((240 * RPM) ** 2 - 2 * 6e3 / 140)
    assert 240 - after / RPM == pytest.approx(16.877, rel=1e-4)


@pytest.mark.parametrize(("grade", "rpm", "microns"), [
    (6.3, 10000, 6.0161), (6.3, 3000, 20.0535), (6.3, 950, 63.3269), (2.5, 3000, 7.95775), (2.5, 6000, 3.97887)])
def test_permissible_offset(grade, rpm, microns):
    """10.05: ISO 1940-1 / 21940-11, e = G/ω (definition, read)."""
    assert 1e6 * offset_allowed(grade * 1e-3, rpm * RPM) == pytest.approx(microns, rel=1e-4)


def test_permissible_unbalance():
    """10.05: 2 kg at 10000 rpm, G6.3: 12 g·mm (read on a tool-holder maker's page); 6.015 G W/N in oz·in, W in lb (read)."""
    assert 1e6 * residual(6.3e-3, 10000 * RPM, 2.0) == pytest.approx(12.03, rel=1e-3)
    ounce_inch = 0.45359237 / 16 * 0.0254
    assert residual(1e-3, RPM, 0.45359237) / ounce_inch == pytest.approx(6.015, rel=1e-4)
