"""What was measured of the machine as built: weighings at its feet and swing tests, each with its uncertainty.

All of it is of the whole machine in the pose of one stance, rotors locked. Uncertainties are standard ones (one sigma).
"""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import Shape, direction, place, quantity, table, text, vector
from balance.machine.solids import Vector


@dataclass(frozen=True)
class Weighing:
    """What a scale shows under each foot. `turn`: how the machine with its feet was tilted as a whole."""

    loads: dict[str, float] = place(Shape("table", items=Shape("quantity", "mass", above=0.0)))
    uncertainty: float = quantity("mass", above=0, says="of each scale")
    turn: Vector = vector("angle", default=(0.0, 0.0, 0.0))


@dataclass(frozen=True)
class Hanging:
    """`kind: hanging`: swung about a pivot line along `about`, `arm` from the centre of mass."""

    about: Vector = direction()
    arm: float = quantity("length", above=0)
    period: float = quantity("time", above=0)
    uncertainty: float = quantity("time", above=0, says="of the period")
    arm_uncertainty: float = quantity("length", least=0, default=0.0)


@dataclass(frozen=True)
class Bifilar:
    """`kind: bifilar`: hung from two equal parallel wires, turning about the vertical, `about` in the trunk's frame."""

    about: Vector = direction()
    arms: tuple[float, float] = place(Shape("list", items=Shape("quantity", "length", above=0.0), length=2))
    length: float = quantity("length", above=0)
    period: float = quantity("time", above=0)
    uncertainty: float = quantity("time", above=0, says="of the period")
    arm_uncertainty: float = quantity("length", least=0, default=0.0)


@dataclass(frozen=True)
class Trifilar:
    """`kind: trifilar`: hung from three equal parallel wires at `radius` around the centre of mass."""

    about: Vector = direction()
    radius: float = quantity("length", above=0)
    length: float = quantity("length", above=0)
    period: float = quantity("time", above=0)
    uncertainty: float = quantity("time", above=0, says="of the period")
    arm_uncertainty: float = quantity("length", least=0, default=0.0)


Swing = Hanging | Bifilar | Trifilar

_SWINGS: dict[str, type] = {"hanging": Hanging, "bifilar": Bifilar, "trifilar": Trifilar}


@dataclass(frozen=True)
class Measured:
    """Bench results that go before CAD. `pose`: the stance in whose pose all of it was measured."""

    pose: str = text(says="a stance's name")
    weighings: dict[str, Weighing] | None = table(Weighing, default=None)
    swings: dict[str, Swing] | None = place(
        Shape("table", items=Shape("variant", variants=tuple(_SWINGS.items()), by="kind")), None)
