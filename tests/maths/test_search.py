"""Roots and peaks against closed forms and a general library."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import brentq

from balance.maths.search import largest_between, root_between


@pytest.mark.parametrize(("f", "a", "b", "root"), [
    (lambda x: x * x - 2.0, 0.0, 3.0, math.sqrt(2.0)), (math.cos, 0.0, 3.0, math.pi / 2),
    (lambda x: math.exp(x) - 1e6, -50.0, 50.0, math.log(1e6)), (lambda x: (x - 1.0) ** 3, -4.0, 2.0, 1.0),
    (lambda x: math.copysign(1.0, x - 0.3), 0.0, 1.0, 0.3), (lambda x: x, -1.0, 0.0, 0.0)])
def test_known_roots(f, a, b, root):
    flat = 1e-4 if root == 1.0 else 1e-11                         # a triple root is flat: (1e-4)³ is rounding
    assert root_between(f, a, b, 1e-12) == pytest.approx(root, abs=flat)
    assert root_between(f, b, a, 1e-12) == pytest.approx(root, abs=flat)


def test_random_functions_against_a_library_and_in_few_steps():
    rng = np.random.default_rng(8)
    steps = 0
    for _ in range(200):
        c = rng.normal(size=4)

        def f(x, c=c):
            nonlocal steps
            steps += 1
            return math.sin(3 * x + c[0]) + c[1] * x + 0.3 * c[2]

        x = np.linspace(-2, 2, 9)
        signs = [f(v) for v in x]
        for k in np.flatnonzero(np.signbit(signs[:-1]) != np.signbit(signs[1:])):
            steps = 0
            ours = root_between(f, x[k], x[k + 1], 1e-12)
            assert steps < 30                                     # bisection alone would take 39
            assert ours == pytest.approx(brentq(f, x[k], x[k + 1], xtol=1e-13), abs=1e-11)


def test_the_top_of_a_hump():
    assert largest_between(lambda x: -(x - 0.7) ** 2 + 5.0, 0.0, 3.0, 1e-9) == pytest.approx(5.0, abs=1e-15)
    assert largest_between(math.sin, 0.0, 3.0, 1e-9) == pytest.approx(1.0, abs=1e-15)
    assert largest_between(lambda x: x, 0.0, 1.0, 1e-9) == pytest.approx(1.0, abs=1e-8)      # at the end
    assert largest_between(math.sin, 0.0, 3.0, 9.0) < 0.99        # the twin: a coarse search misses it
