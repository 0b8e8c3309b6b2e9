"""The short sums against the library's functions."""

from __future__ import annotations

import math

import numpy as np
import pytest

from balance.kernel.series import cosine, cosine_of_turns, logarithm, sine, tilt_of


def worst(ours, theirs, points):
    """Return the largest difference over the points."""
    return max(abs(ours(float(x)) - theirs(float(x))) for x in points)


@pytest.mark.parametrize(("reach", "of_sine", "of_cosine"), [(0.75, 2e-14, 1e-15), (math.pi / 2, 7e-10, 7e-11)])
def test_sine_and_cosine_of_a_lean(reach, of_sine, of_cosine) -> None:
    """Bounds: the first terms left out, x¹⁵/15! and x¹⁶/16!, and rounding."""
    points = np.linspace(-reach, reach, 2001)
    assert worst(sine, math.sin, points) < of_sine
    assert worst(cosine, math.cos, points) < of_cosine
    assert worst(sine, math.sin, [1.5 * reach]) > of_sine           # a bound that anything would keep is none


def test_what_noise_is_made_of() -> None:
    """ln over all a 53-bit uniform number can be, cos 2πu: to a few units of the last place of 1 (ln: of its size)."""
    points = [*np.random.default_rng(5).random(2000), 2.0**-54, 1e-9, 0.5, math.sqrt(0.5), 1.0 - 2.0**-53]
    assert worst(lambda u: logarithm(u) / max(1.0, abs(math.log(u))), lambda u: math.log(u) / max(1.0, abs(math.log(u))),
                 points) < 2e-15
    assert worst(cosine_of_turns, lambda u: math.cos(2.0 * math.pi * u), points) < 4e-15


@pytest.mark.parametrize(("reach", "bound"), [(math.pi / 2, 2e-15), (2.6, 1e-11)])
def test_the_tilt_of_a_force(reach, bound) -> None:
    """The series of arctan after two halvings: below tan(π/8) its first term left out is 1e-17, at 2.6 rad 1e-11."""
    points = np.linspace(-reach, reach, 2001)
    assert worst(lambda a: tilt_of(3.0 * math.sin(a), 3.0 * math.cos(a)), lambda a: a, points) < bound
