"""Fills the lanes of the batch kernel with machines and starts, and says what the lanes do not cover."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from balance.kernel import lane_rows as at
from balance.kernel import layout, outcome
from balance.kernel.bundles import Events, LawArrays
from balance.kernel.drive import LIMITER_GAIN
from balance.kernel.lane_rows import LANES

Array = NDArray[np.float64]


def not_covered(bodies: Array, units: Array, law: LawArrays, events: Events) -> str:
    """Return why lanes cannot run these, "" where they can: wheels with a motor, on stiff legs and point feet.

    bodies (n, BODY_SIZE), units (n, u, UNIT_SIZE).
    """
    reasons = (
        ("more than two units, or a supply, play or legs that give", units.shape[1] > 2),
        ("gimbals", bool(np.any(units[..., layout.KIND] != layout.WHEEL))),
        ("a supply, play or legs that give", bool(np.any(units[..., layout.ROLE] != layout.MOTOR))),
        ("stiction", bool(np.any(units[..., layout.STICTION] > units[..., layout.COULOMB]))),
        ("a motor without a current lag", not np.all(np.isfinite(units[..., layout.CURRENT_LAG]))),
        ("rounded feet", bool(np.any(bodies[:, layout.FOOT_RADIUS] != 0.0))),
        ("a release", events.release > 0.0),
        ("a body that changes", len(events.changes) > 0 or bool(np.any(events.jumps[:, outcome.SHIFT] != 0.0))),
        ("mass properties that vary", bool(np.any(events.torques[:, outcome.OF_INERTIA:outcome.LEVER] != 0.0))),
        ("missed or late samples", len(events.spells) > 0),
        ("a law of more measurements or memory than rows", law.D.size > at.MOST_MEASURED or law.C.size > at.MOST_MEMORY),
    )
    return next((why for why, is_so in reasons if is_so), "")


def motor_rows(units: Array) -> Array:
    """Return the kernel's numbers of each motor, (n, MOTOR_SIZE), from rows of `layout`, (n, UNIT_SIZE)."""
    out = np.zeros((len(units), at.MOTOR_SIZE))
    own, coupling = units[:, layout.OWN_INERTIA], units[:, layout.COUPLING]
    gain = np.minimum(0.25 * units[:, layout.CURRENT_LAG], LIMITER_GAIN)
    out[:, at.COUPLING], out[:, at.PER_OWN] = coupling, 1.0 / own
    out[:, at.SHARE], out[:, at.MOMENT] = coupling / own, coupling**2 / own
    out[:, at.SPEED_GAIN] = (own + units[:, layout.BEHIND_PLAY]) * gain
    out[:, at.PER_TORQUE], out[:, at.PER_OHM] = 1.0 / units[:, layout.TORQUE_PER_AMP], 1.0 / units[:, layout.RESISTANCE]
    for to, place in ((at.COULOMB, layout.COULOMB), (at.VISCOUS, layout.VISCOUS), (at.TORQUE_LIMIT, layout.TORQUE_LIMIT),
                      (at.SPEED_LIMIT, layout.SPEED_LIMIT), (at.PER_AMP, layout.TORQUE_PER_AMP), (at.EMF, layout.BACK_EMF),
                      (at.OHMS, layout.RESISTANCE), (at.VOLTS, layout.BUS_VOLTAGE), (at.AMPS, layout.CURRENT_LIMIT),
                      (at.LAG, layout.CURRENT_LAG)):
        out[:, to] = units[:, place]
    return out


def machine_rows(bodies: Array, units: Array, scale: Array, seeds: Array, end_torque: float) -> Array:
    """Return the rows MACHINE to MACHINE_END of n trials, (rows, n).

    bodies (n, BODY_SIZE), units (n, u, UNIT_SIZE), scale and seeds (n,); end_torque: N·m that stays on, before scaling.
    """
    out = np.zeros((at.MACHINE_END, len(bodies)))
    for to, place in ((at.BODY_DRAG, layout.BODY_DRAG), (at.BALANCED, layout.BALANCED), (at.TOUCH_DOWN, layout.TOUCH_DOWN),
                      (at.LANDS_OUTWARD, layout.LANDS_OUTWARD), (at.FELL, layout.FELL), (at.GRAVITY, layout.GRAVITY)):
        out[to] = bodies[:, place]
    mass = bodies[:, layout.INERTIA].copy()
    for i in range(units.shape[1]):
        rows = motor_rows(units[:, i])
        first = at.MOTOR + i * at.MOTOR_SIZE
        out[first:first + at.MOTOR_SIZE] = rows.T
        mass -= rows[:, at.MOMENT]
    out[at.PER_MASS], out[at.SCALE], out[at.SEED] = 1.0 / mass, scale, seeds
    upright, across = bodies[:, layout.STIFF_SIN], bodies[:, layout.STIFF_COS]
    out[at.STIFFNESS], out[at.UPRIGHT] = np.hypot(upright, across), -np.arctan2(across, upright)
    with np.errstate(invalid="ignore"):                      # more than gravity can carry: nowhere, NaN
        out[at.TARGET] = out[at.UPRIGHT] - out[at.BALANCED] - np.arcsin(end_torque * scale / out[at.STIFFNESS])
    return out[at.MACHINE:]


def rows_needed(law: LawArrays) -> int:
    """Return how many rows one block takes."""
    return at.QUEUE + 2 * (math.floor(law.latency / law.sample_time + 1e-9) + 2)


def filled(block: Array, machines: Array, states: Array, memory: Array) -> Array:
    """Return `block` (rows, LANES) with n ≤ LANES trials from the left; what is left over repeats the last one.

    machines: (rows, n) from `machine_rows`; states: (n, 2 + 2u); memory: (n, places of the law's memory).
    """
    take = np.minimum(np.arange(LANES), len(states) - 1)
    block[:] = 0.0
    block[at.ALIVE] = 1.0
    block[at.MACHINE:at.MACHINE_END] = machines[:, take]
    block[at.THETA:at.THETA + states.shape[1]] = states[take].T
    block[at.MEMORY:at.MEMORY + memory.shape[1]] = memory[take].T
    return block
