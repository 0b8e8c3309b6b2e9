"""What rounding the gains costs: the law with the numbers the firmware really holds, its poles and its margins."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import linear_sum_assignment

from balance.design.law import Law
from balance.design.loop import close, sample_plant
from balance.design.margins import margins_of
from balance.design.records import Design, Margins
from balance.design.sampled_margins import at_actuator
from balance.firmware.describe import alike
from balance.firmware.program import LINE, MEMORY, READING
from balance.firmware.scaling import WHOLE, Fixed, FixedRow

Array = NDArray[np.float64]

SHARE = 0.05
"""Of the disk margin: what rounding may cost before a variant is refused."""


@dataclass(frozen=True)
class Rounding:
    """One stance's loop as designed and as rounded; `cost`: share of the disk margin lost."""

    stance: str
    designed: Margins
    rounded: Margins
    designed_poles: tuple[complex, ...]  # of the closed loop per sample, largest |z| first
    rounded_poles: tuple[complex, ...]  # each beside the designed one it came from
    cost: float

    @property
    def designed_radius(self) -> float:
        """Return the largest |z| as designed."""
        return max(abs(pole) for pole in self.designed_poles)

    @property
    def rounded_radius(self) -> float:
        """Return the largest |z| as rounded."""
        return max(abs(pole) for pole in self.rounded_poles)


def to_places(value: float, places: int) -> float:
    """Return a value rounded to that many binary places."""
    return float(np.round(value * 2.0**places) / 2.0**places)


def float_laws(designs: Sequence[Design]) -> list[Law]:
    """Return the laws with every gain rounded to float32."""
    return [
        replace(
            law,
            **{
                name: getattr(law, name).astype(np.float32).astype(np.float64)
                for name in ("A", "B", "E", "C", "D", "allotment", "levelling")
            },
        )
        for law in alike([d.law for d in designs])
    ]


def fixed_laws(designs: Sequence[Design], fixed: Fixed) -> list[Law]:
    """Return the laws with every gain as the fixed-point variant holds it."""
    return [_rounded(law, fixed, s) for s, law in enumerate(alike([d.law for d in designs]))]


def _rounded(law: Law, fixed: Fixed, s: int) -> Law:
    k, m, units = len(law.memory), len(law.measurements), len(law.allotment)
    line, rest = _gains(fixed, fixed.line, s, k, m)
    moves = [_gains(fixed, row, s, k, m) for row in fixed.moves]
    inputs = [_gains(fixed, row, s, k, m) for row in fixed.inputs]
    return replace(
        law,
        C=line,
        D=rest[:m],
        A=np.array([x for x, _ in moves]).reshape(k, k) + np.diag([float(r.keeps) for r in fixed.moves]),
        B=np.array([y[:m] for _, y in moves]).reshape(k, m),
        E=np.array([y[m] for _, y in moves]),
        allotment=np.array([y[m] for _, y in inputs]),
        levelling=-np.array([y[:m] for _, y in inputs]).reshape(units, m),
    )


def _gains(fixed: Fixed, row: FixedRow, s: int, k: int, m: int) -> tuple[Array, Array]:
    """Return (gains on the memory (k,), gains on the readings and the line command (m + 1,)) in SI."""
    memory, rest = np.zeros(k), np.zeros(m + 1)
    for term in row.terms:
        places = {MEMORY: fixed.memory, READING: fixed.readings, LINE: (fixed.line.places,)}[term.source][term.place]
        value = term.gains[s] * WHOLE * 2.0 ** (term.shift + places - row.places)
        if term.source == MEMORY:
            memory[term.place] = value
        else:
            rest[m if term.source == LINE else term.place] = value
    return memory, rest


def roundings(designs: Sequence[Design], laws: Sequence[Law]) -> tuple[Rounding, ...]:
    """Return what rounding costs on every stance; the levelling's rounding is in it, as the plant's own."""
    out = []
    for design, law, wide in zip(designs, laws, alike([d.law for d in designs]), strict=True):
        levelling = design.plant.levelling.copy()            # legs that give are states no law levels
        if law.levelling.shape == design.plant.for_law.levelling.shape:
            levelling[:, : law.levelling.shape[1]] = law.levelling
        plant = replace(design.plant, allotment=law.allotment, levelling=levelling)
        sampled = sample_plant(plant, law.sample_time, law.latency)
        rounded = margins_of(at_actuator(sampled, law))
        before = close(sample_plant(design.plant, law.sample_time, law.latency), wide)
        stable = rounded.stable and design.margins.stable
        cost = 1.0 - rounded.disk / design.margins.disk if stable else 1.0
        out.append(
            Rounding(
                design.plant.stance.name,
                design.margins,
                rounded,
                *_poles(before, close(sampled, law)),
                float(cost),
            )
        )
    return tuple(out)


def _poles(before: Array, after: Array) -> tuple[tuple[complex, ...], tuple[complex, ...]]:
    """Return (the poles of one loop, largest first, those of another in the order that brings the pairs closest)."""
    was = np.linalg.eigvals(before).astype(np.complex128)
    was = was[np.lexsort((was.imag, was.real, -np.abs(was)))]
    now = np.linalg.eigvals(after).astype(np.complex128)
    _, order = linear_sum_assignment(np.abs(was[:, None] - now[None, :]))
    return tuple(complex(pole) for pole in was), tuple(complex(now[i]) for i in order)


def too_dear(found: Sequence[Rounding]) -> str:
    """Return why a variant is refused; empty where rounding costs little enough on every stance."""
    worst = max(found, key=lambda r: r.cost)
    if not worst.rounded.stable:
        return f"with its gains rounded the loop on {worst.stance} is unstable"
    if worst.cost > SHARE:
        return (
            f"rounding the gains costs {100 * worst.cost:.1f} % of the disk margin on {worst.stance} "
            f"({worst.designed.disk:.3f} to {worst.rounded.disk:.3f}); at most {100 * SHARE:g} % is allowed"
        )
    return ""
