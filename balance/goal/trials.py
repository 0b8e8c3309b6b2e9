"""What happens to the machine in a trial. Parts of one trial act together.

Lean is measured from the balanced lean; `toward` says which way a push, torque, start, shift, release or
swing goes: positive values in the file mean "in that direction", and `both` runs the trial twice.  What makes a
trial harder without pushing anybody (a weak supply, missed samples) is in `goal.troubles`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from balance.files.fields import Shape, choice, place, quantity, section, text
from balance.goal.troubles import Jitter, Missed, SupplyDrop

TOWARD = ("both", "outward", "inward")


@dataclass(frozen=True)
class Push:
    """A short push; `for` 0 s is an instantaneous impulse. `height` is above the contact line.

    Only a push that lasts is felt by the feet: a blow of no duration would need a force without bound under them.
    """

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
class Ramp:
    """A torque about the line that grows evenly from nothing over `for`, and stays."""

    to: float = quantity("torque")
    lasts: float = quantity("time", above=0, written="for")
    start: float = quantity("time", least=0, default=0.1, written="from")
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class Gusts:
    """A measured torque over time, read from a sheet of columns (`goal.gusts` fills `points`).

    The columns are `time [s]` and either `torque [N*m]` about the line or `force [N]` at `height` above it; straight
    lines between the rows, nothing before the first and after the last.
    """

    file: str = text(says="path of a .csv file, from this file's folder")
    height: float | None = quantity("length", above=0, default=None, says="of a `force` above the contact line")
    start: float = quantity("time", least=0, default=0.0, written="from")
    toward: str = choice(TOWARD, default="both")
    points: tuple[tuple[float, float], ...] = field(default=(), metadata={"shape": None})    # s, N·m
    lever: float = field(default=math.inf, metadata={"shape": None})    # m, of a force; inf: a torque is stated


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
class Payload:
    """A load is put on (mass above 0) or taken off (below 0) at a place of the machine.

    It comes at rest and leaves with the machine's speed. `height` is above the contact line, `across` counts toward
    `toward`; along the line it stands at the centre of mass.
    """

    mass: float = quantity("mass")
    height: float = quantity("length", above=0)
    across: float = quantity("length", default=0.0)
    at: float = quantity("time", least=0, default=0.1)
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class Slope:
    """The ground gives way or rises in a step.

    `along` the line: one foot sinks, and less (or more) of the weight acts about the line. `across`: the ground rises
    toward `toward`; the lifted foot meets it sooner or later, foot balls roll on it, and the feet need more friction. Two
    point feet lean no differently on a slope across their line.
    """

    along: float = quantity("angle", above=-0.7853981633974483, below=0.7853981633974483, default=0.0)
    across: float = quantity("angle", above=-0.7853981633974483, below=0.7853981633974483, default=0.0)
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


def _over_time(dimension: str, says: str) -> Shape:
    """Return the shape of a list of [time, value] points."""
    pair = (Shape("quantity", "time", least=0), Shape("quantity", dimension))
    return Shape("list", items=Shape("list", length=2, each=pair), says=says)


Table = tuple[tuple[float, float], ...]


@dataclass(frozen=True)
class Varies:
    """What legs or a load that move by themselves change over time, as [time, change] points from 0 on.

    Each is added to the stance's own value, straight between points, the last one stays: J (every rotor locked),
    G_s = m g h and G_c = m g δ, and a torque about the line. A changing J takes J̇ θ̇ from the lean. The feet's loads leave
    out the force that moves the centre of mass so.
    """

    inertia: Table | None = place(_over_time("inertia", "change of J over time"), None)
    height_moment: Table | None = place(_over_time("torque", "change of m*g*height over time"), None)
    offset_moment: Table | None = place(_over_time("torque", "change of m*g*offset over time"), None)
    torque: Table | None = place(_over_time("torque", "torque about the line over time"), None)
    start: float = quantity("time", least=0, default=0.1, written="from")
    toward: str = choice(TOWARD, default="both")


@dataclass(frozen=True)
class Trial:
    """One trial of the design file; whatever is given acts together."""

    push: Push | None = section(Push, default=None)
    torque: TorqueStep | None = section(TorqueStep, default=None)
    ramp: Ramp | None = section(Ramp, default=None)
    gusts: Gusts | None = section(Gusts, default=None)
    start: Start | None = section(Start, default=None)
    offset: OffsetShift | None = section(OffsetShift, default=None)
    payload: Payload | None = section(Payload, default=None)
    slope: Slope | None = section(Slope, default=None)
    lift_off: LiftOff | None = section(LiftOff, default=None)
    swing: Swing | None = section(Swing, default=None)
    varies: Varies | None = section(Varies, default=None)
    supply: SupplyDrop | None = section(SupplyDrop, default=None)
    missed: Missed | None = section(Missed, default=None)
    jitter: Jitter | None = section(Jitter, default=None)
    lasts: float = quantity("time", above=0, default=5.0, says="simulated time", written="for")
    touch_down: str = choice(["refused", "allowed"], default="refused", says="may the lifted foot touch")
