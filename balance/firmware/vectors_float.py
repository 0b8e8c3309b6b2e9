"""The vectors of the float32 variant, answered by its model."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.firmware.float_model import FloatModel
from balance.firmware.program import Program
from balance.firmware.vectors import INIT, REPEAT, REPEATS, RESET, Plan

Words = NDArray[np.uint32]

ODD = (0x7FC00000, 0x7F800000, 0xFF800000, 0x7F7FFFFF, 0xFF7FFFFF, 0x00000001, 0x80000000, 0xFFC12345)
"""Not a number, both infinities, both largest numbers, the smallest one, minus zero, another not-a-number."""


@dataclass(frozen=True)
class Vectors:
    """Everything as 32-bit words, so that not-a-number and the sign of zero survive; (n, fields), (n, units)."""

    readings: Words
    actions: tuple[int, ...]
    stances: tuple[int, ...]
    commands: Words
    flags: tuple[int, ...]
    held: tuple[int, ...]


def float_vectors(program: Program, plan: Plan) -> Vectors:
    """Answer a plan with the float32 model."""
    words = plan.readings.astype(np.float32).view(np.uint32)
    for row, field, which in plan.odd:
        words[row, field] = ODD[which % len(ODD)]
    model, commands, flags = FloatModel(program), [], []
    for row, action, stance, held in zip(words, plan.actions, plan.stances, plan.held, strict=True):
        if action == INIT:
            model.init(stance)
        elif action == RESET:
            model.reset()
        for _ in range(REPEATS if action == REPEAT else 0):
            model.update(row.view(np.float32), bool(held))
        said, given = model.update(row.view(np.float32), bool(held))
        flags.append(said)
        commands.append(np.array(given, dtype=np.float32).view(np.uint32))
    return Vectors(words, plan.actions, plan.stances, np.array(commands), tuple(flags), plan.held)
