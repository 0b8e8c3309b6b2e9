"""Ctrl-C in the middle of the main job: exit code 130, one line, and no file that is not whole."""

from __future__ import annotations

import signal
import subprocess
import sys
from pathlib import Path

import pytest


def interrupted_at(step: str, root: Path, folder: Path) -> tuple[int, str]:
    """Run `check`, send Ctrl-C when it says `step`, and return exit code and error stream."""
    words = ["check", "designs/scout-wheels.yaml", "--out", str(folder), "--progress"]
    process = subprocess.Popen([sys.executable, "-m", "balance", *words], cwd=root, text=True,
                               stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    assert process.stderr is not None
    said = []
    for line in process.stderr:
        said.append(line)
        if step in line:
            process.send_signal(signal.SIGINT)
            break
    out, rest = process.communicate(timeout=120)  # a whole check takes seconds; two minutes mean it hangs
    assert out == ""
    return process.returncode, "".join(said) + rest


@pytest.mark.parametrize("step", ["designing for stance on-fore-right", "trials on stance", "drawing the report"])
def test_ctrl_c_leaves_130_and_no_half_written_file(root: Path, tmp_path: Path, step: str) -> None:
    code, said = interrupted_at(step, root, tmp_path / "report")
    assert code == 130
    assert said.splitlines()[-1] == "interrupted; no half-written file is left"
    assert "Traceback" not in said
    assert [path for path in tmp_path.rglob("*") if path.is_file()] == []
