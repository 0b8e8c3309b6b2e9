"""What is measured while a trial runs: line torque and momentum, currents, bus power, feet, first limits."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.compiled import inlined, part
from balance.kernel.drive import torque_available
from balance.kernel.equations import gimbal_terms
from balance.kernel.feet import each_foot, friction_needed
from balance.kernel.layout import (
    BACK_EMF,
    BALANCED,
    BUS_VOLTAGE,
    COUNT,
    COUPLING,
    E_GXS0,
    E_S0,
    FRICTION,
    GIMBAL_INERTIA,
    GROUND_RISES,
    KIND,
    LENGTH,
    MOMENTUM,
    MOTOR,
    OWN_INERTIA,
    RESISTANCE,
    ROLE,
    TAKES_BACK,
    WHEEL,
)
from balance.kernel.supply import bus_row, bus_voltage, motor_power

Array = NDArray[np.float64]
Flags = NDArray[np.int64]


@inlined
def line_torque(X: Array, dX: Array, units: Array) -> float:
    """Return T = dq/dt in N·m: the torque about the line all units take from the body."""
    total = 0.0
    for i in range(units.shape[0]):
        if units[i, KIND] == WHEEL:
            if units[i, COUPLING] == 0.0:
                continue
            own = units[i, OWN_INERTIA] * dX[2 + 2 * i] + units[i, COUPLING] * dX[1]
            total += units[i, COUPLING] / units[i, OWN_INERTIA] * own
        else:
            total += momentum_slope(X[2 + 2 * i], units, i) * X[3 + 2 * i]
    return total


@inlined
def line_momentum(X: Array, units: Array) -> float:
    """Return q in N·m·s: the momentum about the line stored in all units (a gimbal at angle zero stores none)."""
    total = 0.0
    for i in range(units.shape[0]):
        if units[i, KIND] == WHEEL:
            if units[i, COUPLING] == 0.0:
                continue
            own = units[i, OWN_INERTIA] * X[2 + 2 * i] + units[i, COUPLING] * X[1]
            total += units[i, COUPLING] / units[i, OWN_INERTIA] * own
        else:
            lead = 0.0 if units[i, COUNT] > 1.5 else units[i, E_S0]
            share = lead * (np.cos(X[2 + 2 * i]) - 1.0) + units[i, E_GXS0] * np.sin(X[2 + 2 * i])
            total += units[i, COUNT] * units[i, MOMENTUM] * share
    return total


@part
def momentum_slope(angle: float, units: Array, i: int) -> float:
    """Return dq/dγ in N·m·s/rad of all rotors of a gimballed unit; in a mirrored pair the e·s₀ parts cancel."""
    lead = 0.0 if units[i, COUNT] > 1.5 else units[i, E_S0]
    slope = units[i, E_GXS0] * np.cos(angle) - lead * np.sin(angle)
    return float(units[i, COUNT] * units[i, MOMENTUM] * slope)


@part
def available(X: Array, units: Array, sign: float) -> float:
    """Return the torque about the line in N·m all units could give now toward `sign`."""
    total = 0.0
    for i in range(units.shape[0]):
        if units[i, KIND] == WHEEL:
            share = units[i, COUPLING] / units[i, OWN_INERTIA]
            total += torque_available(units, i, X[2 + 2 * i], share, sign)
        else:
            total += torque_available(units, i, X[2 + 2 * i], momentum_slope(X[2 + 2 * i], units, i), sign)
    return total


@inlined
def bus_power(X: Array, dX: Array, units: Array) -> tuple[float, float]:
    """Return (electrical power of wheels plus mechanical power of gimbal drives in W, largest |current| in A).

    The steady power that holds the flywheels' spin is not in it.
    """
    power = 0.0
    current = 0.0
    for i in range(units.shape[0]):
        a, b = X[2 + 2 * i], X[3 + 2 * i]
        if units[i, KIND] == WHEEL:
            if units[i, ROLE] == MOTOR:
                power += b * (units[i, RESISTANCE] * b + units[i, BACK_EMF] * a)
                current = max(current, abs(b))
        else:
            _, _, coupling, back = gimbal_terms(i, a, b, X[1], units)
            drive = units[i, GIMBAL_INERTIA] * dX[3 + 2 * i] + coupling * dX[1] - back
            power += units[i, COUNT] * max(drive * b, 0.0)
    return power, current


@inlined
def watch(t: float, h: float, X: Array, dX: Array, body: Array, units: Array, met: Flags, metrics: Array,
          first: Array) -> None:
    """Gather the metrics of one sub-step of length h that starts at t (h = 0: only the peaks)."""
    torque = line_torque(X, dX, units)
    stored = line_momentum(X, units)
    power, current = bus_power(X, dX, units)
    metrics[outcome.PEAK_LEAN] = max(metrics[outcome.PEAK_LEAN], abs(X[0] - body[BALANCED]))
    metrics[outcome.PEAK_RATE] = max(metrics[outcome.PEAK_RATE], abs(X[1]))
    metrics[outcome.PEAK_TORQUE] = max(metrics[outcome.PEAK_TORQUE], abs(torque))
    metrics[outcome.PEAK_MOMENTUM] = max(metrics[outcome.PEAK_MOMENTUM], abs(stored))
    metrics[outcome.PEAK_CURRENT] = max(metrics[outcome.PEAK_CURRENT], current)
    metrics[outcome.PEAK_POWER] = max(metrics[outcome.PEAK_POWER], power)
    metrics[outcome.TORQUE_SQUARED] += h * torque * torque
    limited = False
    for i in range(units.shape[0]):
        if met[i] != outcome.NO_LIMIT:
            limited = True
            note(t, stored, i, met[i], first)
    if limited:
        metrics[outcome.SATURATED] += h


@inlined
def watch_feet(t: float, X: Array, dX: Array, push: float, body: Array, units: Array, metrics: Array) -> None:
    """Gather each foot's least load and needed friction at t, under a horizontal push in N; keep when it lifts or slips."""
    load_a, load_b, across_a, across_b, along = each_foot(X, dX, push, body, units)
    flat, steep = 1.0, 0.0
    if body[GROUND_RISES] != 0.0:
        flat, steep = np.cos(body[GROUND_RISES]), np.sin(body[GROUND_RISES])
    total = (load_a + load_b) * flat - (across_a + across_b) * steep
    for foot in range(2 if body[LENGTH] > 0.0 else 1):
        at = outcome.FEET + foot * outcome.FOOT_SIZE
        up, aside = (load_a, across_a) if foot == 0 else (load_b, across_b)
        load, across = up * flat - aside * steep, aside * flat + up * steep           # square to the ground, and along it
        metrics[at + outcome.LEAST_LOAD] = min(metrics[at + outcome.LEAST_LOAD], load)
        if load <= 0.0:
            metrics[at + outcome.LIFT_OFF] = min(metrics[at + outcome.LIFT_OFF], t)
            continue
        needed = friction_needed(load, across, along, total)
        metrics[at + outcome.GRIP] = max(metrics[at + outcome.GRIP], needed)
        if needed > body[FRICTION]:
            metrics[at + outcome.SLIP] = min(metrics[at + outcome.SLIP], t)


@inlined
def watch_bus(X: Array, units: Array, live: Array, metrics: Array) -> None:
    """Gather the peaks of the bus: voltage, sag below the healthy supply's own voltage, current out of the supply."""
    bus = bus_row(units)
    if bus < 0:
        return
    power = motor_power(X, units)
    volts = bus_voltage(X, power, live, bus)
    metrics[outcome.PEAK_BUS] = max(metrics[outcome.PEAK_BUS], volts)
    metrics[outcome.DEEPEST_SAG] = max(metrics[outcome.DEEPEST_SAG], units[bus, BUS_VOLTAGE] - volts)
    if units[bus, TAKES_BACK] == 1.0 or (X[2 + 2 * bus] <= 0.0 and power >= 0.0):
        metrics[outcome.PEAK_SUPPLY] = max(metrics[outcome.PEAK_SUPPLY], power / volts)


@inlined
def note(t: float, stored: float, row: int, limit: int, first: Array) -> None:
    """Keep the time and the stored momentum when a limit was met first."""
    if t < first[row, limit, 0]:
        first[row, limit, 0] = t
        first[row, limit, 1] = stored
