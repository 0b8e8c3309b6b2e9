"""The report of the main job."""

from __future__ import annotations

from balance.api.tell import Tell, quiet
from balance.check.records import CheckResult
from balance.machine.machine import Machine
from balance.plant.record import Plant
from balance.report.figures.machine import write_machine_figure
from balance.report.write import write_report


def report(result: CheckResult, folder: str, tell: Tell = quiet) -> str:
    """Write the report of `result` into `folder`, made if it is not there; return the path of its page."""
    tell("drawing the report")
    return write_report(result, folder)


def figure(machine: Machine, plants: tuple[Plant, ...], path: str) -> str:
    """Draw the machine to scale on each stance, from above and along the line; PNG where `path` ends so, else SVG."""
    return write_machine_figure(machine, [p.stance for p in plants], plants, path)
