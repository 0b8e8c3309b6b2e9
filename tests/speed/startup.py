"""Times commands from outside, as a person waits for them, against the start of a bare interpreter in the same run.

    python -m tests.speed.startup

prints one line per command: seconds (the median), the ratio to a bare interpreter, and the target.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

ROOT = Path(__file__).resolve().parents[2]
BARE = ("-c", "pass")


@dataclass(frozen=True)
class Timed:
    """One command: its median time, the bare interpreter's beside it, and the target (s; 0: none)."""

    name: str
    seconds: float
    bare: float
    target: float

    def __str__(self) -> str:
        aim = f"   target {self.target:g} s: {'met' if self.seconds < self.target else 'MISSED'}" if self.target else ""
        return f"{self.name:<44} {self.seconds:7.3f} s {self.seconds / self.bare:7.1f} x bare python{aim}"


def one_run(words: tuple[str, ...], compiled: str = "") -> float:
    """Return the seconds one run takes; the command must end with 0. `compiled`: folder of compiled code, else one's own."""
    there = {**os.environ, "NUMBA_CACHE_DIR": compiled} if compiled else None
    start = time.perf_counter()
    subprocess.run([sys.executable, *words], cwd=ROOT, env=there, check=True, capture_output=True)
    return time.perf_counter() - start


def timed(name: str, words: tuple[str, ...], runs: int, target: float = 0.0, compiled: str = "") -> Timed:
    """Time a command and the bare interpreter in turns, so that a busy machine slows both."""
    own, bare = [], []
    for _ in range(runs):
        bare.append(one_run(BARE))
        own.append(one_run(words, compiled))
    return Timed(name, statistics.median(own), statistics.median(bare), target)


def measure(runs: int) -> list[Timed]:
    """Time help, a mistake-free plant, the trials as first used after installing and again, and the main job."""
    with TemporaryDirectory() as folder, TemporaryDirectory() as compiled:
        recover = ("-m", "balance", "recover", "designs/bench-rig.yaml")
        check = ("-m", "balance", "check", "designs/bench-rig.yaml", "--out", folder)
        return [
            timed("balance --help", ("-m", "balance", "--help"), 2 * runs, 0.25),
            timed("balance plant bench-rig", ("-m", "balance", "plant", "plants/bench-rig.yaml"), runs),
            timed("balance recover bench-rig, first use", recover, 1, 15.0, compiled),
            timed("balance recover bench-rig, second use", recover, runs, 1.5, compiled),
            timed("balance check bench-rig, warm", check, runs, 4.0, compiled),
        ]


if __name__ == "__main__":
    print("\n".join(str(line) for line in measure(5)))
