"""Motors, gears and the supply, as the machine file states them (SI)."""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import choice, flag, number, quantity


@dataclass(frozen=True)
class Motor:
    """One motor type. Line values, peak of the sinusoid, unless the file says `phase` or `rms`."""

    torque_constant: float = quantity("torque constant", above=0, says="N·m per ampere")
    resistance: float = quantity("resistance", above=0)
    peak_current: float = quantity("current", above=0)
    continuous_current: float = quantity("current", above=0)
    rotor_inertia: float = quantity("inertia", least=0, default=0.0)
    inductance: float = quantity("inductance", least=0, default=0.0)
    bandwidth: float = quantity("frequency", above=0, default=300.0, says="of the current loop, in Hz")
    values: str = choice(["line", "phase"], default="line", says="of two terminals, or to the star point")
    amplitude: str = choice(["peak", "rms"], default="peak", says="of the current it is stated for")


@dataclass(frozen=True)
class Gear:
    """A reduction between motor and wheel: motor turns `ratio` times per turn of the wheel."""

    ratio: float = number(above=0, default=1.0)
    sense: str = choice(["same", "reversed"], default="same")
    efficiency: float = number(above=0, most=1, default=1.0)
    includes_rotor: bool = flag(default=False, says="the wheel's inertia already holds the rotor's")
    backlash: float = quantity("angle", least=0, default=0.0, says="play at the wheel, from flank to flank")
    tooth_stiffness: float | None = quantity(
        "angular stiffness", above=0, default=None, says="at the wheel; left out: peak torque winds up a tenth of the play")


@dataclass(frozen=True)
class Supply:
    """Battery or mains supply."""

    voltage: float = quantity("voltage", above=0)
    resistance: float = quantity("resistance", least=0, default=0.0)
    peak_current: float = quantity("current", above=0, default=float("inf"))
    regenerates: bool = flag(default=True, says="takes current back when a wheel brakes")
    capacitance: float = quantity("capacitance", least=0, default=0.0)
    overvoltage: float = quantity(
        "voltage", above=0, default=float("inf"), says="where the brake resistor or the fuse acts")
    brake_resistor: float = quantity("resistance", least=0, default=0.0, says="0 ohm: none fitted")
