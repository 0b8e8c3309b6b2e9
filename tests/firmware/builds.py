"""Firmware of the shipped designs, and of one more law on the gyro machine; built once for all tests of this room."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path

from balance.design.build import design_stance
from balance.design.records import Design
from balance.firmware.package import Package, make_package
from balance.goal.goal import PidControl
from balance.goal.read import read_goal
from balance.machine.read import read_machine
from balance.plant.build import build_plant
from balance.stance.build import build_stance

ROOT = Path(__file__).resolve().parents[2]

CASES = {
    "scout-wheels": ("trellis-scout", False), "bench-rig-pid": ("bench-rig", False), "quay-gyros": ("quay-carrier", False),
    "quay-pid": ("quay-carrier", True), "bench-rig-sensed": ("bench-rig", False),
    "bench-rig-kalman": ("bench-rig", False),
}
"""LQR and PID, wheel and gyro, and one behind an inertial sensor: design -> (machine, its control replaced by a PID)."""


@cache
def designs(case: str) -> tuple[Design, ...]:
    """Return the designs of every stance the design file asks for."""
    machine_name, as_pid = CASES[case]
    goal = read_goal(str(ROOT / "designs" / f"{case.replace('quay-pid', 'quay-gyros')}.yaml"))
    if as_pid:
        goal = replace(goal, control=PidControl())
    machine = read_machine(str(ROOT / "plants" / f"{machine_name}.yaml"))
    names = machine.stance_names() if goal.stance == "every" else (goal.stance or machine.stance_names()[0],)
    return tuple(design_stance(build_plant(machine, build_stance(machine, name)), goal) for name in names)


@cache
def package(case: str) -> Package:
    """Return the firmware of a case."""
    return make_package(designs(case), case)


def written(case: str, folder: Path) -> Path:
    """Write a case's files below `folder` and return where they are."""
    for path, text in package(case).files.items():
        place = folder / case / path
        place.parent.mkdir(parents=True, exist_ok=True)
        place.write_text(text, encoding="utf-8")
    return folder / case
