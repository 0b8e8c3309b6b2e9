"""The supply all motors share: sag, current limit, and what the bus does with what braking wheels give back.

A battery or mains supply of open-circuit voltage V₀ behind a resistance R_b: V = V₀ − R_b P/V under a power P. One that
takes no current back leaves it in the bus capacitor, ½ C (V² − V₀²), until the brake resistor or the motors use it up.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from balance.kernel import outcome
from balance.kernel.compiled import inlined
from balance.kernel.layout import (
    BACK_EMF,
    BRAKE_OHMS,
    BUS,
    BUS_VOLTAGE,
    CAPACITANCE,
    CURRENT_LAG,
    KIND,
    MOTOR,
    OVERVOLTAGE,
    RESISTANCE,
    ROLE,
    SOURCE_OHMS,
    SOURCE_POWER,
    TAKES_BACK,
    WHEEL,
)

Array = NDArray[np.float64]
Flags = NDArray[np.int64]

CLAMP_GAIN = 2000.0
"""1/s: how fast the bus may come to its limit, for what is left of the way; slow enough for a step of 0.1 ms."""
BRAKE_BAND = 0.02
"""Share of the overvoltage below it over which the brake resistor comes on."""
SLACK = 1e-9
"""Relative excess below which what equals its limit does not count as limited."""


@inlined
def sagging_voltage(power: float, open_voltage: float, ohms: float) -> float:
    """Return V in V: V² − V₀ V + R_b P = 0, the upper root; V₀/2 where more is asked than any load can draw."""
    if ohms == 0.0:
        return open_voltage
    left = open_voltage * open_voltage - 4.0 * ohms * power
    return float(0.5 * (open_voltage + np.sqrt(max(left, 0.0))))


@inlined
def most_power(open_voltage: float, ohms: float, amps: float) -> float:
    """Return the largest power in W: at the current limit, or V₀²/(4 R_b) where the load then matches the source."""
    if amps == np.inf and ohms == 0.0:
        return np.inf
    amps = min(amps, 0.5 * open_voltage / ohms) if ohms > 0.0 else amps
    return float(amps * (open_voltage - ohms * amps))


@inlined
def scale_to(square: float, linear: float, rest: float, power: float) -> float:
    """Return s in 0 to 1 with A s² + B s + rest = power: how much of the current fits.

    A = Σ R i², B = Σ K_e Ω i over the motors that are cut, `rest` the power of the others. Of two positive roots
    (braking) it is the smaller: the branch that leaves s = 0.
    """
    left = linear * linear + 4.0 * square * (power - rest)
    if square <= 0.0 or left < 0.0:
        return 0.0
    root = np.sqrt(left)
    if power > rest and linear < 0.0:
        return float(min(max((root - linear) / (2.0 * square), 0.0), 1.0))
    # the other form of the quadratic formula, which does not cancel here
    below = linear + (root if power > rest else -root)
    return float(min(max(2.0 * (power - rest) / below, 0.0), 1.0)) if below != 0.0 else 0.0


@inlined
def capacitor_voltage(energy: float, open_voltage: float, farads: float) -> float:
    """Return V in V with ½ C (V² − V₀²) = energy."""
    return float(np.sqrt(open_voltage * open_voltage + 2.0 * max(energy, 0.0) / farads))


@inlined
def brake_power(volts: float, overvoltage: float, ohms: float) -> float:
    """Return what the brake resistor burns in W: from nothing 2 % below the overvoltage to V²/R there and above."""
    if ohms <= 0.0:
        return 0.0
    on = min(max(1.0 - (overvoltage - volts) / (BRAKE_BAND * overvoltage), 0.0), 1.0)
    return on * volts * volts / ohms


@inlined
def power_taken_back(volts: float, overvoltage: float, ohms: float, farads: float) -> float:
    """Return the largest power in W the motors may give back now: the resistor's, and what brings V to its limit."""
    if overvoltage == np.inf:
        return np.inf
    room = farads * overvoltage * CLAMP_GAIN * (overvoltage - volts)
    return float(max(brake_power(volts, overvoltage, ohms) + room, 0.0))


@inlined
def bus_row(units: Array) -> int:
    """Return the supply's row, the last one; -1: the units have none."""
    last = units.shape[0] - 1
    return last if units[last, KIND] == WHEEL and units[last, ROLE] == BUS else -1


@inlined
def motor_power(X: Array, units: Array) -> float:
    """Return the electrical power of all wheel motors in W, negative when they give back."""
    power = 0.0
    for i in range(units.shape[0]):
        if units[i, KIND] == WHEEL and units[i, ROLE] == MOTOR:
            power += X[3 + 2 * i] * (units[i, RESISTANCE] * X[3 + 2 * i] + units[i, BACK_EMF] * X[2 + 2 * i])
    return power


