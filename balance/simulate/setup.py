"""What the kernel's loop needs of a design: the law as flat arrays, the start state, empty output."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from balance.design.law import Law
from balance.kernel import outcome
from balance.kernel.bundles import LawArrays, Output, fresh_metrics
from balance.kernel.layout import (
    AXIS_SHARE,
    BALANCED,
    BEHIND_PLAY,
    COULOMB,
    COUNT,
    COUPLING,
    COUPLING_U,
    COUPLING_W,
    E_GXS0,
    E_S0,
    KIND,
    MOMENTUM,
    OWN_INERTIA,
    PARTNER,
    PLAY,
    ROLE,
    ROTOR_INERTIA,
    ROTOR_PART,
    STICTION,
    TOOTH_DAMPING,
    TOOTH_STIFFNESS,
    TOOTHED,
    UNIT_SIZE,
    VISCOUS,
    WHEEL,
)
from balance.kernel.legs import legs_row
from balance.kernel.sensing import GYRO, TILT
from balance.plant.legs import balance_on
from balance.plant.record import Plant
from balance.plant.sharing import line_torque_per_input
from balance.simulate.events import Happening

Array = NDArray[np.float64]


def law_arrays(law: Law, plant: Plant, command_bits: int | None = None) -> LawArrays:
    """Return the law as the kernel's tick reads it; `command_bits`: what each unit's input is rounded to."""
    return LawArrays(_flat(law.A), _flat(law.B), _flat(law.E), _flat(law.C), _flat(law.D), float(law.output_limit),
                     _flat(law.allotment), _flat(law.levelling), _flat(law.input_limits), line_share(plant),
                     input_steps(law, command_bits), resting(law, plant), places(law, plant),
                     float(law.sample_time), float(law.latency),
                     _flat(law.A if law.held_A is None else law.held_A), _flat(law.B if law.held_B is None else law.held_B))


def kernel_units(plant: Plant) -> Array:
    """Return the kernel's rows, (rows, UNIT_SIZE): the stabilisers, wheels behind play, legs that give, the supply.

    A wheel with play in its gear is parted: its motor keeps the unit's row, the wheel itself gets one of its own.
    """
    rows, behind = [row.copy() for row in plant.unit_parameters], []
    for i, row in enumerate(rows):
        if row[KIND] == WHEEL and row[PLAY] > 0.0:
            behind.append(_behind_play(i, row))
    rows += behind
    if plant.legs_parameters is not None:
        rows.append(plant.legs_parameters.copy())
    if plant.supply_parameters is not None:
        rows.append(plant.supply_parameters.copy())
    return np.array(rows)


def _behind_play(motor: int, row: Array) -> Array:
    """Part a wheel at the play of its gear: return the wheel's row, leave the motor's rotor in `row`. Drag is the wheel's.

    Rotor N² J_r coupled with α s N J_r, wheel I coupled with α I: together the geared wheel without play.
    """
    wheel = np.zeros(UNIT_SIZE)
    wheel[[KIND, ROLE, PARTNER]] = WHEEL, TOOTHED, motor
    for place in (COUPLING, COUPLING_U, COUPLING_W):
        wheel[place] = row[place] * (1.0 - row[ROTOR_PART])
        row[place] *= row[ROTOR_PART]
    wheel[OWN_INERTIA] = row[BEHIND_PLAY] = row[OWN_INERTIA] - row[ROTOR_INERTIA]
    row[OWN_INERTIA] = row[ROTOR_INERTIA]
    copied = [AXIS_SHARE, COULOMB, VISCOUS, STICTION, PLAY, TOOTH_STIFFNESS, TOOTH_DAMPING]
    wheel[copied] = row[copied]
    row[[COULOMB, VISCOUS, STICTION, PLAY]] = 0.0
    return wheel


def resting(law: Law, plant: Plant) -> Array:
    """Return what each measurement is counted from, (m,): a wheel's bias speed, else 0."""
    table = dict.fromkeys(law.measurements, 0.0)
    named = len(plant.units) > 1
    for unit in plant.units:
        table[f"{unit.name}.wheel_speed" if named else "wheel_speed"] = unit.bias_speed
    return np.array([table[name] for name in law.measurements])


