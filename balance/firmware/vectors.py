"""Test vectors: readings of every kind a controller meets, and what the arithmetic must answer.

Ordinary motion, both saturations, tilt past where it is held, refusals, numbers that are none, resets, every stance.
The readings are drawn with a fixed seed; the answers come from the Python model of the arithmetic.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.firmware.fields import fields_of
from balance.firmware.program import Program

Array = NDArray[np.float64]

UPDATE, RESET, INIT, REPEAT = 0, 1, 2, 3
"""What is done before the reading of a vector is given; INIT goes to the next stance, REPEAT gives it REPEATS times more."""

REPEATS = 254
"""With these a counter of refusals that wraps at eight bits is back where the last good reading still stands in."""

HELD = (2, 3, 4)
"""Samples of each part in which the machine is held."""

PER_PART = 24
"""Samples of each part of the sequence."""


@dataclass(frozen=True)
class Plan:
    """Readings in SI, (n, fields); what is done before each; odd ones are put in by the variant (see `odd`)."""

    readings: Array
    actions: tuple[int, ...]
    stances: tuple[int, ...]
    odd: tuple[tuple[int, int, int], ...]  # (row, field, which odd number)
    held: tuple[int, ...]


def plan_vectors(program: Program, least: int = 512, seed: int = 7) -> Plan:
    """Return at least `least` vectors; the same on every machine."""
    rng = np.random.default_rng(seed)
    parts: list[Callable[[np.random.Generator, Program, int], Array]] = [_calm, _outward, _inward, _wild, _calm]
    rows: list[Array] = []
    actions: list[int] = []
    stances: list[int] = []
    odd: list[tuple[int, int, int]] = []
    stance = 0
    while sum(len(r) for r in rows) < least:
        for k, part in enumerate(parts):
            block = part(rng, program, PER_PART)
            first = sum(len(r) for r in rows)
            rows.append(block)
            actions += [INIT if k == 0 else RESET if k == 2 else UPDATE] + [UPDATE] * (PER_PART - 1)
            stances += [stance] * PER_PART
            if k == 3:
                odd += [
                    (first + int(i), int(rng.integers(block.shape[1])), int(n))
                    for n, i in enumerate(rng.choice(PER_PART, 8, replace=False))
                ]
            if k == 4:  # a long spell of refusals, past the patience, and back
                spell = min(program.patience + 2, PER_PART - 4)
                odd += [(first + 1 + i, 0, 0) for i in range(spell)]
                actions[first + spell] = REPEAT
        stance = (stance + 1) % len(program.stances)
    held = tuple(int(i % PER_PART in HELD) for i in range(len(actions)))
    return Plan(np.vstack(rows), tuple(actions), tuple(stances), tuple(odd), held)


def _motion(rng: np.random.Generator, program: Program, n: int, lean: float, rate: float, spread: float = 0.6) -> Array:
    """Return (n, fields) of readings around a lean and a lean rate, wheels and gimbals anywhere within belief."""
    columns, e, g = [], np.array(program.axes[0]), program.gravity
    leans = lean + 0.2 * abs(lean) * rng.standard_normal(n) + 1e-3 * rng.standard_normal(n)
    rates = rate + 0.05 * rng.standard_normal(n)
    for field in fields_of(program):
        if field.name == "lean_rad":
            columns.append(leans)
        elif field.name == "lean_rate_rad_s":
            columns.append(rates)
        elif field.name.startswith("accel"):
            axis = "xyz".index(field.name[6])
            force = np.cos(leans) * g * e[1, axis] - np.sin(leans) * g * e[2, axis]
            columns.append(force + 0.05 * rng.standard_normal(n))
        elif field.name.startswith("gyro"):
            axis = "xyz".index(field.name[5])
            columns.append(rates * e[0, axis] + 0.02 * rng.standard_normal(n))
        else:
            columns.append(spread * field.most * np.sin(np.linspace(0.0, 3.0, n) + rng.uniform(0.0, 6.0)))
    return np.column_stack(columns)


def _calm(rng: np.random.Generator, program: Program, n: int) -> Array:
    return _motion(rng, program, n, 0.002, 0.0, 0.02)


def _outward(rng: np.random.Generator, program: Program, n: int) -> Array:
    return _motion(rng, program, n, 0.3, 1.0)


def _inward(rng: np.random.Generator, program: Program, n: int) -> Array:
    return _motion(rng, program, n, -0.3, -1.0)


def _wild(rng: np.random.Generator, program: Program, n: int) -> Array:
    """Anything within belief and a little beyond it: upside down, spinning, refused."""
    most = np.array([field.most for field in fields_of(program)])
    return np.asarray(rng.uniform(-1.02, 1.02, (n, len(most))) * most)
