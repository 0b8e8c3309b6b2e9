"""The bench beside CAD: every measured number, and what each alone does to the machine's pole."""

from __future__ import annotations

from balance.machine.machine import Machine
from balance.stance.bench import bench_of
from balance.stance.build import stand
from balance.stance.measured import Disagreement, disagreements


def bench_against_cad(machine: Machine) -> tuple[Disagreement, ...]:
    """Return every measured number beside CAD's in the pose it was measured in; empty where nothing was measured."""
    if machine.measured is None or machine.stances is None:
        return ()
    cad = stand(machine, machine.measured.pose, machine.stances[machine.measured.pose])
    return disagreements(machine, cad, bench_of(machine, machine.measured, cad))