def input_steps(law: Law, bits: int | None) -> Array:
    """Return what each input is rounded to, (units,): 2^bits levels over ± its limit; 0: not rounded."""
    if bits is None:
        return np.zeros(len(law.input_limits))
    finite = np.where(np.isfinite(law.input_limits), law.input_limits, 0.0)
    return np.asarray(2.0 * finite / 2.0**bits, dtype=np.float64)


def places(law: Law, plant: Plant) -> NDArray[np.int64]:
    """Return where each measurement stands in the kernel's state vector, (m,).

    The kernel keeps two entries per unit; the model's states skip a wheel's motor current.
    """
    where: list[int] = [0, 1]
    for i, unit in enumerate(plant.unit_parameters):
        where += [2 + 2 * i] if unit[KIND] == WHEEL else [2 + 2 * i, 3 + 2 * i]
    table = {**dict(zip(plant.for_law.model.states, where, strict=True)), "tilt": TILT, "gyro": GYRO}
    return np.array([table[name] for name in law.measurements], dtype=np.int64)


def line_share(plant: Plant) -> Array:
    """Return the torque about the line per unit of each unit's input, (units,); zeros for a single unit."""
    return line_torque_per_input(plant.unit_parameters) if len(plant.units) > 1 else np.zeros(1)


def start_state(plant: Plant, happening: Happening, units: Array) -> Array:
    """Return the kernel's state at the start, (2 + 2 rows of `units`,); what is stored is split by momentum capacity.

    Wheel: q = C Ω + C²/O θ̇ with C = α(I + sNJ_r), O = I + N²J_r, so that q is the stored value with the body moving.
    Gimballed: q = n H (σ(γ) - σ(0)), solved for γ, at most to its largest q. A wheel's bias speed comes on top.
    Legs that give start as they stand at balance: the machine leans and turns as one stiff piece.
    """
    X = np.zeros(2 + 2 * len(units))
    X[0] = plant.body_parameters[BALANCED] + happening.lean
    X[1] = 0.0 if happening.events.release > 0.0 else happening.lean_rate
    capacity = sum(unit.momentum_capacity for unit in plant.units)
    for i, (unit, row) in enumerate(zip(plant.units, plant.unit_parameters, strict=True)):
        part = happening.stored * unit.momentum_capacity / capacity if capacity > 0.0 else 0.0
        if row[KIND] == WHEEL and row[COUPLING] != 0.0:
            X[2 + 2 * i] = part / row[COUPLING] - row[COUPLING] / row[OWN_INERTIA] * happening.lean_rate
        elif row[KIND] != WHEEL and part != 0.0:
            X[2 + 2 * i] = _gimbal_angle(part / (row[COUNT] * row[MOMENTUM]), row)
        X[2 + 2 * i] += unit.bias_speed
    legs = legs_row.py_func(units)
    if legs >= 0:
        _, chi = balance_on(plant.body_parameters, units[legs])
        X[2 + 2 * legs], X[3 + 2 * legs] = X[1], chi + happening.lean
    for i, row in enumerate(units):
        if row[KIND] == WHEEL and row[ROLE] == TOOTHED:      # it turns with its motor, in the middle of the play
            X[2 + 2 * i] = X[2 + 2 * int(row[PARTNER])]
    return X


def empty_output(units: int, samples: int, record: bool) -> Output:
    """Return the arrays one trial fills; `units`: rows of the kernel."""
    return Output(np.zeros((samples + 1, 2)),
                  np.zeros((samples + 1 if record else 0, outcome.TRACE_SIZE + 2 * units)),
                  fresh_metrics(), np.full((units + 1, outcome.LIMITS, 2), math.inf))


def _gimbal_angle(share: float, row: Array) -> float:
    """Return γ with E_S0 (cos γ - 1) + E_GXS0 sin γ = share, the branch through zero; in a pair E_S0 cancels."""
    along = 0.0 if row[COUNT] > 1.5 else row[E_S0]
    size, lead = math.hypot(along, row[E_GXS0]), math.atan2(along, row[E_GXS0])
    ratio = min(max((share + along) / size, -1.0), 1.0)
    return math.asin(ratio) - lead if row[E_GXS0] > 0.0 else math.pi - math.asin(ratio) - lead


def _flat(values: Array) -> Array:
    """Return a contiguous float copy."""
    return np.array(values, dtype=np.float64, order="C")
