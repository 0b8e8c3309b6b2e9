"""The law's one line command v: how large it may be and what it is measured in."""

from __future__ import annotations

from balance.plant.record import Plant


def output_limit(plant: Plant) -> float:
    """Return the limit of v: one unit's own input limit, or the torque of all units about the line (N·m).

    Several units share v in proportion to what each can give, so all of them are at their own limits together.
    """
    return float(plant.units[0].input_limit if len(plant.units) == 1 else plant.torque_limit)


def command_unit(plant: Plant) -> str:
    """Return the SI unit of v: a single rate-driven gimbal's rad/s, else N·m."""
    return "rad/s" if len(plant.units) == 1 and plant.units[0].drive == "rate" else "N*m"
