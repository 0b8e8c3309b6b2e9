"""The answer of `balance gains` as a dictionary (SI but for the phase margin, unit in the key)."""

from __future__ import annotations

from balance.api.json_margins import json_margins
from balance.api.json_numbers import Tree, complexes, number, row
from balance.api.json_robust import json_robust
from balance.design.at_rest import noise_rms
from balance.design.law import Law
from balance.design.records import BodeIntegral, Design, Ideal


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
            "largest_disk": number(design.limits.largest_disk),
            "least_peak_sensitivity": number(design.limits.least_peak_sensitivity),
        },
        "bode_integral": _integral(design.integral),
        "noise": _noise(design),
        **json_robust(design),
    }


def _integral(integral: BodeIntegral | None) -> Tree | None:
    if integral is None:
        return None
    return {"found": number(integral.found), "due": number(integral.due), "holds": integral.holds}


def _noise(design: Design) -> Tree | None:
    found = noise_rms(design)
    if found is None:
        return None
    return {"lean_rms_rad": number(found.lean), "lean_rate_rms_rad_s": number(found.lean_rate),
            "torque_rms_n_m": number(found.torque), "momentum_rms_n_m_s": number(found.momentum)}


def _gains(law: Law) -> Tree:
    if law.kind == "pid":
        return {"pid": {name: number(value) for name, value in law.gains.items()}}
    return {"K": row(law.K), "riccati_residual": None if law.residual is None else number(law.residual)}


def _continuous(ideal: Ideal | None) -> Tree | None:
    if ideal is None:
        return None
    return {"K": row(ideal.K), "poles": complexes(ideal.poles), "margins": json_margins(ideal.margins)}
