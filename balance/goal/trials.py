"""What happens to the machine in a trial. Parts of one trial act together.

Lean is measured from the balanced lean; `toward` says which way a push, torque, start, shift, release or
swing goes: positive values in the file mean "in that direction", and `both` runs the trial twice.
"""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import Shape, choice, place, quantity, section

TOWARD = ("both", "outward", "inward")


@dataclass(frozen=True)
class Push:
    """A short push; `for` 0 s is an instantaneous impulse. `height` is above the contact line."""

    impulse: float = quantity("impulse", least=0)
    height: float = quantity("length", above=0)
    toward: str = choice(TOWARD, default="both")
    start: float = quantity("time", least=0, default=0.1, written="from")
    lasts: float = quantity("time", least=0, default=0.0, written="for")


@dataclass(frozen=True)
class TorqueStep:
    """A torque about the line; `for` left out: it stays."""

    step: float = quantity("torque")
    start: float = quantity("time", least=0, default=0.1, written="from")
    lasts: float | None = quantity("time", above=0, default=None, written="for")
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class Start:
    """The trial begins leaning, and moving."""

    lean: float = quantity("angle", default=0.0)
    lean_rate: float = quantity("angular speed", default=0.0)
    stored: float = quantity("momentum", default=0.0, says="momentum about the line, already in the units")
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class OffsetShift:
    """The centre of mass moves across the line (payload slips), and stays."""

    shift: float = quantity("length")
    at: float = quantity("time", least=0, default=0.1)
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class LiftOff:
    """The third foot lets go: until then it carries the machine, from then on the two feet do.

    The machine is released with a lean error and a lean-rate error; `stored` is what the step before left
    behind. Before release the controller runs but its output is held at zero.
    """

    lean: float = quantity("angle", default=0.0)
    lean_rate: float = quantity("angular speed", default=0.0)
    stored: float = quantity("momentum", default=0.0)
    at: float = quantity("time", least=0, default=0.0)
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class Swing:
    """Reaction of the swinging leg: one full sine of torque (out and back), or [time, torque] points."""

    peak: float | None = quantity("torque", default=None)
    lasts: float | None = quantity("time", above=0, default=None, written="for")
    start: float = quantity("time", least=0, default=0.1, written="from")
    points: tuple[tuple[float, float], ...] | None = place(
        Shape("list", items=Shape("list", length=2, each=(Shape("quantity", "time", least=0),
                                                          Shape("quantity", "torque")))), None)
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class Trial:
    """One trial of the design file; whatever is given acts together."""

    push: Push | None = section(Push, default=None)
    torque: TorqueStep | None = section(TorqueStep, default=None)
    start: Start | None = section(Start, default=None)
    offset: OffsetShift | None = section(OffsetShift, default=None)
    lift_off: LiftOff | None = section(LiftOff, default=None)
    swing: Swing | None = section(Swing, default=None)
    lasts: float = quantity("time", above=0, default=5.0, says="simulated time", written="for")
    touch_down: str = choice(["refused", "allowed"], default="refused", says="may the lifted foot touch")
