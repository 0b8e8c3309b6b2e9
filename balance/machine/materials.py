"""Materials by name: what a part is made of, and what a rotor of it stands.

Typical values of wrought stock; a rotor is proved with the certificate of its own bar, a body with a scale.
"""

from __future__ import annotations

from dataclasses import dataclass

from balance.files.fields import number, quantity, text


@dataclass(frozen=True)
class Material:
    """What a part or rotor can be made of; `source` says where the numbers come from."""

    density: float = quantity("density", above=0)
    strength: float = quantity("stress", above=0, says="yield, or 0.2 % proof")
    ultimate: float = quantity("stress", above=0)
    poisson: float = number(least=0, below=0.5)
    source: str = text()


STOCK: dict[str, Material] = {
    "aluminium": Material(2700.0, 240e6, 280e6, 0.33, "6082-T6 bar, EN 755-2, from memory"),
    "steel": Material(7850.0, 340e6, 620e6, 0.29, "C45 normalised, EN 10083-2, from memory"),
    "brass": Material(8500.0, 200e6, 400e6, 0.35, "CuZn39Pb3 bar, EN 12164, from memory"),
    "tungsten": Material(17000.0, 520e6, 700e6, 0.28, "heavy alloy class 1, ASTM B777, from memory"),
}
"""The one table: machine files name a material of it, sizing chooses from it where no parts file lists its own."""


def density_of(density: float | None, material: str | None) -> float | None:
    """Return a stated density, or that of a material of the stock, in kg/m³; None where neither is given."""
    return STOCK[material].density if material is not None else density
