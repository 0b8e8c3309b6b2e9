"""The sampled plant as the law sees it, from the line command v to the measured states, and the loop closed or broken.

Everything between the sampling instant and the torque is inside: the hold, the latency (any fraction of a sample), the
actuators' own lag, and the levelling that shares the momentum out between several wheels.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law
from balance.kernel.sensing import UP
from balance.maths.sampled import hold_late, whole_samples, with_commands_ago
from balance.maths.transfer import respond, triangular
from balance.plant.record import LinearModel, Plant

Array = NDArray[np.float64]
Complex = NDArray[np.complex128]


@dataclass(frozen=True)
class SampledPlant:
    """x⁺ = A x + B v, y = C x: one sample of the plant under the line command v.

    `states`: the model's states first (same names and order), then what lies between command and torque: `torque_lag` (v
    after the actuators' lag; one per distinct lag, `torque_lag_2`, …), `NAME.levelling_lag`, `torque_1_ago`, `torque_2_ago`,
    … and `NAME.levelling_1_ago`, … .  `measured` names the rows of C: all model states, then `tilt` and `gyro`.
    """

    plant: Plant
    A: Array                     # (N, N)
    B: Array                     # (N,)
    C: Array                     # (m, N)
    states: tuple[str, ...]      # (N,)
    measured: tuple[str, ...]    # (m,)
    sample_time: float           # s
    latency: float               # s
    gain: float = 1.0            # on v, after the controller's memory

    def with_gain(self, factor: float) -> SampledPlant:
        """Multiply the physical command by `factor`: a torque constant that is off."""
        return replace(self, B=self.B * factor, gain=self.gain * factor)

    def with_extra_delay(self, seconds: float) -> SampledPlant:
        """Add input delay (s), discretised anew: any fraction of a sample is exact."""
        later = sample_plant(self.plant, self.sample_time, self.latency + seconds)
        return later.with_gain(self.gain)

    def rows(self, names: tuple[str, ...]) -> Array:
        """Return the rows of C (len(names), N) for the named measurements."""
        return self.C[[self.measured.index(name) for name in names]]


@dataclass(frozen=True)
class BrokenLoop:
    """A loop cut at one place: L(z) = c (zI − A)⁻¹ b, negative feedback; closed with factor k: A − k b c."""

    A: Array                     # (N, N)
    b: Array                     # (N,)
    c: Array                     # (N,)
    sample_time: float           # s

    def closed(self, factor: float = 1.0) -> Array:
        """Return the closed-loop matrix (N, N) with the loop gain multiplied by `factor`."""
        return self.A - factor * np.outer(self.b, self.c)

    def response(self, frequencies: Array) -> Complex:
        """Return L(e^{jωT}) at the frequencies (rad/s)."""
        return respond(triangular(self.A, self.b, self.c), np.exp(1j * frequencies * self.sample_time))[:, 0]


def sample_plant(plant: Plant, sample_time: float, latency: float) -> SampledPlant:
    """Discretise the plant exactly for commands given every `sample_time` that act `latency` (s) after sampling.

    Raises ValueError for a sample time that is not positive or a negative latency.
    """
    if not sample_time > 0 or latency < 0:
        raise ValueError(f"sample time {sample_time} s and latency {latency} s: want positive, and zero or more")
    A, B, names = _with_lags(plant)                                      # inputs: v, then levelling commands
    whole, rest = whole_samples(latency, sample_time)
    phi, gamma_new, gamma_old = hold_late(A, B, sample_time, rest)
    if not rest:
        gamma_old = np.zeros_like(gamma_new)
    A_late, B_late = with_commands_ago(phi, gamma_new, gamma_old, whole)
    commands = ["torque", *(f"{plant.units[i].name}.levelling" for i in _levelled(plant))]
    count = (len(A_late) - len(names)) // len(commands)
    names += [f"{command}_{ago}_ago" for ago in range(1, count + 1) for command in commands]
    n = len(plant.model.states)
    C = np.eye(n, len(A_late))
    A_late = A_late - B_late[:, 1:] @ plant.levelling[_levelled(plant)] @ C
    C = np.vstack([C, _sensor_rows(plant, A, len(A_late))])
    return SampledPlant(plant, A_late, B_late[:, 0], C, tuple(names), (*plant.model.states, "tilt", "gyro"), sample_time,
                        latency)


def sensor_rows(plant: Plant, width: int) -> Array:
    """Return (2, width): `tilt` = lean − r θ̈/g with the sensor r above the line, and `gyro` (physics page, trap 8).

    On legs that give the hinge at L below the sensor moves by itself: lean − ((r − L) ψ̈ + L χ̈)/g.

    θ̈ is that of the sampling instant, under the torque that still acts then; a torque that follows its command without
    any lag is left out of it (wheels always lag).
    """
    return _sensor_rows(plant, _with_lags(plant)[0], width)


def _sensor_rows(plant: Plant, A: Array, width: int) -> Array:
    rows = np.eye(2, width)
    gravity = plant.stance.gravity * np.cos(plant.stance.slope)
    up, n = plant.sensor_parameters[UP], len(plant.model.states)
    hinge = plant.legs.hinge if plant.legs else 0.0
    rows[0, :len(A)] -= (up - hinge) / gravity * A[1]
    if plant.legs:
        rows[0, :len(A)] -= hinge / gravity * A[n - 1]
    return rows


def _levelled(plant: Plant) -> list[int]:
    return [i for i in range(len(plant.units)) if np.any(plant.levelling[i])]


def _with_lags(plant: Plant) -> tuple[Array, Array, list[str]]:
    """Continuous model from [v, levelling command of each levelled unit], first-order lags as states.

    A position servo's lag is among the model's own states, so rate-driven units get none here.  The levelling input
    of a unit is counted with the sign it has in `inputs = allotment·v − levelling·x`, that is +1 here.
    """
    model, levelled = plant.model, _levelled(plant)
    lags = [unit.lag if unit.drive == "torque" else np.inf for unit in plant.units]
    n, names = len(model.states), list(model.states)
    blocks: list[tuple[Array, float, int, str]] = []                     # column into x, lag, input, name
    direct = np.zeros((n, 1 + len(levelled)))
    distinct = sorted({lag for lag in lags if np.isfinite(lag)})
    for number, lag in enumerate(distinct, start=1):
        share = np.where(np.asarray(lags) == lag, plant.allotment, 0.0)
        blocks.append((model.B @ share, lag, 0, "torque_lag" if number == 1 else f"torque_lag_{number}"))
    direct[:, 0] = model.B @ np.where(np.isinf(lags), plant.allotment, 0.0)
    for j, i in enumerate(levelled, start=1):
        if np.isfinite(lags[i]):
            blocks.append((model.B[:, i], lags[i], j, f"{plant.units[i].name}.levelling_lag"))
        else:
            direct[:, j] = model.B[:, i]
    blocks = [block for block in blocks if np.any(block[0])]
    return _append_lags(model, direct, blocks, names)


def _append_lags(model: LinearModel, direct: Array, blocks: list[tuple[Array, float, int, str]],
                 names: list[str]) -> tuple[Array, Array, list[str]]:
    n, k = len(model.states), len(blocks)
    A = np.zeros((n + k, n + k))
    B = np.zeros((n + k, direct.shape[1]))
    A[:n, :n], B[:n] = model.A, direct
    for i, (column, lag, source, _) in enumerate(blocks):
        A[:n, n + i] = column
        A[n + i, n + i] = -lag
        B[n + i, source] = lag
    return A, B, names + [block[3] for block in blocks]


def close(plant: SampledPlant, law: Law) -> Array:
    """Return the closed-loop matrix (N + k, N + k) on [plant states, law memory], no limit reached.

    The law's memory sees the law's own v, the plant gets `plant.gain` times it.
    """
    return actuator_break(plant, law).closed()


def actuator_break(plant: SampledPlant, law: Law) -> BrokenLoop:
    """Cut the loop at the physical command, after the controller's memory: the memory still sees the law's own v."""
    Y = plant.rows(law.measurements)                                     # (m, N)
    N, k = len(plant.A), len(law.memory)
    A = np.zeros((N + k, N + k))
    A[:N, :N] = plant.A
    A[N:, :N] = (law.B + np.outer(law.E, law.D)) @ Y
    A[N:, N:] = law.A + np.outer(law.E, law.C)
    b = np.concatenate([plant.B, np.zeros(k)])
    c = -np.concatenate([law.D @ Y, law.C])
    return BrokenLoop(A, b, c, plant.sample_time)


def command_break(plant: SampledPlant, law: Law) -> BrokenLoop:
    """Cut the loop at the computed command, before the memory: what a design on paper shows, not what the motor feels."""
    Y = plant.rows(law.measurements)
    N, k = len(plant.A), len(law.memory)
    A = np.zeros((N + k, N + k))
    A[:N, :N] = plant.A
    A[N:, :N] = law.B @ Y
    A[N:, N:] = law.A
    return BrokenLoop(A, np.concatenate([plant.B, law.E]), -np.concatenate([law.D @ Y, law.C]), plant.sample_time)


def sensor_break(plant: SampledPlant, law: Law, name: str) -> BrokenLoop:
    """Cut the loop at one measurement, everything else stays closed."""
    i = law.measurements.index(name)
    y = plant.rows((name,))[0]
    b = np.concatenate([plant.B * law.D[i], law.B[:, i] + law.E * law.D[i]])
    c = -np.concatenate([y, np.zeros(len(law.memory))])
    return BrokenLoop(close(plant, law) + np.outer(b, c), b, c, plant.sample_time)


def loop_response(plant: SampledPlant, law: Law, frequencies: Array) -> Complex:
    """Return L(e^{jωT}) of the loop broken at the physical command, negative feedback (1 + L); frequencies in rad/s."""
    return actuator_break(plant, law).response(frequencies)
