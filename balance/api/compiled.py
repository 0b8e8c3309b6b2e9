"""The trials on the compiled firmware, beside those on the law it was written from."""

from __future__ import annotations

from dataclasses import dataclass

from balance.api.load import Job
from balance.api.recover import recover
from balance.api.tell import Tell, quiet
from balance.design.records import Design
from balance.firmware.describe import NotAlikeError
from balance.firmware.host import HostFirmware
from balance.firmware.package import make_package
from balance.simulate.records import TrialResult


@dataclass(frozen=True)
class Compared:
    """Trials of the firmware, and how they differ from the law's: trials with another verdict, peak leans apart."""

    trials: tuple[TrialResult, ...]
    variant: str                    # "float" | "fixed"
    other_verdicts: tuple[str, ...]
    peak_lean_apart: float          # rad


def recover_compiled(job: Job, designs: tuple[Design, ...], variant: str, tell: Tell = quiet) -> Compared | str:
    """Compile the job's firmware, run every trial on it and on the law; in words why there is none to run.

    Raises NoCompilerError where this machine has no C compiler.
    """
    tell("writing and compiling the firmware")
    try:
        package = make_package(designs, job.goal.design)
    except NotAlikeError as reason:
        return str(reason)
    if variant == "fixed" and package.refused:
        return package.refused
    firmware = HostFirmware(package, variant == "fixed")
    trials, plain = recover(job, designs, tell=tell, controller=firmware), recover(job, designs, tell=tell)
    other = tuple(f"{a.name} {a.toward} on {a.stance}: {a.verdict}, the law: {b.verdict}"
                  for a, b in zip(trials, plain, strict=True) if a.verdict != b.verdict)
    apart = max((abs(a.peak_lean - b.peak_lean) for a, b in zip(trials, plain, strict=True)), default=0.0)
    return Compared(trials, variant, other, apart)

