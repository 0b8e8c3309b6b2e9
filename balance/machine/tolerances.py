"""How far the machine as built may differ from its file: what the margins must survive.

Shares are either way of the stated value (0.05: ±5 %).  Delay belongs to the loop: the design file states its range.
"""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import number, quantity, section


@dataclass(frozen=True)
class PairMismatch:
    """The two flywheels of a scissored pair against each other, either way."""

    momentum: float = number(least=0, below=1, default=0.0, says="share by which each differs from their mean; 0.02 is 2 %")
    angle: float = quantity("angle", least=0, below=0.5, default=0.0, says="by which each gimbal is off the mirrored pose")


@dataclass(frozen=True)
class Tolerances:
    """Either way of what the file states; what is left out is taken as exact.

    `voltage` moves the bandwidth of the motors' current loops: a regulator that sets the duty has the supply in its gain.
    """

    mass: float = number(least=0, below=0.9, default=0.0, says="share of the whole machine; 0.03 is ±3 %")
    height: float = quantity("length", least=0, default=0.0, says="of the centre of mass above the line")
    offset: float = quantity("length", least=0, default=0.0, says="of the centre of mass across the line")
    inertia: float = number(least=0, below=0.9, default=0.0, says="share, about the line; 0.05 is ±5 %")
    torque_constant: float = number(least=0, below=0.9, default=0.0, says="share, each motor for itself; 0.08 is ±8 %")
    voltage: float = number(least=0, below=0.9, default=0.0, says="share of the supply; 0.15 is ±15 %")
    bandwidth: float = number(least=0, below=0.9, default=0.0, says="share of current loops and servos; 0.2 is ±20 %")
    leg_stiffness: float = number(least=0, below=0.9, default=0.0, says="share of `leg_compliance`'s; 0.3 is ±30 %")
    flywheel_momentum: float = number(least=0, below=0.9, default=0.0, says="share, speed times inertia; 0.03 is ±3 %")
    pair_mismatch: PairMismatch | None = section(PairMismatch, default=None)
