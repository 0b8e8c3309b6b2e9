"""`balance new`: a pair of commented files to start from, never over a file that is already there."""

from __future__ import annotations

import os
import re

from balance.cli.outcome import UsageError
from balance.cli.starter import DESIGN, MACHINE

NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9-]{0,59}")


def write_pair(name: str, folder: str) -> tuple[str, str]:
    """Write plants/NAME.yaml and designs/NAME.yaml under `folder` and return both paths.

    Raises UsageError for a name that cannot be a file's and where either file exists already; then neither
    is written.
    """
    if not NAME.fullmatch(name):
        raise UsageError(f"the name `{name}`", "letters, digits and hyphens, at most 60")
    texts = {
        os.path.join(folder, "plants", f"{name}.yaml"): MACHINE,
        os.path.join(folder, "designs", f"{name}.yaml"): DESIGN,
    }
    there = [path for path in texts if os.path.lexists(path)]
    if there:
        raise UsageError(
            f"`{name}`, for which there is {' and '.join(there)} already",
            "a name that is not taken",
            "files are never overwritten; choose another name or move the old file away",
        )
    for path, text in texts.items():
        os.makedirs(os.path.dirname(path), exist_ok=True)
        _write_new(path, text.replace("NAME", name))
    machine, design = texts
    return machine, design


def _write_new(path: str, text: str) -> None:
    """Write a file whole, under another name first; never over a file that is there."""
    unfinished = f"{path}.{os.getpid()}.unfinished"
    try:
        with open(unfinished, "w", encoding="utf-8", newline="\n") as file:
            file.write(text)
        if os.path.lexists(path):
            raise FileExistsError(17, "appeared while it was being written", path)
        os.replace(unfinished, path)
    finally:
        if os.path.exists(unfinished):
            os.remove(unfinished)
