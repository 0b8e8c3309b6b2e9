"""What no law can beat at this sampling and delay, said beside what was reached."""

from __future__ import annotations

from math import exp, isfinite

from balance.design.records import LoopLimits
from balance.plant.record import Plant


def loop_limits(plant: Plant, sample_time: float, latency: float) -> LoopLimits:
    """Return p·t_d and the least possible peak of the complementary sensitivity, e^{p t_d} with t_d the latency.

    |T|max ≥ e^{p t_d} (Stein, "Respect the unstable", IEEE CSM 2003; Skogestad & Postlethwaite ch. 5, from memory).
    The total delay adds half a sample for the hold and the actuator's lag; those two do not belong to the bound.
    """
    lags = [1.0 / unit.lag for unit in plant.units if isfinite(unit.lag) and unit.torque_limit > 0.0]
    total = latency + sample_time / 2.0 + max(lags, default=0.0)
    return LoopLimits(plant.unstable_pole * total, exp(plant.unstable_pole * latency), total)
