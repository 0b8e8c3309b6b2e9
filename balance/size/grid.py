"""All stabilisers worth a look, as columns of numbers: shapes, materials, sizes, motors, gears, speeds, drives."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from math import pi

import numpy as np
from numpy.typing import NDArray

from balance.goal.sizing import Sizing
from balance.machine.motors import Gear, Supply
from balance.maths.discs import stresses
from balance.plant.motors import drive_of
from balance.size.candidate import BORE, FRAME, PAIR, TABLE, WHEEL, Candidate
from balance.size.parts import Parts, bare

Array = NDArray[np.float64]

SHAPES = (("disc", 0.0), ("ring", 0.5), ("ring", 0.7), ("rim and web", 0.7), ("rim and web", 0.8), ("rim and web", 0.88))
"""Shape and inner over outer diameter."""
GEARS = (1.0, 3.0, 5.0)
WHEEL_SIZES, GYRO_SIZES = (24, 14), (16, 10)
"""Diameters and lengths looked at; lengths are trimmed afterwards by simulation."""
SPINS = 8
"""Spin speeds of a flywheel."""
SMALLEST = 0.03
"""m, diameter."""
THINNEST = 2e-3
"""m, axial length."""


@dataclass(frozen=True)
class Grid:
    """Candidates of one family, (n,) each, SI; indices into the tuples of words beside them."""

    family: str
    shape: NDArray[np.int64]
    material: NDArray[np.int64]
    motor: NDArray[np.int64]
    drive: NDArray[np.int64]      # -1 for wheels
    diameter: Array
    length: Array
    web: Array
    ratio: Array
    speed: Array                  # top speed: the lowest of the person's limit, strength and the drive's own
    rotor_mass: Array             # kg, one rotor
    added: Array                  # kg, everything
    spin: Array                   # kg·m², one rotor about its axis
    transverse: Array             # kg·m², one rotor
    names: tuple[tuple[str, ...], tuple[str, ...], tuple[str, ...]]    # materials, motors, drives
    rotors: int = 1               # how many alike

    def __len__(self) -> int:
        return len(self.shape)

    def take(self, i: int) -> Candidate:
        """Return candidate `i` as a record."""
        shape, hollow = SHAPES[self.shape[i]]
        materials, motors, drives = self.names
        return Candidate(self.family, shape, materials[self.material[i]], float(self.diameter[i]), hollow,
                         float(self.length[i]), float(self.web[i]), motors[self.motor[i]], float(self.ratio[i]),
                         drives[self.drive[i]] if self.drive[i] >= 0 else "", float(self.speed[i]))


@cache
def shape_stress(shape: int, poisson: float) -> float:
    """Return peak stress ÷ (ρ ω² R²) of a shape; a rim's web is a fifth of its length, and both have a bore."""
    word, hollow = SHAPES[shape]
    if word == "disc":
        return stresses(np.array([BORE, 1.0]), np.ones(1), 1.0, poisson).peak
    if word == "ring":
        return stresses(np.array([hollow, 1.0]), np.ones(1), 1.0, poisson).peak
    return stresses(np.array([BORE, hollow, 1.0]), np.array([0.2, 1.0]), 1.0, poisson).peak


def strongest_speed(sizing: Sizing, parts: Parts, shape: Array, material: Array, diameter: Array) -> Array:
    """Return the top speed in rad/s at which overspeed times it still keeps the safety on the yield strength, (n,)."""
    assert parts.materials is not None
    stock = tuple(parts.materials.values())
    table = np.array([[np.sqrt(m.strength / (sizing.strength_safety * m.density * shape_stress(s, m.poisson)))
                       for m in stock] for s in range(len(SHAPES))])                   # rim speeds, m/s
    return np.asarray(table[shape, material] / (0.5 * diameter) / sizing.overspeed)


def grid(family: str, sizing: Sizing, parts: Parts, supply: Supply | None, lines: int) -> Grid:
    """Return the candidates of one family within the person's space, speed and mass."""
    assert parts.motors and parts.materials                                                                # noqa: PT018
    drives = tuple(parts.drives or {})
    wheel = family == WHEEL
    if not wheel and not drives:
        return _empty(family)
    sizes, lengths = WHEEL_SIZES if wheel else GYRO_SIZES
    axes = (np.arange(len(SHAPES)), np.arange(len(parts.materials)), np.geomspace(SMALLEST, sizing.space.diameter, sizes),
            np.geomspace(THINNEST, sizing.space.length, lengths), np.arange(len(parts.motors)),
            np.array(GEARS) if wheel else np.arange(len(drives)),
            np.array([1.0]) if wheel else np.geomspace(0.3, 1.0, SPINS))
    return columns(family, sizing, parts, supply, lines, *(a.ravel() for a in np.meshgrid(*axes, indexing="ij")))


