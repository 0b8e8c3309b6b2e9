"""The continuous design without sampling, delay or lag: what the same weights would give in an ideal world."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_continuous_are

from balance.design.lqr import weights
from balance.design.margins import BrokenView, margins_of
from balance.design.records import Ideal
from balance.goal.goal import LqrControl
from balance.maths.transfer import respond, triangular
from balance.plant.record import Plant

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


def continuous_lqr(A: Array, B: Array, Q: Array, R: Array) -> Array:
    """Return K (m, n) of ∫(xᵀQx + uᵀRu)dt; raises numpy.linalg.LinAlgError where there is no solution."""
    P = solve_continuous_are(A, B, Q, R)
    return np.asarray(np.linalg.solve(R, B.T @ P), dtype=np.float64)


def ideal_lqr(plant: Plant, control: LqrControl) -> Ideal:
    """Return gains, poles and margins of the ideal loop at the line command."""
    A = plant.model.A - plant.model.B @ plant.levelling
    B = (plant.model.B @ plant.allotment)[:, None]
    Q, R = weights(plant, control)
    K = continuous_lqr(A, B, Q, np.array([[R]]))
    poles = np.linalg.eigvals(A - B @ K).astype(np.complex128)
    return Ideal(K[0], poles, margins_of(continuous_view(A, B[:, 0], K[0])))


def continuous_view(A: Array, b: Array, k: Array) -> BrokenView:
    """Return L(s) = k(sI − A)⁻¹b for `margins_of`; an added delay is judged by phase, exact here."""
    form = triangular(A, b, k)
    closed = np.linalg.eigvals(A - np.outer(b, k))
    speeds = np.abs(np.concatenate([closed, np.linalg.eigvals(A)]))
    speeds = speeds[speeds > 1e-9 * speeds.max()]
    lowest, highest = 1e-4 * float(speeds.min()), 1e4 * float(speeds.max())

    def response(frequencies: Array) -> Complex:
        return respond(form, (1j * frequencies).astype(np.complex128))[:, 0]

    def growth(factor: float, delay: float) -> float:
        if delay == 0.0:
            return float(np.linalg.eigvals(A - factor * np.outer(b, k)).real.max())
        return delay - by_phase

    by_phase = delay_by_phase(response, lowest, highest)
    singular = np.linalg.cond(A) > 1e13
    start = None if singular else float(k @ np.linalg.solve(-A, b))
    marks = tuple(float(abs(p.imag)) for p in closed if p.imag)
    return BrokenView(response, growth, lowest, highest, (start, None), marks)


def delay_by_phase(response: Callable[[Array], Complex], lowest: float, highest: float) -> float:
    """Return the smallest phase / ω over the gain crossovers in s; in continuous time that is the delay margin."""
    w = np.geomspace(lowest, highest, 20000)
    gain = np.log(np.abs(response(w)))
    at = np.flatnonzero(np.signbit(gain[:-1]) != np.signbit(gain[1:]))
    share = gain[at] / (gain[at] - gain[at + 1])
    crossings = np.exp(np.log(w[at]) + share * np.log(w[at + 1] / w[at]))
    phases = np.angle(-response(crossings)) % (2 * np.pi)
    return float(np.min(phases / crossings, initial=np.inf))
