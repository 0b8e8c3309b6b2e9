"""What makes a trial harder without moving the machine: a weak supply, samples that are missed, commands that are late."""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import Shape, number, place, quantity


@dataclass(frozen=True)
class SupplyDrop:
    """The supply's own voltage falls to a share of itself; `for` left out: it stays there."""

    falls_to: float = number(above=0, below=1, says="share of the voltage that is left")
    start: float = quantity("time", least=0, default=0.1, written="from")
    lasts: float | None = quantity("time", above=0, default=None, written="for")


@dataclass(frozen=True)
class Missed:
    """Samples that the controller does not take: the last command stays, the law's memory stands still.

    Either so many in a row, or a share of all, drawn anew for every sample.
    """

    samples: int | None = place(Shape("whole", least=1, most=1000), None)
    share: float | None = number(above=0, below=1, default=None, says="of the samples, at random")
    start: float = quantity("time", least=0, default=0.1, written="from")
    lasts: float | None = quantity("time", above=0, default=None, written="for")


@dataclass(frozen=True)
class Jitter:
    """Each command comes later than the loop's latency by a time drawn evenly between nothing and `up_to`."""

    up_to: float = quantity("time", above=0)
    start: float = quantity("time", least=0, default=0.0, written="from")
    lasts: float | None = quantity("time", above=0, default=None, written="for")
