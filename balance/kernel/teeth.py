"""Play in a gear: motor and wheel turn apart between the flanks and push each other where flanks touch."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel.compiled import inlined
from balance.kernel.layout import (
    KIND,
    PARTNER,
    PLAY,
    ROLE,
    TOOTH_DAMPING,
    TOOTH_STIFFNESS,
    TOOTHED,
    WHEEL,
)

Array = NDArray[np.float64]


@inlined
def tooth_torque(gap: float, closing: float, play: float, stiffness: float, damping: float) -> float:
    """Return the torque in N·m on the wheel: a spring and damper beyond ±play/2 that push and never pull.

    `gap`: rad, how far the motor is ahead of the middle, seen at the wheel; `closing`: its rate in rad/s.
    """
    if gap > 0.5 * play:
        return max(stiffness * (gap - 0.5 * play) + damping * closing, 0.0)
    if gap < -0.5 * play:
        return min(stiffness * (gap + 0.5 * play) + damping * closing, 0.0)
    return 0.0


@inlined
def press_teeth(X: Array, units: Array, inputs: Array, slopes: Array) -> None:
    """Put what each toothed wheel and its motor do to each other: equal and opposite, both seen at the wheel."""
    for i in range(units.shape[0]):
        if units[i, KIND] == WHEEL and units[i, ROLE] == TOOTHED:
            motor = int(units[i, PARTNER])
            closing = X[2 + 2 * motor] - X[2 + 2 * i]
            push = tooth_torque(X[3 + 2 * i], closing, units[i, PLAY], units[i, TOOTH_STIFFNESS], units[i, TOOTH_DAMPING])
            inputs[i] = push
            inputs[motor] -= push
            slopes[i] = closing
