"""What no law can beat at this sampling and delay, said beside what was reached, and before it where more is asked for."""

from __future__ import annotations

from math import exp, isfinite

from balance.design.records import LoopLimits
from balance.goal.goal import Requirements
from balance.plant.record import Plant


def loop_limits(plant: Plant, sample_time: float, latency: float) -> LoopLimits:
    """Return p·t_d and what follows from it for every law, with t_d the latency.

    ‖T‖ ≥ M = e^{p t_d} (Stein, "Respect the unstable", IEEE CSM 2003; Skogestad & Postlethwaite ch. 5, from memory). Since
    ½(1 − L)/(1 + L) = ½ − T, the balanced disk margin is at most 1/(M − ½); since S = 1 − T, Ms is at least M − 1.
    The total delay adds half a sample for the hold and the actuator's lag; those two do not belong to the bounds.
    """
    lags = [1.0 / unit.lag for unit in plant.units if isfinite(unit.lag) and unit.torque_limit > 0.0]
    total = latency + sample_time / 2.0 + max(lags, default=0.0)
    peak = exp(min(plant.unstable_pole * latency, 300.0))
    return LoopLimits(plant.unstable_pole * total, peak, total, min(2.0, 1.0 / (peak - 0.5)), max(1.0, peak - 1.0))


def beyond(require: Requirements, plant: Plant, latency: float, limits: LoopLimits) -> dict[str, str]:
    """Return requirement -> why no law whatever can meet it at this latency; empty where none is out of reach."""
    cause = (f"no law can: an unstable pole of {plant.unstable_pole:.3g} 1/s with {1e3 * latency:.3g} ms from sample to "
             f"command gives |T| of at least {limits.least_peak_complementary:.3g}")
    out = {}
    if require.disk_margin is not None and require.disk_margin > limits.largest_disk:
        out["disk_margin"] = f"{cause}, so a disk margin of at most {limits.largest_disk:.3g}"
    if require.peak_sensitivity is not None and require.peak_sensitivity < limits.least_peak_sensitivity:
        out["peak_sensitivity"] = f"{cause}, so an Ms of at least {limits.least_peak_sensitivity:.3g}"
    if require.modulus_margin is not None and require.modulus_margin > 1.0 / limits.least_peak_sensitivity:
        out["modulus_margin"] = f"{cause}, so a modulus margin of at most {1.0 / limits.least_peak_sensitivity:.3g}"
    return out
