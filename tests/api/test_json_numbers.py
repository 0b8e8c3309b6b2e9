"""Strict JSON: every float has one way to be written, and none of them is NaN or Infinity."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest

from balance.api.json_numbers import complexes, matrix, number, row


@pytest.mark.parametrize(
    ("value", "written"),
    [(math.nan, "null"), (math.inf, '"inf"'), (-math.inf, '"-inf"'), (-0.0, "0.0"), (1.5, "1.5"), (np.float64(2), "2.0")],
)
def test_each_kind_of_number(value: float, written: str) -> None:
    assert json.dumps(number(value), allow_nan=False) == written


def test_rows_matrices_and_complex_numbers() -> None:
    assert row(np.array([1.0, np.nan])) == [1.0, None]
    assert matrix(np.array([[1.0, 2.0], [3.0, np.inf]])) == [[1.0, 2.0], [3.0, "inf"]]
    assert complexes([complex(1, -2)]) == [{"re": 1.0, "im": -2.0}]
