"""The sampled loop of one law as `margins` wants to see it: broken at the physical torque, or at a sensor."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law
from balance.design.loop import BrokenLoop, SampledPlant, actuator_break
from balance.design.margins import BrokenView
from balance.maths.transfer import respond, triangular

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


def at_actuator(sampled: SampledPlant, law: Law) -> BrokenView:
    """Return the loop broken at the physical torque, the law's memory closed; added delay is re-discretised."""
    return view(actuator_break(sampled, law), lambda d: actuator_break(sampled.with_extra_delay(d), law))


def view(loop: BrokenLoop, late: Callable[[float], BrokenLoop]) -> BrokenView:
    """Return any sampled broken loop for `margins_of`; `late` gives the same loop with an added input delay (s)."""
    form = triangular(loop.A, loop.b, loop.c)

    def growth(factor: float, delay: float) -> float:
        met = late(delay) if delay else loop
        return float(np.abs(np.linalg.eigvals(met.closed(factor))).max()) - 1.0

    def response(frequencies: Array) -> Complex:
        return respond(form, np.exp(1j * frequencies * loop.sample_time))[:, 0]

    return BrokenView(response, growth, *_range(loop), ends=_ends(loop), marks=_marks(loop))


def _range(loop: BrokenLoop) -> tuple[float, float]:
    """Return lowest and highest frequency: well below the slowest closed-loop pole, up to Nyquist (left out itself)."""
    T = loop.sample_time
    top = np.pi / T
    poles = np.linalg.eigvals(loop.closed()).astype(complex)
    slow = np.abs(np.log(poles[poles != 0.0])) / T                       # poles at 0 are pure delay
    slow = slow[slow > 1e-9 * top]
    return float(max(1e-3 * slow.min(initial=top), 1e-7 * top)), float(top * (1.0 - 1e-12))


def _marks(loop: BrokenLoop) -> tuple[float, ...]:
    T = loop.sample_time
    poles = np.concatenate([np.linalg.eigvals(loop.A), np.linalg.eigvals(loop.closed())]).astype(complex)
    poles = poles[np.abs(poles) > 0.3]
    turning = np.abs(np.angle(poles)) / T
    return tuple(float(x) for x in turning[turning > 0.0])


def _ends(loop: BrokenLoop) -> tuple[float | None, float | None]:
    """Return L at z = 1 and z = −1, exactly; None where a pole of the loop stands there."""
    out: list[float | None] = []
    n = len(loop.A)
    for z in (1.0, -1.0):
        M = z * np.eye(n) - loop.A
        singular = np.linalg.cond(M) > 1e13
        out.append(None if singular else float(loop.c @ np.linalg.solve(M, loop.b)))
    return out[0], out[1]