def columns(family: str, sizing: Sizing, parts: Parts, supply: Supply | None, lines: int, shape: Array, material: Array,
            diameter: Array, length: Array, motor: Array, last: Array, spun: Array) -> Grid:
    """Return candidates from their columns, (n,) each, those too heavy left out.

    `last`: gear ratio of a wheel, drive of a gimbal; `spun`: the share of the top speed at which it turns.
    """
    assert parts.motors and parts.materials                                                                # noqa: PT018
    wheel = family == WHEEL
    ratio, drive = (last, np.full(len(last), -1)) if wheel else (np.ones(len(last)), last)
    rows = _weighed(family, parts, lines, shape, material, diameter, length, motor, ratio, drive)
    no_load = _no_load(parts, supply)[motor] / ratio
    speed = np.minimum(np.minimum(sizing.top_speed, strongest_speed(sizing, parts, shape, material, diameter)),
                       no_load if wheel else 0.85 * no_load) * spun
    driven = np.ones(len(motor), dtype=bool) if wheel else _small_spindle(parts, motor.astype(np.int64))
    keep = (rows[2] <= sizing.most_mass) & driven
    web = np.maximum(0.2 * length, np.minimum(2e-3, length))
    names = (tuple(parts.materials), tuple(parts.motors), tuple(parts.drives or {}))
    alike = 2 if family == PAIR or (wheel and lines > 1) else 1
    kinds = [np.asarray(v[keep], dtype=np.int64) for v in (shape, material, motor, drive)]
    sized = [np.asarray(v[keep], dtype=float) for v in (diameter, length, web, ratio, speed, rows[0], rows[2], *rows[1])]
    return Grid(family, kinds[0], kinds[1], kinds[2], kinds[3], sized[0], sized[1], sized[2], sized[3], sized[4],
                sized[5], sized[6], sized[7], sized[8], names, alike)


def _small_spindle(parts: Parts, motor: NDArray[np.int64]) -> NDArray[np.bool_]:
    """A flywheel only has to be kept at speed: the two smallest motors of the list are tried as spin motors."""
    assert parts.motors is not None
    light = np.argsort(np.argsort([m.mass for m in parts.motors.values()]))
    return np.asarray(light[motor] < 2)


def _no_load(parts: Parts, supply: Supply | None) -> Array:
    """Return each motor's no-load speed in rad/s, direct."""
    assert parts.motors is not None
    return np.array([drive_of(bare(m), Gear(), supply).no_load_speed for m in parts.motors.values()])


def _weighed(family: str, parts: Parts, lines: int, shape: Array, material: Array, diameter: Array, length: Array,
             motor: Array, ratio: Array, drive: Array) -> tuple[Array, tuple[Array, Array], Array]:
    """Return (mass of one rotor, (spin, transverse), all added mass), (n,) each; as `candidate.added_mass` counts."""
    assert parts.motors is not None and parts.materials is not None                                        # noqa: PT018
    word, hollow = np.array([s == "rim and web" for s, _ in SHAPES])[shape], np.array([h for _, h in SHAPES])[shape]
    density = np.array([m.density for m in parts.materials.values()])[material]
    R, inner = 0.5 * diameter, 0.5 * diameter * hollow
    rim = pi * density * length * (R**2 - inner**2)
    bore, web = 0.5 * BORE * diameter, np.maximum(0.2 * length, np.minimum(2e-3, length))
    disc = np.where(word, pi * density * web * (inner**2 - bore**2), 0.0)
    spin = 0.5 * rim * (R**2 + inner**2) + 0.5 * disc * (inner**2 + bore**2)
    transverse = 0.5 * spin + (rim * length**2 + disc * web**2) / 12.0
    rotor, motors = rim + disc, np.array([m.mass for m in parts.motors.values()])[motor]
    if family == WHEEL:
        return rotor, (spin, transverse), (rotor + motors) * (1 if lines == 1 else 2)
    drives = np.array([d.mass for d in (parts.drives or {}).values()])[drive]
    unit = rotor + motors + drives + FRAME * (rotor + motors)
    count = 2 if family == PAIR else 1
    return rotor, (spin, transverse), unit * count * (1.0 if lines == 1 else 1.0 + TABLE)


def _empty(family: str) -> Grid:
    none, whole = np.zeros(0), np.zeros(0, dtype=np.int64)
    return Grid(family, whole, whole, whole, whole, none, none, none, none, none, none, none, none, none, ((), (), ()))


