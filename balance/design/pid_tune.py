"""PID gains by search: the largest integral gain whose sampled, delayed, noisy loop keeps every limit.

A step torque d on the lean loop alone leaves ∫e dt = d/ki, so the integrated lean is least where ki is largest; the
limits (peak sensitivity, delay and other margins, actuator noise) are constraints.  The idea is that of Panagopoulos,
Åström and Hägglund,
"Design of PID controllers based on constrained optimisation", IEE Proc. Control Theory 149 (2002) 32-40 (from
memory); there a continuous process and two constraints, here the exact sampled loop with delay, lags and estimator.

The loop is linear in (kp, ki, kd), so a grid of candidates costs one matrix product; it is refined around its best point
until the ranges are some percent wide.  No random numbers, no starting guess.  Coordinates (all dimensionless or 1/s) ::

    kp = G + J ω²,   kd = 2 ζ J ω,   ki = ρ J ω³        a double integrator's PID of bandwidth ω around the falling stiffness
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balance.design.pid_form import Actuation, PidForm, error_row, loop_terms, pid_law
from balance.design.pid_screen import Wanted, violation
from balance.design.sensed import Sensed
from balance.plant.record import Plant

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]

POINTS = 140
FIRST = (12, 8, 10)
REFINE = (7, 7, 7)
ROUNDS = 4
SPAN = ((0.3, 40.0), (0.35, 4.0), (2e-3, 1.0))     # ω/p (cut at the sampling), ζ, ρ


@dataclass(frozen=True)
class Bench:
    """Everything about one loop that does not depend on kp, ki, kd."""

    plant: Plant
    sensed: Sensed
    act: Actuation
    frequency: Array     # (f,) rad/s
    z: Complex           # (f,)
    terms: Complex       # (4, f) parts of L
    torque: Complex      # (3, f, k) parts of the wanted torque per sensor noise, loop open
    weight: Array        # (f,) share of white noise power each point stands for


def prepare(plant: Plant, sensed: Sensed, form: PidForm, act: Actuation) -> Bench:
    """Sweep the open loop once for this momentum gain and filter."""
    T = sensed.sample_time
    low = 0.02 * min(plant.pole, form.momentum * plant.stiffness or plant.pole)
    frequency = np.geomspace(low, np.pi / T, POINTS)
    z = np.exp(1j * frequency * T)
    z[-1] = -1.0
    by_command, by_noise = sensed.response(z)                            # (f, n), (f, n, k)
    terms = loop_terms(plant, form, act, z, by_command, T)
    a = np.exp(-form.filter * T)
    error = np.einsum("n,fnk->fk", error_row(plant, form.momentum), by_noise)
    torque = np.stack([error, error * (T * z / (z - 1))[:, None],
                       by_noise[:, 1, :] * ((1 - a) * z / (z - a))[:, None]])
    edges = np.concatenate([[0.0], np.sqrt(frequency[1:] * frequency[:-1]), [np.pi / T]])
    return Bench(plant, sensed, act, frequency, z, terms, torque, np.diff(edges) * T / np.pi)


def search(bench: Bench, form: PidForm, wanted: Wanted, damping: float) -> tuple[PidForm | None, float]:
    """Return the best form found whose modes all have at least this damping ratio, and its violation.

    Violation ≤ 0: every limit is kept; None where no candidate is stable and damped.
    """
    p, T = bench.plant.pole, bench.sensed.sample_time
    (low, high), damping_span, integral_span = SPAN
    box = np.log(np.array([[low * p, max(min(high * p, 1.0 / T), 2 * low * p)], damping_span, integral_span]))
    best, best_score, best_over = None, -np.inf, np.inf
    for turn in range(1 + ROUNDS):
        grid = _grid(box, REFINE if turn else FIRST)
        gains = _gains(bench.plant, np.exp(grid))                        # (c, 3)
        over = violation(*_loop_and_noise(bench, gains), wanted)
        score = np.where(over <= 0, np.log(gains[:, 1]), -1e3 - over)
        found = _first_damped(bench, form, gains, score, best_score, damping)
        if found is not None:
            kp, ki, kd = (float(x) for x in gains[found])
            best, best_score, best_over = replace(form, kp=kp, ki=ki, kd=kd), score[found], over[found]
            centre = grid[found]
        elif best is None:
            return None, np.inf
        width = (box[:, 1] - box[:, 0]) / (FIRST if turn == 0 else REFINE)
        box = np.stack([centre - width, centre + width], axis=1)
    return best, float(best_over)


def _grid(box: Array, counts: tuple[int, int, int]) -> Array:
    axes = [np.linspace(low, high, count) for (low, high), count in zip(box, counts, strict=True)]
    return np.stack(np.meshgrid(*axes, indexing="ij"), axis=-1).reshape(-1, 3)


def _gains(plant: Plant, shape: Array) -> Array:
    """Return (c, 3) kp, ki, kd of the coordinates (c, 3) ω, ζ, ρ."""
    J, G = plant.inertia_free, plant.stiffness
    omega, zeta, rho = shape.T
    return np.stack([G + J * omega**2, rho * J * omega**3, 2 * zeta * J * omega], axis=1)


def _loop_and_noise(bench: Bench, gains: Array) -> tuple[Complex, Array, Array]:
    """Return L (c, f), the frequencies, and the RMS torque (c,) that the sensors' noise asks for."""
    loop = gains @ bench.terms[:3] + bench.terms[3]
    weight = bench.weight / np.abs(1 + loop) ** 2                        # (c, f)
    power = np.zeros(len(gains))
    for k, sigma in enumerate(bench.sensed.sigma):
        power += sigma**2 * np.sum(np.abs(gains @ bench.torque[:, :, k]) ** 2 * weight, axis=1)
    return loop, bench.frequency, np.sqrt(power)


def _first_damped(bench: Bench, form: PidForm, gains: Array, score: Array, floor: float, damping: float) -> int | None:
    """Return the best-scored candidate that beats `floor` and has every mode of every state damped enough.

    A badly damped mode is a resonance narrower than the frequency grid, so this also keeps the screen honest.
    """
    for i in np.argsort(-score, kind="stable"):
        if score[i] <= floor:
            return None
        kp, ki, kd = (float(x) for x in gains[i])
        if least_damping(closed_poles(bench, replace(form, kp=kp, ki=ki, kd=kd)), bench.sensed.sample_time) >= damping:
            return int(i)
    return None


def closed_poles(bench: Bench, form: PidForm) -> Complex:
    """Return the eigenvalues of the closed loop, all states of plant, estimator and law."""
    law = pid_law(bench.plant, form, bench.act, bench.sensed.sample_time, 0.0)
    poles: Complex = np.linalg.eigvals(bench.sensed.closed(law)[0]).astype(np.complex128)
    return poles


def least_damping(poles: Complex, sample_time: float) -> float:
    """Return the smallest damping ratio of the modes below half the Nyquist frequency; −1 where the loop is unstable."""
    if np.max(np.abs(poles)) >= 1.0:
        return -1.0
    rates = np.log(poles[np.abs(poles) > 1e-12]) / sample_time
    slow = rates[np.abs(rates.imag) < 0.5 * np.pi / sample_time]
    return float(np.min(-slow.real / np.abs(slow), initial=1.0))
