"""What every candidate of a grid can do about every contact line, by the closed forms of `plant.limits` on columns."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf, pi

import numpy as np
from numpy.typing import NDArray

from balance.goal.goal import Goal
from balance.goal.sizing import Sizing
from balance.machine.machine import Machine
from balance.machine.motors import Gear
from balance.machine.stabilisers import ReactionWheel, Rotor
from balance.plant.motors import drive_of
from balance.size.candidate import GEARED, PAIR, TABLE, WHEEL, centre, without
from balance.size.demand import Seen, demands, total_delay
from balance.size.grid import Grid
from balance.size.parts import Parts, bare
from balance.stance.build import build_stance

Array = NDArray[np.float64]


@dataclass(frozen=True)
class BareLine:
    """One contact line of the machine without any stabiliser, and where one would sit above it."""

    name: str
    axis_T: Array         # (3,) the line in the trunk's axes
    mass: float
    height: float
    offset: float
    inertia: float        # kg·m² about the line
    gravity: float        # m/s², along the line's slope taken off
    up: float             # m, of the stabiliser's centre above the line
    out: float            # m, outward of it
    friction: float


def bare_lines(machine: Machine, sizing: Sizing, stances: Sequence[str]) -> tuple[BareLine, ...]:
    """Return the contact lines of the machine with its stabilisers taken out."""
    weightless = ReactionWheel(rotor=Rotor(mass=1e-12, spin=1e-15, transverse=1e-15), motor="", at=centre(machine, sizing))
    empty = replace(without(machine, sizing), stabilisers={"none": weightless}, motors={})
    found = []
    for name in stances:
        s = build_stance(empty, name)
        arm = s.R_WT @ np.array(weightless.at) + s.p_WT - s.p_a_W
        found.append(BareLine(name, s.R_WT.T @ s.e_W, s.mass, s.height, s.offset, s.inertia_locked,
                              s.gravity * float(np.cos(s.slope)), float(arm @ s.u_W), float(arm @ s.w_W), s.friction))
    return tuple(found)


def parallel(lines: Sequence[BareLine]) -> int:
    """Return 1 where all lines run the same way over the trunk, else how many there are."""
    first = lines[0].axis_T
    return 1 if all(abs(float(first @ line.axis_T)) > 0.999 for line in lines) else len(lines)


def seen(line: BareLine, grid: Grid, count: int) -> Seen:
    """Return what a line sees of the machine with each candidate: its mass and height are fed back here."""
    m = line.mass + grid.added
    up = (line.mass * line.height + grid.added * line.up) / m
    out = (line.mass * line.offset + grid.added * line.out) / m
    J = line.inertia + grid.added * (line.up**2 + line.out**2)
    if grid.family == WHEEL:
        square = 1.0 - (_shares(line, count) ** 2)
        J = J + float(square.sum()) * grid.transverse        # a wheel turns with the body about what is square to it
    else:
        J = J + (2 if grid.family == PAIR else 1) * grid.transverse
        if count > 1:
            J = J + grid.added * TABLE / (1.0 + TABLE) * (1.5 * grid.diameter) ** 2 / 16.0
    height = np.hypot(up, out)
    return Seen(m, height, J, m * line.gravity * height)


def _shares(line: BareLine, count: int) -> Array:
    """Return |α| of each wheel: one along the trunk's x where all lines are parallel, else along x and y."""
    if count == 1:
        return np.array([1.0])
    return np.abs(line.axis_T[:2])


def discounted(grid: Grid, parts: Parts, machine: Machine, line: BareLine, pole: Array, count: int, less_speed: float = 1.0,
               less_torque: float = 1.0, used: float = 1.0) -> Array:
    """Return ∫ e^{−ps} T ds in N·m·s of each candidate's all-out manoeuvre about a line (n,).

    `less_speed` and `less_torque`: what is left of momentum and torque when the safety factor is taken off; `used`: the
    share of the momentum that may be stored (a wheel's speed, the sine of a gimbal's angle).
    """
    if grid.family == WHEEL:
        share = float(_shares(line, count).sum())
        return share * _wheels(grid, parts, machine, pole, less_speed * used, less_torque)
    stock = tuple((parts.drives or {}).values())
    rate, stop = (np.array([getattr(d, word) for d in stock])[grid.drive] for word in ("rate", "angle"))
    h = (2 if grid.family == PAIR else 1) * grid.spin * grid.speed * less_speed
    rate, stop = rate * less_torque, np.arcsin(used * np.sin(stop))
    inner = np.exp(-pole * stop / rate) * (rate * np.sin(stop) - pole * np.cos(stop)) + pole
    return np.asarray(h * rate * inner / (pole**2 + rate**2))


