"""Complementary filter: the gyro tells fast changes of lean, the accelerometer the slow ones; put before any law.

    e = a (e₋ + T gyro) + (1 − a) tilt,   a = e^{−ω_c T}

Above the crossover ω_c the estimate integrates the gyro, below it follows the tilt; a gyro bias b leaves an error of
about b/ω_c.  The accelerometer's tilt lies while the body accelerates (trap 8), so the loop with the filter in it is what
the margins are measured on.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from balance.design.law import Law

ESTIMATE = "lean_estimate"
"""Name of the filter's place in the law's memory."""


def complementary(law: Law, crossover: float) -> Law:
    """Return the same law behind the filter: it reads `tilt` and `gyro` in place of lean and lean rate.

    `crossover` in Hz.  The memory grows by `lean_estimate`; gains and limits stay.
    """
    T = law.sample_time
    a = float(np.exp(-2.0 * np.pi * crossover * T))
    lean, rate = law.measurements.index("lean"), law.measurements.index("lean_rate")
    m, k = len(law.measurements), len(law.memory)
    F = np.eye(m)                                                        # filtered measurements from raw ones
    F[lean] = 0.0
    F[lean, lean], F[lean, rate] = 1.0 - a, a * T                        # tilt stands in lean's place, gyro in rate's
    f = np.zeros(m)
    f[lean] = a                                                          # and from the estimate before
    A = np.block([[law.A, (law.B @ f)[:, None]], [np.zeros((1, k)), np.array([[a]])]])
    names = {"lean": "tilt", "lean_rate": "gyro"}
    return replace(
        law, measurements=tuple(names.get(name, name) for name in law.measurements),
        memory=(*law.memory, ESTIMATE), A=A, B=np.vstack([law.B @ F, F[lean]]), E=np.append(law.E, 0.0),
        C=np.append(law.C, law.D @ f), D=law.D @ F)
