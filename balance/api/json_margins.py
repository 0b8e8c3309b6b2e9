"""Margins as a dictionary, for every answer that holds some."""

from __future__ import annotations

import math

from balance.api.json_numbers import Tree, number
from balance.design.records import Margins


def json_margins(margins: Margins) -> Tree:
    """Write margins; everything but `stable` is null where the closed loop is unstable."""
    return {
        "stable": margins.stable,
        "gain_lower": number(margins.gain_lower),
        "gain_upper": number(margins.gain_upper),
        "phase_deg": number(math.degrees(margins.phase)),
        "phase_crossover_rad_s": number(margins.phase_crossover),
        "delay_s": number(margins.delay),
        "phase_crossover_hz": number(margins.phase_crossover / math.tau),
        "delay_estimate_s": number(margins.delay_estimate),
        "modulus": number(margins.modulus),
        "disk": number(margins.disk),
        "peak_sensitivity": number(margins.peak_sensitivity),
        "peak_complementary": number(margins.peak_complementary),
        "crossings": [
            {
                "kind": c.kind,
                "frequency_rad_s": number(c.frequency),
                "frequency_hz": number(c.frequency / math.tau),
                **_crossing_value(c.kind, c.value),
            }
            for c in margins.crossings
        ],
    }


def _crossing_value(kind: str, value: float) -> Tree:
    return {"phase_deg": number(math.degrees(value))} if kind == "phase" else {"factor": number(value)}