def _wheels(grid: Grid, parts: Parts, machine: Machine, pole: Array, less_speed: float, less_torque: float) -> Array:
    """Return the discounted momentum of one wheel of each candidate: constant torque, then the motor's line, to its top."""
    per_amp, emf, ohms, amps, _ = motor_columns(grid, parts, machine)
    volts = machine.supply.voltage if machine.supply is not None else inf
    own, coupled = geared_inertia(grid, parts)
    most = np.minimum(per_amp * np.minimum(amps, volts / ohms), inf) * less_torque
    if np.isinf(volts):
        held = grid.speed * less_speed * own / most
        return np.asarray(coupled / own * most * (1.0 - np.exp(-pole * held)) / pole)
    kink = (volts - ohms * most / per_amp) / emf
    free, top = volts / emf, grid.speed * less_speed
    decay = own * ohms / (per_amp * emf)
    held = np.minimum(top, kink) * own / most
    total = most * (1.0 - np.exp(-pole * held)) / pole
    rate = pole + 1.0 / decay
    left = np.clip((np.minimum(top, free) - kink) / np.maximum(free - kink, 1e-12), 0.0, 1.0)      # share of the line used
    tail = 1.0 - np.power(np.maximum(1.0 - left, 1e-300), rate * decay)
    total = total + most * np.exp(-pole * held) * tail / rate
    return np.asarray(coupled / own * total)


def motor_columns(grid: Grid, parts: Parts, machine: Machine) -> tuple[Array, Array, Array, Array, Array]:
    """Return (torque per ampere, back-EMF, resistance, current limit, motor's rotor) at the wheel of each candidate."""
    stock = tuple((parts.motors or {}).values())
    drives = [drive_of(bare(m), Gear(), machine.supply) for m in stock]
    k, r, amps = (np.array([getattr(d, w) for d in drives])[grid.motor] for w in ("back_emf", "resistance", "current_limit"))
    gain = np.where(grid.ratio > 1.0, GEARED, 1.0)
    return gain * grid.ratio * k, grid.ratio * k, r, amps, np.array([m.rotor_inertia for m in stock])[grid.motor]


def geared_inertia(grid: Grid, parts: Parts) -> tuple[Array, Array]:
    """Return (I + N² J_r, I + N J_r) in kg·m², (n,) each."""
    rotors = np.array([m.rotor_inertia for m in (parts.motors or {}).values()])[grid.motor]
    return grid.spin + grid.ratio**2 * rotors, grid.spin + grid.ratio * rotors


def _drive_torque(grid: Grid, parts: Parts) -> Array:
    """Return the gimbal drive's torque in N·m, (n,): it holds the flywheel against H times the body's lean rate."""
    return np.asarray(np.array([d.torque for d in (parts.drives or {}).values()])[grid.drive])


def delay(grid: Grid, parts: Parts, goal: Goal) -> Array:
    """Return how late each candidate acts in s, (n,)."""
    if grid.family == WHEEL:
        lags = 2.0 * pi * np.array([m.bandwidth for m in (parts.motors or {}).values()])[grid.motor]
    else:
        lags = 2.0 * pi * np.array([d.bandwidth for d in (parts.drives or {}).values()])[grid.drive]
    return np.asarray(total_delay(goal, 1.0) - 1.0 + 1.0 / lags)


def margin(grid: Grid, parts: Parts, machine: Machine, goal: Goal, lines: Sequence[BareLine]) -> tuple[Array, Array]:
    """Return (can ÷ must on the worst trial and line with the safety factor taken off, push in N·s on the worst line).

    The push is the largest at the height of the centre of mass that no controller could beat, safety left out.
    """
    can, holds, push = margins(grid, parts, machine, goal, lines)
    return np.minimum(can, holds), push


def margins(grid: Grid, parts: Parts, machine: Machine, goal: Goal, lines: Sequence[BareLine]) -> tuple[Array, Array, Array]:
    """Return the same with the margin parted: (momentum and torque, what gimbal drives hold against the body, push)."""
    assert goal.size is not None
    count = parallel(lines)
    used, less = goal.require.momentum_used or 1.0, 1.0 / goal.size.safety
    worst, holds, push = np.full(len(grid), inf), np.full(len(grid), inf), np.full(len(grid), inf)
    for line in lines:
        s = seen(line, grid, count)
        p = s.pole
        late = np.exp(p * delay(grid, parts, goal))
        can = discounted(grid, parts, machine, line, p, count, less, less, used)
        steady = goal.size.offset_error * s.stiffness / s.height * goal.size.phase
        for must in demands(goal, s).values():
            worst = np.minimum(worst, can / (must * late + steady))
            if grid.family != WHEEL:
                holds = np.minimum(holds, _drive_torque(grid, parts) * s.inertia / (grid.spin * grid.speed * must))
        push = np.minimum(push, discounted(grid, parts, machine, line, p, count) / late / s.height)
    return worst, holds, push
