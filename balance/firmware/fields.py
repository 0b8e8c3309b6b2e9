"""The numbers a caller fills in, in the order the reading has them in C."""

from __future__ import annotations

from dataclasses import dataclass

from balance.firmware.describe import LARGEST_ACCELERATION, LARGEST_RATE
from balance.firmware.program import DIRECT, Program


@dataclass(frozen=True)
class Field:
    """One number of the reading. `says` for the header; `most` in SI: beyond ± this the reading is refused."""

    name: str
    unit: str
    says: str
    most: float


def fields_of(program: Program) -> tuple[Field, ...]:
    """Return every number of the reading: the direct ones, then the sensor's three accelerations and three rates, if any."""
    out = [
        Field(r.field, r.unit, r.name.replace("_", " ").replace(".", ": "), r.most)
        for r in program.readings
        if r.kind == DIRECT
    ]
    if program.inertial:
        out += [
            Field(f"accel_{axis}_m_s2", "m/s^2", f"specific force along the trunk's {axis} axis", LARGEST_ACCELERATION)
            for axis in "xyz"
        ]
        out += [
            Field(f"gyro_{axis}_rad_s", "rad/s", f"turn rate about the trunk's {axis} axis", LARGEST_RATE)
            for axis in "xyz"
        ]
    return tuple(out)