@inlined
def bus_voltage(X: Array, power: float, units: Array, bus: int) -> float:
    """Return the bus voltage in V. A bus that cannot give back stands above V₀ while its capacitor holds energy."""
    if units[bus, TAKES_BACK] == 0.0 and (X[2 + 2 * bus] > 0.0 or power < 0.0):
        return float(capacitor_voltage(X[2 + 2 * bus], units[bus, BUS_VOLTAGE], units[bus, CAPACITANCE]))
    return float(sagging_voltage(power, units[bus, BUS_VOLTAGE], units[bus, SOURCE_OHMS]))


@inlined
def put_voltage(X: Array, bus: int, live: Array) -> tuple[float, float]:
    """Write the bus voltage into every motor's row; return (the motors' power in W, the voltage in V)."""
    power = float(motor_power(X, live))
    volts = bus_voltage(X, power, live, bus)
    for i in range(bus):
        if live[i, KIND] == WHEEL:
            live[i, BUS_VOLTAGE] = volts
    return power, volts


@inlined
def share_bus(X: Array, power: float, volts: float, bus: int, live: Array, slopes: Array, met: Flags, inputs: Array) -> None:
    """Cut the currents the motors head for to what the bus gives and takes, all alike; put the bus's own rates.

    Motors that draw share the supply's current limit, motors that brake what the bus takes back.
    """
    takes_back = live[bus, TAKES_BACK] != 0.0
    most = live[bus, SOURCE_POWER]
    back = np.inf if takes_back else power_taken_back(volts, live[bus, OVERVOLTAGE], live[bus, BRAKE_OHMS],
                                                      live[bus, CAPACITANCE])
    met[bus] = outcome.NO_LIMIT
    if most < np.inf or back < np.inf:
        cut_currents(X, bus, live, most, back, slopes, met)
    inputs[bus], slopes[bus] = 0.0, 0.0
    for i in range(bus):
        motor = live[i, KIND] == WHEEL and live[i, ROLE] == MOTOR and met[i] != outcome.UNREGULATED
        if motor and abs(live[i, BACK_EMF] * X[2 + 2 * i]) > volts * (1.0 + SLACK):
            met[i] = outcome.FORCED
    if takes_back:
        return
    burnt = brake_power(volts, live[bus, OVERVOLTAGE], live[bus, BRAKE_OHMS])
    above = X[2 + 2 * bus] > 0.0
    gained = 0.0
    if above or power < 0.0:
        gained = -power - burnt if above else max(-power - burnt, 0.0)
    inputs[bus], slopes[bus] = gained, burnt


@inlined
def cut_currents(X: Array, bus: int, live: Array, most: float, back: float, slopes: Array, met: Flags) -> None:
    """Scale the target currents so that their power stays between -back and `most`."""
    heat_drawn, push_drawn, heat_given, push_given = 0.0, 0.0, 0.0, 0.0
    for i in range(bus):
        if live[i, KIND] == WHEEL and live[i, ROLE] == MOTOR:
            heat, push = target_power(X, i, live, slopes)
            if heat + push >= 0.0:
                heat_drawn, push_drawn = heat_drawn + heat, push_drawn + push
            else:
                heat_given, push_given = heat_given + heat, push_given + push
    drawn, given = heat_drawn + push_drawn, heat_given + push_given
    if drawn + given > most * (1.0 + SLACK):
        drawing, scale = True, scale_to(heat_drawn, push_drawn, given, most)
        met[bus] = outcome.SUPPLY
    elif drawn + given < -back * (1.0 + SLACK):
        drawing, scale = False, scale_to(heat_given, push_given, drawn, -back)
        met[bus] = outcome.OVERVOLTAGE
    else:
        return
    for i in range(bus):
        if live[i, KIND] == WHEEL and live[i, ROLE] == MOTOR:
            heat, push = target_power(X, i, live, slopes)
            if (heat + push >= 0.0) == drawing:
                target = X[3 + 2 * i] + slopes[i] / live[i, CURRENT_LAG]
                slopes[i] = live[i, CURRENT_LAG] * (scale * target - X[3 + 2 * i])


@inlined
def target_power(X: Array, i: int, live: Array, slopes: Array) -> tuple[float, float]:
    """Return (heat, power against the back-EMF) in W at the current motor i heads for."""
    target = X[3 + 2 * i] + slopes[i] / live[i, CURRENT_LAG]
    return live[i, RESISTANCE] * target * target, live[i, BACK_EMF] * X[2 + 2 * i] * target
