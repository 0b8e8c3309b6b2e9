"""The law as a list of sums: the one description that the C writers and the Python models of the arithmetic both read.

Every sample: readings are taken (or refused), then each row is worked out in this order, every term in the order it has::

    line    v  = Σ gain · memory + Σ gain · reading          clipped to ± the line limit
    moves   x⁺ = Σ gain · memory + Σ gain · reading + gain · v
    inputs  u  = gain · v + Σ gain · reading                 clipped to ± each unit's limit, then shared out
"""

from __future__ import annotations

from dataclasses import dataclass

READING, MEMORY, LINE = "reading", "memory", "line"

DIRECT, TILT, RATE = "direct", "tilt", "rate"
"""How a reading is made: a field of its own, the accelerometer's tilt about the line, the gyro's rate about it."""


@dataclass(frozen=True)
class Reading:
    """One measurement of the law. `rest`: what it is counted from, one value per stance."""

    name: str  # of the law
    field: str  # in C; empty where it is made from the inertial sensor
    unit: str
    kind: str  # DIRECT | TILT | RATE
    most: float  # SI: beyond ± this it is refused
    rest: tuple[float, ...]


@dataclass(frozen=True)
class Memory:
    """One number the law remembers from sample to sample; `most`: no admissible readings take it further (inf: unknown)."""

    name: str
    unit: str
    most: float


@dataclass(frozen=True)
class Term:
    """gain · source, one gain per stance."""

    source: str  # READING | MEMORY | LINE
    place: int
    gains: tuple[float, ...]


@dataclass(frozen=True)
class Row:
    """One sum. `says` is what it stands for, `unit` its unit, `limits` one per stance (inf: none)."""

    name: str
    says: str
    unit: str
    terms: tuple[Term, ...]
    limits: tuple[float, ...]


@dataclass(frozen=True)
class Window:
    """What a wheel's motor can give at its speed: each end of stall · (±1) − slope · speed, clipped into ± most."""

    reading: int  # its speed
    stall: float  # N·m at the supply's nominal voltage
    slope: float  # N·m·s/rad
    most: float  # N·m


@dataclass(frozen=True)
class Program:
    """One design as firmware. Unit vectors of each stance are in the trunk's axes (x forward, y left, z up)."""

    prefix: str  # of every C name
    design: str
    machine: str
    kind: str  # "lqr" | "pid"
    stances: tuple[str, ...]
    sample_time: float  # s
    latency: float  # s
    patience: int  # samples without a good reading before the output goes safe
    gravity: float  # m/s²
    readings: tuple[Reading, ...]
    memory: tuple[Memory, ...]
    line: Row
    moves: tuple[Row, ...]
    held_moves: tuple[Row, ...]  # in their place while the machine is held; empty: the same
    inputs: tuple[Row, ...]
    units: tuple[str, ...]
    line_share: tuple[tuple[float, ...], ...]  # per unit, per stance: torque about the line per input
    windows: tuple[Window | None, ...]  # per unit
    axes: tuple[tuple[tuple[float, ...], ...], ...]  # per stance: e, u, w, three numbers each
    tool: str  # name and version of what wrote it
    seal: str  # SHA-256 over the whole description

    @property
    def inertial(self) -> bool:
        """Whether the readings come from an inertial sensor's six axes."""
        return any(reading.kind != DIRECT for reading in self.readings)

    @property
    def period_us(self) -> int:
        """Sample period in whole microseconds."""
        return round(self.sample_time * 1e6)
