"""The report of the main job."""

from __future__ import annotations

from balance.api.tell import Tell, quiet
from balance.check.records import CheckResult
from balance.report.write import write_report


def report(result: CheckResult, folder: str, tell: Tell = quiet) -> str:
    """Write the report of `result` into `folder`, made if it is not there; return the path of its page."""
    tell("drawing the report")
    return write_report(result, folder)
