"""What a stabiliser that is still to be chosen may be: the section `size` of a design file."""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import Shape, choice, number, place, quantity, section, vector

FAMILIES = ("reaction wheel", "scissored pair", "gimballed flywheel")
GRADES = {"G1": 1e-3, "G2.5": 2.5e-3, "G6.3": 6.3e-3, "G16": 16e-3}
"""m/s: e·ω of the balance grades of ISO 21940-11."""

Vector = tuple[float, float, float]


@dataclass(frozen=True)
class Space:
    """The room one rotor may take, without its guard."""

    diameter: float = quantity("length", above=0)
    length: float = quantity("length", above=0, says="along the spin axis")


@dataclass(frozen=True)
class Sizing:
    """`size:`; read by `balance size` only.

    `replaces` names parts of the body that come out with the present stabiliser (stators, a turntable); in a `lumped`
    machine `replaced_mass`, at the same height, does.  `phase`: how long the machine stands on two feet in one step.
    """

    space: Space = section(Space)
    parts: tuple[str, ...] = place(Shape("list", items=Shape("text"), says="paths of parts files, from this file's folder"))
    safety: float = number(least=1, default=1.25, says="factor on the quantity that binds")
    families: tuple[str, ...] = place(Shape("list", items=Shape("choice", choices=FAMILIES)), FAMILIES)
    most_mass: float = quantity("mass", above=0, default=float("inf"), says="of all that is added")
    top_speed: float = quantity("angular speed", above=0, default=1047.1975511965977, says="of any rotor")
    at: Vector | None = vector("length", default=None, says="centre of the stabiliser, trunk frame; left out: as now")
    phase: float = quantity("time", above=0, default=1.0)
    offset_error: float = quantity("length", least=0, default=0.0, says="of the centre of mass, for a whole phase")
    replaces: tuple[str, ...] = place(Shape("list", items=Shape("text")), ())
    replaced_mass: float = quantity("mass", least=0, default=0.0)
    overspeed: float = number(least=1, default=1.2, says="rotor stress is taken at this times the top speed")
    strength_safety: float = number(least=1, default=2.0, says="yield strength over the stress at overspeed")
    balance_grade: str = choice(tuple(GRADES), default="G6.3", says="of ISO 21940-11")
    battery: float = quantity("charge", above=0, default=float("inf"), says="charge at the supply's voltage")
