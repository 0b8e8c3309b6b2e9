"""The compiled C in the simulator, in the law's place: the same trials end the same way."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from balance.firmware.host import HostFirmware
from balance.goal.read import read_goal
from balance.goal.trials import LiftOff, Push, Start, Trial
from balance.simulate.run import run_one
from tests.firmware.builds import ROOT, designs, package
from tests.firmware.targets.run import need

TRIALS = {
    "push": lambda size: Trial(push=Push(0.5 * size, 0.3, "outward", 0.05), lasts=1.0),
    "start": lambda size: Trial(start=Start(0.02, 0.0, 0.0, "outward"), lasts=1.0),
    "held first": lambda size: Trial(lift_off=LiftOff(0.01, 0.02, 0.0, 0.1), lasts=1.0),
    "too much": lambda size: Trial(push=Push(40.0 * size, 0.3, "outward", 0.05), lasts=1.0),
}

CLOSE = {False: 1e-6, True: 2e-4}
"""rad of lean over a whole trial, float32 and fixed point: rounding, grown by the law's own dynamics."""


@pytest.mark.parametrize("fixed", [False, True], ids=["float32", "fixed"])
@pytest.mark.parametrize("case", ["bench-rig-sensed", "bench-rig-kalman", "bench-rig-pid", "scout-wheels", "quay-gyros"])
def test_every_trial_ends_as_with_the_law(case: str, fixed: bool) -> None:
    need("host")
    goal = read_goal(str(ROOT / "designs" / f"{case}.yaml"))
    design = designs(case)[-1]
    firmware = HostFirmware(package(case), fixed)
    size = design.plant.momentum_capacity
    verdicts = set()
    for name, trial in TRIALS.items():
        plain = run_one(design, goal, name, trial(size), "outward", True)
        compiled = run_one(design, goal, name, trial(size), "outward", True, firmware)
        assert compiled.verdict == plain.verdict, name
        verdicts.add(plain.verdict.split()[0])
        rows = min(len(plain.trace.lean), len(compiled.trace.lean)) - 1
        held = np.abs(plain.trace.lean[:rows]) < 0.3                       # a fall multiplies every difference
        assert np.abs(compiled.trace.lean[:rows] - plain.trace.lean[:rows])[held].max() < CLOSE[fixed], name
        assert compiled.peak_torque == pytest.approx(plain.peak_torque, rel=0.02)
    assert "fell" in verdicts
    assert len(verdicts) > 1


def test_firmware_of_another_design_does_not_pass_for_it() -> None:
    """The twin: gains 20 % off are seen in the lean."""
    need("host")
    from balance.firmware.package import make_package

    goal, design = read_goal(str(ROOT / "designs" / "bench-rig-pid.yaml")), designs("bench-rig-pid")[0]
    other = make_package([replace(design, law=replace(design.law, D=1.2 * design.law.D, C=1.2 * design.law.C))], "other")
    trial = TRIALS["start"](1.0)
    plain = run_one(design, goal, "x", trial, "outward", True)
    wrong = run_one(design, goal, "x", trial, "outward", True, HostFirmware(other, False))
    assert np.abs(wrong.trace.lean - plain.trace.lean).max() > 3 * CLOSE[True]
