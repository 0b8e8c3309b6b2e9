"""The linear model in python-control's own type, for people who want to go on from there."""

from __future__ import annotations

import control
import numpy as np

from balance.plant.record import Plant


def to_statespace(plant: Plant) -> control.StateSpace:
    """Return the linear model with named states, inputs (units' own, then `disturbance`) and outputs (all states)."""
    model = plant.model
    B = np.column_stack([model.B, model.disturbance])
    n = len(model.states)
    return control.StateSpace(model.A, B, np.eye(n), np.zeros((n, B.shape[1])), states=list(model.states),
                              inputs=[*model.inputs, "disturbance"], outputs=list(model.states), name=plant.stance.name)
