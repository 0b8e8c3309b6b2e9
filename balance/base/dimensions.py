"""The dimensions a file may ask for: how each may be written, and an example to show.

Where usage differs about the radian (a stiffness as N·m/rad or N·m) both are accepted; where mixing would
hide a mistake (a frequency for an angular speed) neither passes for the other.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Dimension:
    """One kind of quantity.

    `units` are accepted, the first is the SI unit kept inside; `inverse` are units in which the reciprocal is
    customarily stated (a motor's rpm/V); `example` is shown to whoever forgot the unit.
    """

    name: str
    units: tuple[str, ...]
    example: str
    inverse: tuple[str, ...] = ()

    @property
    def article(self) -> str:
        """The name with its article: "a length", "an inertia"."""
        return ("an " if self.name[0] in "aeiou" else "a ") + self.name


_ALL = (
    Dimension("length", ("m",), "120 mm"),
    Dimension("mass", ("kg",), "1.9 kg"),
    Dimension("time", ("s",), "2 ms"),
    Dimension("current", ("A",), "18 A"),
    Dimension("angle", ("rad",), "3 deg"),
    Dimension("frequency", ("Hz",), "500 Hz"),
    Dimension("angular speed", ("rad/s",), "4500 rpm"),
    Dimension("speed", ("m/s",), "0.4 m/s"),
    Dimension("acceleration", ("m/s^2",), "9.80665 m/s^2"),
    Dimension("area", ("m^2",), "20 cm^2"),
    Dimension("density", ("kg/m^3",), "2700 kg/m^3"),
    Dimension("inertia", ("kg*m^2",), "900 g*cm^2"),
    Dimension("force", ("N",), "25 N"),
    Dimension("impulse", ("N*s",), "0.5 N*s"),
    Dimension("torque", ("N*m",), "0.35 N*m"),
    Dimension("angular stiffness", ("N*m/rad", "N*m"), "12 N*m/rad"),
    Dimension("angular damping", ("N*m*s/rad", "N*m*s"), "0.002 N*m*s/rad"),
    Dimension("momentum", ("N*m*s", "kg*m^2*rad/s"), "0.25 N*m*s"),
    Dimension("torque constant", ("N*m/A", "V*s/rad"), "60 mN*m/A", inverse=("rad/s/V",)),
    Dimension("voltage", ("V",), "24 V"),
    Dimension("resistance", ("ohm",), "0.4 ohm"),
    Dimension("inductance", ("H",), "150 uH"),
    Dimension("capacitance", ("F",), "2200 uF"),
    Dimension("charge", ("A*s",), "5000 mAh"),
    Dimension("power", ("W",), "60 W"),
    Dimension("stress", ("Pa",), "250 MPa"),
    Dimension("gyro noise", ("rad/s/sqrt(Hz)",), "0.005 deg/s/sqrt(Hz)"),
    Dimension("torque noise", ("N*m/sqrt(Hz)",), "0.02 N*m/sqrt(Hz)"),
    Dimension("rate drift", ("rad/s/sqrt(s)",), "0.001 deg/s/sqrt(s)"),
    Dimension("angle drift", ("rad/sqrt(s)",), "0.05 deg/sqrt(s)"),
    Dimension("acceleration noise", ("m/s^2/sqrt(Hz)",), "120 ug/sqrt(Hz)"),
)

DIMENSIONS = {d.name: d for d in _ALL}

IN_GRAVITIES = ("acceleration", "acceleration noise")
"""Dimensions in which `g`, `mg` and `ug` mean standard gravity, not the gram."""
