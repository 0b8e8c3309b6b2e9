"""From a machine to its plants, one for each stance."""

from __future__ import annotations

from balance.api.load import FELL
from balance.machine.machine import Machine
from balance.plant.build import build_plant
from balance.plant.record import Plant
from balance.stance.build import build_stance


def plant(machine: Machine, stances: tuple[str, ...], fell: float = FELL) -> tuple[Plant, ...]:
    """Build the plant of each stance named; `fell` is the lean in rad beyond which the machine fell.

    Raises InputError where a leg cannot reach or two feet stand in one place.
    """
    return tuple(build_plant(machine, build_stance(machine, name), fell) for name in stances)
