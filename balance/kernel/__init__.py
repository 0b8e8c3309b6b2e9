"""Compiled loops: equations of motion, drives, the trial loop. Numbers and arrays only; no record comes in here.

numba's cache looks at the compiled function's own file only: after an edit in a file it calls into, stale machine code
would be served. The cache folder therefore carries a hash of the whole room, put where numba looks before it is
imported; someone who sets NUMBA_CACHE_DIR keeps their own.
"""

from __future__ import annotations

import hashlib
import os
from pathlib import Path


def room_hash(folder: Path) -> str:
    """Return a hash of every Python file in `folder`, names included."""
    digest = hashlib.sha256()
    for file in sorted(folder.glob("*.py")):
        digest.update(file.name.encode() + b"\0" + file.read_bytes() + b"\0")
    return digest.hexdigest()[:16]


def cache_folder(folder: Path) -> Path:
    """Return where the machine code compiled from `folder` belongs: under XDG_CACHE_HOME or ~/.cache."""
    base = Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")
    return base / "balance-assist" / f"kernel-{room_hash(folder)}"


os.environ.setdefault("NUMBA_CACHE_DIR", str(cache_folder(Path(__file__).parent)))
