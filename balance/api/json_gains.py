"""The answer of `balance gains` as a dictionary (SI but for the phase margin, unit in the key)."""

from __future__ import annotations

import math

from balance.api.json_numbers import Tree, complexes, number, row
from balance.design.law import Law
from balance.design.records import Design, Ideal, Margins


def json_gains(designs: tuple[Design, ...]) -> Tree:
    """Write the laws and margins of every stance."""
    return {"stances": [_stance(d) for d in designs]}


def _stance(design: Design) -> Tree:
    law = design.law
    return {
        "stance": design.plant.stance.name,
        "refused": design.refused,
        "law": law.kind,
        "sample_time_s": number(law.sample_time),
        "latency_s": number(law.latency),
        "states": list(law.states),
        "command_unit": law.unit,
        **_gains(law),
        "poles": {"discrete": complexes(design.poles), "equivalent_rad_s": complexes(design.equivalent)},
        "continuous": _continuous(design.ideal),
        "margins": json_margins(design.margins),
        "limits": {
            "pole_times_delay": number(design.limits.pole_times_delay),
            "least_peak_complementary": number(design.limits.least_peak_complementary),
            "total_delay_s": number(design.limits.total_delay),
        },
    }


def _gains(law: Law) -> Tree:
    if law.kind == "pid":
        return {"pid": {name: number(value) for name, value in law.gains.items()}}
    return {"K": row(law.K)}


def _continuous(ideal: Ideal | None) -> Tree | None:
    if ideal is None:
        return None
    return {"K": row(ideal.K), "poles": complexes(ideal.poles), "margins": json_margins(ideal.margins)}


def json_margins(margins: Margins) -> Tree:
    """Write margins; everything but `stable` is null where the closed loop is unstable."""
    return {
        "stable": margins.stable,
        "gain_lower": number(margins.gain_lower),
        "gain_upper": number(margins.gain_upper),
        "phase_deg": number(math.degrees(margins.phase)),
        "phase_crossover_rad_s": number(margins.phase_crossover),
        "delay_s": number(margins.delay),
        "delay_estimate_s": number(margins.delay_estimate),
        "modulus": number(margins.modulus),
        "disk": number(margins.disk),
        "peak_sensitivity": number(margins.peak_sensitivity),
        "peak_complementary": number(margins.peak_complementary),
        "crossings": [
            {"kind": c.kind, "frequency_rad_s": number(c.frequency), **_crossing_value(c.kind, c.value)}
            for c in margins.crossings
        ],
    }


def _crossing_value(kind: str, value: float) -> Tree:
    return {"phase_deg": number(math.degrees(value))} if kind == "phase" else {"factor": number(value)}
