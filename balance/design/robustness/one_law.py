"""One gain set for every stance: the gains of one stance carried to the others, and what that costs.

Carried are the gains on lean, lean rate and momentum stored about the line.  How several units share the command follows
from where the line runs and stays each stance's own: a wheel that cannot act about a line must not be asked to.  One unit
alone keeps its row as it is, number for number.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balance.design.build import measured
from balance.design.law import Law
from balance.design.loop import SampledPlant, sample_plant
from balance.design.margins import margins_of
from balance.design.records import Design, Margins
from balance.design.robustness.screen import screen_of
from balance.design.sampled_margins import at_actuator
from balance.goal.goal import Goal
from balance.plant.record import Plant

Array = NDArray[np.float64]


@dataclass(frozen=True)
class OneLaw:
    """One gain set on every stance. `source`: the stance whose gains they are; rows go with `stances`."""

    source: str
    stances: tuple[str, ...]
    laws: tuple[Law, ...]
    own: tuple[Margins, ...]     # one gain set per stance
    shared: tuple[Margins, ...]  # the same gains everywhere


def one_law(designs: Sequence[Design]) -> OneLaw | None:
    """Return the gain set whose smallest disk margin over the stances is largest, or None where there is no choice.

    Tried are the gains of each stance.  None: fewer than two stances have a stable law, or the stances' models differ.
    """
    made = [d for d in designs if not d.refused and d.margins.stable]
    if len(made) < 2 or len({d.law.measurements for d in made}) > 1:
        return None
    smallest = [min(_quick_disk(d.plant, carried(source, d)) for d in made) for source in made]
    source = made[int(np.argmax(smallest))]
    laws = tuple(carried(source, d) for d in made)
    shared = tuple(margins_of(at_actuator(_sampled(d), law)) for d, law in zip(made, laws, strict=True))
    return OneLaw(source.plant.stance.name, tuple(d.plant.stance.name for d in made), laws,
                  tuple(d.margins for d in made), shared)


def compared(designs: Sequence[Design]) -> OneLaw | None:
    """Return both ways beside each other, whichever the designs follow."""
    if any(d.own is not None for d in designs):
        made = [d for d in designs if d.own is not None]
        return OneLaw(made[0].law_of, tuple(d.plant.stance.name for d in made), tuple(d.law for d in made),
                      tuple(d.own for d in made if d.own is not None), tuple(d.margins for d in made))
    return one_law(designs)


def carried(source: Design, to: Design) -> Law:
    """Return the law of `source` as it runs on the stance of `to`; its gains stay those of `source`."""
    if source is to:
        return source.law
    law, own = source.law, to.law
    change = seen_as(source.plant, to.plant, law.measurements)
    return replace(law, B=law.B @ change, D=law.D @ change, allotment=own.allotment, levelling=own.levelling,
                   input_limits=own.input_limits, output_limit=own.output_limit)


def seen_as(source: Plant, to: Plant, measurements: Sequence[str]) -> Array:
    """Return (m, m): what the law of `source` is shown in place of the measurements on the line of `to`.

    Lean and rate as they are; of the units, the momentum stored about the line, shared out as `source` would.
    """
    m = len(measurements)
    change = np.eye(m)
    units = [i for i, name in enumerate(measurements) if name.rpartition(".")[2] in ("wheel_speed", "gimbal_angle")]
    if len(source.units) < 2 or not units:
        return change
    states = [source.model.states.index(measurements[i]) for i in units]
    ours, theirs = source.momentum_row[states], to.momentum_row[states]
    rate = next(i for i, name in enumerate(measurements) if name in ("lean_rate", "gyro"))
    along = ours / float(ours @ ours)                                    # (u,) unit states per momentum
    change[np.ix_(units, units)] = np.outer(along, theirs)
    change[units, rate] = along * (to.momentum_row[1] - source.momentum_row[1])
    return change


def share(designs: Sequence[Design], goal: Goal) -> tuple[Design, ...]:
    """Return the designs with one gain set in place of their own; as they are where there is none."""
    chosen = one_law(designs)
    laws = dict(zip(chosen.stances, chosen.laws, strict=True)) if chosen else {}
    found = []
    for design in designs:
        law = laws.get(design.plant.stance.name)
        if law is None or chosen is None:
            found.append(design)
            continue
        made = measured(design.plant, _sampled(design), law, goal)
        found.append(replace(made, own=design.margins, law_of=chosen.source, retuned=design.retuned))
    return tuple(found)


def _sampled(design: Design) -> SampledPlant:
    return sample_plant(design.plant, design.law.sample_time, design.law.latency)


def _quick_disk(plant: Plant, law: Law) -> float:
    """Return the disk margin off the screen's grid; below 0 where the loop is unstable."""
    return float(screen_of(plant, law).scores([{}])[0, 0])
