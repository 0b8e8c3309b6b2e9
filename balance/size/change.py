"""The same question with one thing a little different: what may be chosen, or what must be kept in hand."""

from __future__ import annotations

from dataclasses import replace

from balance.goal.sizing import Sizing
from balance.machine.machine import Machine
from balance.size.question import Question, question


def _resized(asked: Question, sizing: Sizing) -> Question:
    goal = replace(asked.goal, size=sizing)
    return question(asked.machine, goal, asked.stances, asked.parts)


def more_voltage(asked: Question, factor: float) -> Question | None:
    """Return the question with more supply voltage; None without a supply."""
    machine: Machine = asked.machine
    if machine.supply is None:
        return None
    supply = replace(machine.supply, voltage=factor * machine.supply.voltage)
    return replace(asked, machine=replace(machine, supply=supply))


def more_diameter(asked: Question, factor: float) -> Question:
    """Return the question with more room across."""
    space = replace(asked.sizing.space, diameter=factor * asked.sizing.space.diameter)
    return _resized(asked, replace(asked.sizing, space=space))


def more_length(asked: Question, factor: float) -> Question:
    """Return the question with more room along the axis."""
    space = replace(asked.sizing.space, length=factor * asked.sizing.space.length)
    return _resized(asked, replace(asked.sizing, space=space))


def more_speed(asked: Question, factor: float) -> Question:
    """Return the question with a higher top speed."""
    return _resized(asked, replace(asked.sizing, top_speed=factor * asked.sizing.top_speed))


def more_mass(asked: Question, factor: float) -> Question:
    """Return the question with more mass allowed."""
    return _resized(asked, replace(asked.sizing, most_mass=factor * asked.sizing.most_mass))


def less_safety(asked: Question, factor: float) -> Question:
    """Return the question with a smaller safety factor, at least 1."""
    return _resized(asked, replace(asked.sizing, safety=max(asked.sizing.safety / factor, 1.0)))
