"""Parts files: motors, gimbal drives and rotor materials to choose from; the starter file and the person's own."""

from __future__ import annotations

import os
from dataclasses import dataclass, fields

from balance.base.errors import InputError, Problem
from balance.files.document import load
from balance.files.fields import Shape, number, place, quantity, table, text
from balance.files.reader import read
from balance.goal.goal import Goal
from balance.machine.materials import STOCK, Material
from balance.machine.motors import Motor


@dataclass(frozen=True, kw_only=True)
class StockMotor(Motor):
    """A motor one can have, with what it weighs and how it is cooled."""

    mass: float = quantity("mass", above=0, says="stator, housing and rotor")
    thermal: float = number(above=0, default=3.0, says="winding to ambient, kelvin per watt")
    hottest: float = number(above=0, default=80.0, says="rise of the winding that is allowed, kelvin")


@dataclass(frozen=True)
class StockDrive:
    """A gimbal drive with its gear, encoder and bearing."""

    mass: float = quantity("mass", above=0)
    torque: float = quantity("torque", above=0)
    rate: float = quantity("angular speed", above=0)
    bandwidth: float = quantity("frequency", above=0)
    angle: float = quantity("angle", above=0, below=1.5707963)


@dataclass(frozen=True)
class Parts:
    """One parts file, or several together."""

    format: int = place(Shape("whole", least=1, most=1, says="1"))
    parts: str = text(says="the list's name")
    motors: dict[str, StockMotor] | None = table(StockMotor, default=None)
    drives: dict[str, StockDrive] | None = table(StockDrive, default=None)
    materials: dict[str, Material] | None = table(Material, default=None)


def read_parts(goal: Goal) -> Parts:
    """Return the parts of every file that the design file names; a later file's word goes before an earlier one's.

    Raises InputError for a file that is not there or wrong, and where no motor is left; no material listed: the stock.
    """
    assert goal.size is not None
    found = [read(load(os.path.normpath(os.path.join(os.path.dirname(goal.source), path))), Parts)
             for path in goal.size.parts]
    whole = Parts(1, " + ".join(p.parts for p in found),
                  {k: v for p in found for k, v in (p.motors or {}).items()},
                  {k: v for p in found for k, v in (p.drives or {}).items()},
                  {k: v for p in found for k, v in (p.materials or {}).items()} or STOCK)
    if not whole.motors:
        line, column = goal.marks.get("size.parts", (0, 0))
        raise InputError([Problem(goal.source, line, column, "size.parts", "lists without a motor",
                                  "at least one motor", "start from plants/parts/starter.yaml")])
    return whole


def bare(motor: StockMotor) -> Motor:
    """Return the motor as a machine file has it."""
    return Motor(**{f.name: getattr(motor, f.name) for f in fields(Motor)})
