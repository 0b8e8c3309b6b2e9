"""The answer of `balance check` as a dictionary: the verdicts, and under them all that they rest on."""

from __future__ import annotations

from balance.api.json_gains import json_gains
from balance.api.json_numbers import Tree, number
from balance.api.json_plant import json_plant
from balance.api.json_recover import json_recover
from balance.check.records import CheckResult, Verdict
from balance.stance.compared import bench_against_cad
from balance.stance.statics import statics_of


def json_verdicts(verdicts: tuple[Verdict, ...]) -> Tree:
    """Write verdicts and whether all of them passed."""
    return {"passed": all(v.passed for v in verdicts), "verdicts": [_verdict(v) for v in verdicts]}


def json_check(result: CheckResult) -> Tree:
    """Write the whole answer; `plant`, `gains` and `recover` hold what the commands of those names answer."""
    return {
        "machine": result.machine.machine,
        "design": result.goal.design,
        **json_verdicts(result.verdicts),
        "plant": json_plant(tuple(d.plant for d in result.designs), bench_against_cad(result.machine),
                            tuple(statics_of(result.machine, d.plant.stance) for d in result.designs)),
        "gains": json_gains(result.designs),
        "recover": json_recover(result.trials),
    }


def _verdict(verdict: Verdict) -> Tree:
    return {
        "name": verdict.name,
        "stance": verdict.stance,
        "value": _either(verdict.value),
        "unit": verdict.unit,
        "limit": _either(verdict.limit),
        "sense": verdict.sense,
        "passed": verdict.passed,
        "reason": verdict.reason,
    }


def _either(value: float | str) -> float | str | None:
    return value if isinstance(value, str) else number(value)
