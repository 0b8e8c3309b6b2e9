"""From designs to a firmware folder."""

from __future__ import annotations

from collections.abc import Sequence

from balance.api.load import Job
from balance.api.tell import Tell, quiet
from balance.design.records import Design
from balance.firmware.describe import NotAlikeError
from balance.firmware.folder import write_folder
from balance.firmware.package import Package, make_package


def firmware(job: Job, designs: Sequence[Design], folder: str, tell: Tell = quiet) -> Package | str:
    """Write the firmware of a design file's stances into `folder`; return it, or in words why there is none.

    Raises InputError, with nothing written, where a file there has been changed since it was written.
    """
    tell("writing firmware and its vectors")
    try:
        package = make_package(designs, job.goal.design)
    except NotAlikeError as reason:
        return str(reason)
    write_folder(package.files, folder)
    return package
