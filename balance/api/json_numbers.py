"""Numbers as strict JSON: no NaN and no Infinity, which JSON does not have.

A value that is not defined (NaN) is `null`; one without bound is the string `"inf"` or `"-inf"`;
a complex number is `{"re": …, "im": …}`.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

Number = float | str | None
Tree = dict[str, object]


def number(value: float) -> Number:
    """Write one number: `null` for NaN, `"inf"` or `"-inf"` for what has no bound."""
    if math.isnan(value):
        return None
    if math.isinf(value):
        return "inf" if value > 0 else "-inf"
    return float(value) + 0.0  # turns -0.0 into 0.0


def row(values: Iterable[float]) -> list[Number]:
    """Write a row of numbers."""
    return [number(float(v)) for v in values]


def matrix(values: NDArray[np.float64]) -> list[list[Number]]:
    """Write a matrix, shape (n, m), as a list of its rows."""
    return [row(line) for line in values]


def complexes(values: Iterable[complex]) -> list[dict[str, Number]]:
    """Write complex numbers as pairs of real and imaginary part."""
    return [{"re": number(v.real), "im": number(v.imag)} for v in values]
