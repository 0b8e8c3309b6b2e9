"""What a trial changes of the body itself: loads put on or taken off, ground that gives way, a moved centre of mass."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from balance.goal.trials import OffsetShift, Payload, Slope
from balance.kernel import outcome
from balance.kernel.layout import (
    BODY_SIZE,
    FOOT_RADIUS,
    GRAVITY,
    GRAVITY_ALONG,
    GROUND_RISES,
    HEIGHT,
    INERTIA,
    LANDS_OUTWARD,
    MASS,
    OFFSET,
    STIFF_COS,
    STIFF_SIN,
    TOUCH_DOWN,
)

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Change:
    """One sudden change and its side: +1 outward, -1 inward."""

    part: OffsetShift | Payload | Slope
    side: float


def body_rows(body: Array, changes: Sequence[Change]) -> tuple[Array, Array]:
    """Return (the kernel's rows of body changes by time, the body after all of them).

    A moved centre of mass makes no row (it stands among the kernel's jumps) but counts for what comes after it.
    """
    rows, now = [], body
    for change in sorted(changes, key=lambda c: (c.part.at, not isinstance(c.part, OffsetShift))):
        then = _after(now, change)
        if not isinstance(change.part, OffsetShift):
            # an angle of touch-down that is inf stays so
            less = np.subtract(then, now, out=np.zeros(BODY_SIZE), where=np.isfinite(now))
            comes = less[INERTIA] if isinstance(change.part, Payload) and change.part.mass > 0.0 else 0.0
            rows.append([change.part.at, comes, *less])
        now = then
    return np.array(rows, dtype=float).reshape(-1, outcome.CHANGED + BODY_SIZE), now


def with_tables(body: Array, rows: Sequence[Sequence[float]]) -> Array:
    """Return the body with the last values of what varies over time."""
    out = body.copy()
    for row in rows:
        out[INERTIA] += row[outcome.OF_INERTIA]
        out[STIFF_SIN] += row[outcome.OF_STIFF_SIN]
        out[STIFF_COS] += row[outcome.OF_STIFF_COS]
    return out


def _after(body: Array, change: Change) -> Array:
    """Return the body after one change."""
    if isinstance(change.part, Payload):
        return _loaded(body, change.part, change.side)
    if isinstance(change.part, Slope):
        return _sloped(body, change.part, change.side)
    out = body.copy()
    out[OFFSET] += change.side * change.part.shift
    out[STIFF_COS] += body[MASS] * body[GRAVITY] * change.side * change.part.shift
    return out


def _loaded(body: Array, load: Payload, side: float) -> Array:
    """A point of mass m_l at (h_l, d_l) from the line: m + m_l, J + m_l (h_l² + d_l²), m g h and m g δ add up."""
    out, across = body.copy(), side * load.across
    out[MASS] = body[MASS] + load.mass
    out[INERTIA] = body[INERTIA] + load.mass * (load.height**2 + across**2)
    out[HEIGHT] = (body[MASS] * body[HEIGHT] + load.mass * load.height) / out[MASS]
    out[OFFSET] = (body[MASS] * body[OFFSET] + load.mass * across) / out[MASS]
    out[STIFF_SIN] = body[STIFF_SIN] + load.mass * body[GRAVITY] * load.height
    out[STIFF_COS] = body[STIFF_COS] + load.mass * body[GRAVITY] * across
    return out


def _sloped(body: Array, slope: Slope, side: float) -> Array:
    """Along: g cos β and g sin β of the new β. Across by σ: balls on a slope carry −m g r sin σ, touch-down moves by σ.

    What the slope changes of a rolling body's inertia is left out: of the order r σ²/h of it.
    """
    out, rises = body.copy(), side * slope.across
    old = math.atan2(-body[GRAVITY_ALONG], body[GRAVITY])
    new, whole = old + slope.along, math.hypot(body[GRAVITY], body[GRAVITY_ALONG])
    share = math.cos(new) / math.cos(old)
    out[GRAVITY], out[GRAVITY_ALONG] = whole * math.cos(new), -whole * math.sin(new)
    out[STIFF_SIN] = body[STIFF_SIN] * share
    out[STIFF_COS] = body[STIFF_COS] * share - out[MASS] * out[GRAVITY] * body[FOOT_RADIUS] * math.sin(rises)
    out[GROUND_RISES] = body[GROUND_RISES] + rises
    out[TOUCH_DOWN], out[LANDS_OUTWARD] = body[TOUCH_DOWN] + rises, body[LANDS_OUTWARD] - rises
    return out
