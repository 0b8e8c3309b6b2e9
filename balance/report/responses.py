"""What the linear closed loop does after a torque step and after a push, delay and sampling in it: curves to draw.

No limit acts here: each disturbance is as large as takes the machine as stated to half of its torque limit or half of
its momentum capacity, whichever comes first.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law
from balance.design.loop import close, sample_plant
from balance.design.records import Design
from balance.plant.record import LinearModel, Plant
from balance.report.amounts import amount

Array = NDArray[np.float64]

PART = 0.5
"""Of the torque limit and of the momentum capacity that the response as stated may reach."""
SETTLED = 5.0
"""Time constants of the slowest mode that are shown: e⁻⁵ is left."""
LONGEST = 12.0
"""s."""
MOST_POINTS = 300


@dataclass(frozen=True)
class Motion:
    """One linear response: time (n,) s, lean (n,) degrees, torque taken from the body (n,) N·m, momentum (n,) N·m·s."""

    time: Array
    lean: Array
    torque: Array
    momentum: Array


@dataclass(frozen=True)
class ResponsePicture:
    """Nominal and worst-case response to one disturbance; `worst` None where no tolerances are stated or it is unstable."""

    stance: str
    name: str               # "torque step" | "push"
    words: str              # how large it is
    nominal: Motion
    worst: Motion | None


def picture_responses(design: Design) -> tuple[ResponsePicture, ...]:
    """Return the responses to a torque step and to a push, outward; none where there is no stable loop."""
    plant = design.plant
    if design.refused or not design.margins.stable:
        return ()
    lasts, found = shown(design), design.robustness
    pictures = []
    for name, step, push in (("torque step", 1.0, 0.0), ("push", 0.0, 1.0)):
        unit = respond(plant, design.law, 0.0, step, push, lasts)
        size = bearable(plant, unit)
        hit = None
        if found is not None and found.margins.stable:
            hit = scaled(respond(found.worst, design.law, found.late, step, push, lasts), size)
        words = f"{amount(size, 'N*m')} about the line, from then on" if step else \
            f"{amount(size / plant.stance.height, 'N*s')} at the centre of mass"
        pictures.append(ResponsePicture(plant.stance.name, name, words, scaled(unit, size), hit))
    return tuple(pictures)


def bearable(plant: Plant, unit: Motion) -> float:
    """Return the factor on a response that takes it to `PART` of the torque limit or of the momentum capacity."""
    return PART * min(plant.torque_limit / max(float(np.abs(unit.torque).max()), 1e-300),
                      plant.momentum_capacity / max(float(np.abs(unit.momentum).max()), 1e-300))


def scaled(motion: Motion, by: float) -> Motion:
    """Return a linear response `by` times as large."""
    return Motion(motion.time, by * motion.lean, by * motion.torque, by * motion.momentum)


def shown(design: Design) -> float:
    """Return how long (s) is worth drawing: until the slowest mode has died away."""
    rates = -np.real(design.equivalent[np.isfinite(design.equivalent)])
    return float(min(SETTLED / max(float(rates.min(initial=np.inf)), SETTLED / LONGEST), LONGEST))


def respond(plant: Plant, law: Law, late: float, step: float, push: float, lasts: float) -> Motion:
    """Return the response of the closed loop from rest to a lasting torque `step` (N·m) and a `push` (N·m·s) at time 0.

    `late`: latency (s) beyond the law's own.  The torque is the mean over each sample, from the momentum it moved.
    """
    felt = disturbed(plant)
    sampled = sample_plant(felt, law.sample_time, max(law.latency + late, 0.0))
    n, loop = len(plant.model.states), close(sampled, law)
    x = np.zeros(len(loop))
    x[:n], x[n] = push * pushed(plant), step
    count = max(int(lasts / law.sample_time), 2)
    states = np.empty((count + 1, n))
    for k in range(count + 1):
        states[k] = x[:n]
        x = loop @ x
    momentum = states @ plant.momentum_row                               # (count + 1,)
    torque = np.diff(momentum) / law.sample_time                         # dq/dt = T
    keep = np.unique(np.concatenate([np.arange(min(60, count)), np.linspace(0, count - 1, MOST_POINTS).astype(int)]))
    return Motion(keep * law.sample_time, np.degrees(states[keep, 0]), torque[keep], momentum[keep])


def pushed(plant: Plant) -> Array:
    """Return the model's states after a unit of angular impulse by a push at the centre of mass, (n,)."""
    model, legs = plant.model, plant.legs
    if model.on_legs is None or legs is None:
        return model.disturbance
    share = legs.hinge / plant.stance.height                             # F L of F h acts on the legs
    return (1.0 - share) * model.disturbance + share * model.on_legs


def disturbed(plant: Plant) -> Plant:
    """Return the plant with a torque about the line as one more state that nothing moves: discretised with the rest."""
    model = plant.model
    n, m = model.B.shape
    A = np.zeros((n + 1, n + 1))
    A[:n, :n], A[:n, n] = model.A, model.disturbance
    wider = LinearModel((*model.states, "disturbance"), model.inputs, A, np.vstack([model.B, np.zeros((1, m))]),
                        np.append(model.disturbance, 0.0))
    return replace(plant, model=wider, momentum_row=np.append(plant.momentum_row, 0.0),
                   levelling=np.hstack([plant.levelling, np.zeros((len(plant.levelling), 1))]))
