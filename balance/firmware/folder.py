"""A firmware folder on disk: whole files, and nothing that a person has changed is written over."""

from __future__ import annotations

import hashlib
import os

from balance.base.errors import InputError, Problem
from balance.base.whole import write_whole
from balance.firmware.package import SUMS


def write_folder(files: dict[str, str], folder: str) -> tuple[str, ...]:
    """Write `files` (path in the folder -> text); return the paths written, sorted.

    Each file is written whole or not at all, the list of sums last. Raises InputError, with nothing written, where a
    file stands in the way that was not written here or has been changed since; OSError where the folder cannot be written.
    """
    known = _known(folder)
    changed = [
        path
        for path in sorted(files)
        if path != SUMS and not _ours(folder, path, {known.get(path), _sum(files[path].encode())})
    ]
    if changed:
        raise InputError(
            [
                Problem(
                    os.path.join(folder, path),
                    1,
                    1,
                    "(file)",
                    "a file that was not written here, or changed since",
                    "files as this command wrote them",
                    "move it away, or choose another folder with --out",
                )
                for path in changed
            ]
        )
    for path in sorted(files, key=lambda p: (p == SUMS, p)):
        write_whole(os.path.join(folder, *path.split("/")), files[path])
    return tuple(sorted(files))


def _known(folder: str) -> dict[str, str]:
    """Return the sums of what was written here before, by path."""
    try:
        with open(os.path.join(folder, SUMS), encoding="utf-8") as file:
            lines = [line.split("  ", 1) for line in file.read().splitlines()]
    except (FileNotFoundError, UnicodeDecodeError):
        return {}
    return {line[1]: line[0] for line in lines if len(line) == 2}


def _sum(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()


def _ours(folder: str, path: str, sums: set[str | None]) -> bool:
    """Tell whether a file is as it was written here, or as it will be (a run that was broken off), or not there."""
    try:
        with open(os.path.join(folder, *path.split("/")), "rb") as file:
            return _sum(file.read()) in sums
    except FileNotFoundError:
        return True
    except (IsADirectoryError, NotADirectoryError):
        return False
