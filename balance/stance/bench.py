"""From the bench's readings to mass, centre of mass and inertias, each with its uncertainty."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.base.errors import InputError
from balance.base.words import did_you_mean, listed
from balance.machine.machine import Machine
from balance.machine.measured import Bifilar, Hanging, Measured, Swing
from balance.maths.rotations import turned, unit
from balance.maths.swings import bifilar_inertia, pendulum_inertia, trifilar_inertia
from balance.maths.uncertainty import propagated
from balance.maths.weighing import weighed_centre
from balance.stance.measured import Bench, Moment
from balance.stance.problems import problem
from balance.stance.record import Stance

Array = NDArray[np.float64]

NOTHING = Bench(float("nan"), 0.0, np.full(3, np.nan), np.zeros(3), ())


def bench_of(machine: Machine, measured: Measured, cad: Stance) -> Bench:
    """Return what the bench says of the machine in the pose of `cad`; first-order propagation of every uncertainty.

    Raises InputError for feet that the pose does not have, and for swings that no inertia explains.
    """
    bench = _weighed(machine, measured, cad)
    mass = cad.mass if np.isnan(bench.mass) else bench.mass
    moments = tuple(_moment(machine, name, swing, mass, bench.mass_uncertainty)
                    for name, swing in (measured.swings or {}).items())
    return Bench(bench.mass, bench.mass_uncertainty, bench.centre_T, bench.centre_uncertainty, moments)


def _weighed(machine: Machine, measured: Measured, cad: Stance) -> Bench:
    weighings = measured.weighings or {}
    if not weighings:
        return NOTHING
    plan = (machine.stances or {})[measured.pose]
    places = dict(plan.down) | dict(plan.lifted or {})
    feet = tuple(next(iter(weighings.values())).loads)
    for name, weighing in weighings.items():
        wrong = [f for f in (*weighing.loads, *feet) if f not in places or f not in weighing.loads or f not in feet]
        if wrong:
            hint = did_you_mean(wrong[0], places) if wrong[0] not in places else ""
            raise InputError([problem(machine, f"measured.weighings.{name}.loads", f"loads under {listed(weighing.loads)}",
                                      f"the same feet in every weighing, of {listed(places)}", hint)])
    contacts_T = np.array([cad.R_WT.T @ (np.array(places[foot]) - cad.p_WT) for foot in feet])      # (n, 3)
    turns = np.array([turned(*w.turn) @ cad.R_WT for w in weighings.values()])                      # (k, 3, 3)
    loads = np.array([[w.loads[foot] for foot in feet] for w in weighings.values()])                # (k, n)
    sigma = np.array([[w.uncertainty] * len(feet) for w in weighings.values()])

    def formula(flat: Array) -> Array:
        total, centre = weighed_centre(contacts_T, turns, flat.reshape(loads.shape))
        return np.array([total, *centre])

    known = np.isfinite(formula(loads.ravel()))
    found, spread = propagated(lambda flat: formula(flat)[known], loads.ravel(), sigma.ravel())
    values, deviations = np.full(4, np.nan), np.zeros(4)
    values[known], deviations[known] = found, np.sqrt(np.diag(spread))
    return Bench(float(values[0]), float(deviations[0]), values[1:], deviations[1:], ())


def _moment(machine: Machine, name: str, swing: Swing, mass: float, mass_sigma: float) -> Moment:
    """Return one swing's moment of inertia about the axis through the centre of mass."""
    g = machine.gravity
    if isinstance(swing, Hanging):
        values, sigma = [swing.arm, swing.period], [swing.arm_uncertainty, swing.uncertainty]
    elif isinstance(swing, Bifilar):
        values, sigma = [*swing.arms, swing.period], [swing.arm_uncertainty, swing.arm_uncertainty, swing.uncertainty]
    else:
        values, sigma = [swing.radius, swing.period], [swing.arm_uncertainty, swing.uncertainty]

    def formula(at: Array) -> Array:
        m = float(at[0])
        if isinstance(swing, Hanging):
            return np.array([pendulum_inertia(m, g, at[1], at[2])])
        if isinstance(swing, Bifilar):
            return np.array([bifilar_inertia(m, g, at[1], at[2], swing.length, at[3])])
        return np.array([trifilar_inertia(m, g, at[1], swing.length, at[2])])

    found, spread = propagated(formula, np.array([mass, *values]), np.array([mass_sigma, *sigma]))
    if not found[0] > 0.0:
        raise InputError([problem(machine, f"measured.swings.{name}.period", f"a swing of {swing.period:g} s",
                                  "a period that leaves a positive inertia", "look at the arm and its unit")])
    return Moment(np.asarray(unit(np.array(swing.about))), float(found[0]), float(np.sqrt(spread[0, 0])))


def refuse_unphysical(machine: Machine, stance: Stance) -> None:
    """Raise InputError where the bench's numbers make a body that cannot be: principal moments, triangle inequality."""
    values = np.linalg.eigvalsh(stance.I_com_W)
    if stance.mass > 0.0 and values[0] > 0.0 and values[2] <= (values[0] + values[1]) * (1.0 + 1e-9):
        return
    told = ", ".join(f"{value:.4g}" for value in values)
    raise InputError([problem(machine, "measured", f"mass {stance.mass:.4g} kg and principal moments {told} kg*m^2",
                              "a positive mass, positive moments, the largest at most the sum of the others",
                              "look at units and axes of the swing tests")])


