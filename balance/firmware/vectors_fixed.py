"""The vectors of the fixed-point variant, answered by its model."""

from __future__ import annotations

import numpy as np

from balance.firmware.fixed_model import FixedModel
from balance.firmware.scaling import Fixed
from balance.firmware.vectors import INIT, REPEAT, REPEATS, RESET, Plan
from balance.firmware.vectors_float import Vectors

MOST, LEAST = 2**31 - 1, -(2**31)


def fixed_vectors(fixed: Fixed, plan: Plan) -> Vectors:
    """Answer a plan with the model in whole numbers."""
    scaled = np.round(plan.readings * 2.0 ** np.array(fixed.fields))
    rows = np.clip(scaled, LEAST, MOST).astype(np.int64)
    for row, field, which in plan.odd:
        edge = fixed.believed[field]
        rows[row, field] = (LEAST, MOST, -MOST, edge + 1, -edge - 1, edge, -edge, 0)[which % 8]
    model, commands, flags = FixedModel(fixed), [], []
    for row, action, stance, held in zip(rows.tolist(), plan.actions, plan.stances, plan.held, strict=True):
        if action == INIT:
            model.init(stance)
        elif action == RESET:
            model.reset()
        for _ in range(REPEATS if action == REPEAT else 0):
            model.update(row, bool(held))
        said, given = model.update(row, bool(held))
        flags.append(said)
        commands.append(given)
    return Vectors(
        (rows % 2**32).astype(np.uint32),
        plan.actions,
        plan.stances,
        (np.array(commands, dtype=np.int64) % 2**32).astype(np.uint32),
        tuple(flags),
        plan.held,
    )
