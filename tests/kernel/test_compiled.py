"""Parts and entries: the same arithmetic whichever way a function is reached, and one optimisation for all."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from balance.kernel.compiled import entry, inlined, part
from balance.kernel.sensing import digitised, normal

ROOT = Path(__file__).resolve().parents[2]


@inlined
def doubled(values: np.ndarray, i: int) -> float:
    return 2.0 * values[i]


@part
def total_of(values: np.ndarray) -> float:
    total = 0.0
    for i in range(values.size):
        total += doubled(values, i)
    return total


@entry
def twice_the_total(values: np.ndarray) -> float:
    return 2.0 * total_of(values)


def test_an_entry_runs_its_parts() -> None:
    """Whole numbers: exact in doubles."""
    assert twice_the_total(np.array([1.0, 2.0, 4.0])) == 28.0


def test_a_part_that_python_calls_gives_the_bits_that_compiled_code_gets() -> None:
    values = np.array([0.1, 0.2, 0.7])
    assert 2.0 * total_of(values) == twice_the_total(values)
    assert total_of(values) != total_of(values + 1e-15)                # bits are what is compared


def test_a_part_is_what_its_python_says() -> None:
    """The same operations in the same order; the logarithm's last bit may differ between libraries: 4 units of it."""
    for sample in range(20):
        assert normal(7, sample, 1) == pytest.approx(normal.py_func(7, sample, 1), rel=4 * np.finfo(float).eps)
    assert digitised(0.26, 0.1, 1.0) == digitised.py_func(0.26, 0.1, 1.0) != digitised(0.26, 0.2, 1.0)


def test_an_array_made_in_compiled_code_is_refused() -> None:
    """Without counting of references it would never be freed."""
    @entry
    def makes_one(n: int) -> float:
        return np.zeros(n)[0]

    with pytest.raises(Exception, match="Only accept returning of array passed into the function"):
        makes_one(3)


def test_only_entries_are_kept_on_disk(tmp_path) -> None:
    """A later run loads one file per entry. Run in a process and a folder of its own."""
    code = ("import numpy as np; from balance.kernel.integrate import longest_step;"
            "from balance.kernel.layout import UNIT_SIZE; print(longest_step(np.zeros((1, UNIT_SIZE))))")
    there = {**os.environ, "NUMBA_CACHE_DIR": str(tmp_path), "PYTHONPATH": str(ROOT)}
    words = [sys.executable, "-c", code]
    answers = [subprocess.run(words, env=there, check=True, capture_output=True).stdout for _ in range(2)]
    kept = [file.name.split("-")[0] for file in tmp_path.rglob("*.nbc")]
    assert kept == ["integrate.longest_step"]
    assert answers[0] == answers[1] != b""
