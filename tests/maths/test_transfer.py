"""Frequency responses by back-substitution: the same as solving, one triple at a time or many of one size together."""

from __future__ import annotations

import numpy as np

from balance.maths.transfer import respond, respond_each, triangular

ROUNDING = 1e-11
"""Relative: a unitary change of basis and a solve of order 7."""


def triples(count: int, n: int) -> list[tuple[np.ndarray, np.ndarray, np.ndarray]]:
    rng = np.random.default_rng(1)
    return [(rng.normal(size=(n, n)) / n, rng.normal(size=n), rng.normal(size=n)) for _ in range(count)]


def test_each_is_what_solving_gives() -> None:
    points = np.exp(1j * np.linspace(0.01, 3.1, 40))
    found = respond_each([triangular(*one) for one in triples(5, 7)], points)
    assert found.shape == (5, 40)
    for (A, b, c), row in zip(triples(5, 7), found, strict=True):
        alone = respond(triangular(A, b, c), points)[:, 0]
        solved = np.array([c @ np.linalg.solve(z * np.eye(7) - A, b) for z in points])
        assert np.allclose(row, solved, rtol=ROUNDING)
        assert np.allclose(row, alone, rtol=ROUNDING)
    assert not np.allclose(found[0], found[1], rtol=ROUNDING), "each has its own"


def test_a_point_on_a_pole_is_endless_in_its_own_row_only() -> None:
    forms = [triangular(np.diag([pole, 0.2]), np.ones(2), np.ones(2)) for pole in (0.5, 0.3)]
    found = respond_each(forms, np.array([0.5 + 0j]))
    assert not np.isfinite(found[0, 0])
    assert np.isfinite(found[1, 0])
