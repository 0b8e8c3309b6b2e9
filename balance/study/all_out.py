"""The all-out manoeuvre run by the same kernel as every trial: what the closed forms of `plant.limits` say is possible.

The law knows lean and lean rate exactly and asks for everything its stabilisers have the way z = lean + lean rate/p
points: against a push no other law of the same rate and latency does more.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from balance.design.law import Law
from balance.design.records import Design
from balance.goal.goal import Loop
from balance.kernel.layout import CURRENT_LAG, KIND, RATE_LAG, WHEEL
from balance.plant.record import Plant
from balance.plant.sharing import line_torque_per_input

NEAR = 1e-4
"""rad of z from which everything is asked for: a thousandth of what any machine here recovers from."""
AT_ONCE = Loop(rate=2000.0)
"""A loop late by so little (a quarter of a millisecond of hold) that a pole of 10 1/s loses 0.25 %."""
NO_LAG = 3e3
"""rad/s: bandwidth of a drive that hardly lags; the kernel's steps follow it."""


def all_out(design: Design, loop: Loop) -> Design:
    """Return the design with the all-out law at the rate and latency of `loop` in its law's place."""
    plant = design.plant
    alone, width = len(plant.units) == 1, len(plant.for_law.model.states)
    gains = line_torque_per_input(plant.unit_parameters)                     # (units,)
    limit = plant.units[0].input_limit if alone else plant.torque_limit
    D = np.zeros(width)
    D[:2] = limit / NEAR * (np.sign(gains[0]) if alone else 1.0) * np.array([1.0, 1.0 / plant.pole])
    law = Law(kind="all-out", sample_time=1.0 / loop.rate, latency=loop.latency, measurements=plant.for_law.model.states,
              memory=(), A=np.zeros((0, 0)), B=np.zeros((0, width)), E=np.zeros(0), C=np.zeros(0), D=D, output_limit=limit,
              allotment=plant.allotment, levelling=np.zeros((len(plant.units), width)),
              input_limits=np.array([u.input_limit for u in plant.units]), unit=design.law.unit, K=np.zeros(0), states=(),
              gains={})
    return replace(design, law=law)


def without_lag(plant: Plant) -> Plant:
    """Return the plant with drives that follow at once."""
    rows = plant.unit_parameters.copy()
    for row in rows:
        row[CURRENT_LAG if row[KIND] == WHEEL else RATE_LAG] = NO_LAG
    return replace(plant, unit_parameters=rows)
