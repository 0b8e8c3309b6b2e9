"""The linear model in python-control's own type, for people who want to go on from there."""

from __future__ import annotations

import control
import numpy as np

from balance.plant.record import Plant


def to_statespace(plant: Plant) -> control.StateSpace:
    """Return the linear model with named states, inputs (units' own, then `disturbance`) and outputs (all states).

    python-control keeps the dot for subsystems and refuses it in a signal: `NAME.wheel_speed` is `NAME_wheel_speed` here.
    """
    model = plant.model
    states, inputs = ([name.replace(".", "_") for name in names] for names in (model.states, model.inputs))
    B = np.column_stack([model.B, model.disturbance])
    n = len(model.states)
    return control.StateSpace(model.A, B, np.eye(n), np.zeros((n, B.shape[1])), states=states,
                              inputs=[*inputs, "disturbance"], outputs=states, name=plant.stance.name.replace(".", "_"))
