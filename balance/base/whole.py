"""Files are written whole or not at all: into a temporary file beside, then renamed over the old one."""

from __future__ import annotations

import os
import tempfile


def write_whole(path: str, content: str | bytes) -> None:
    """Write `content` (a text as UTF-8, newlines as they are) to `path`; its folder is made if it is not there.

    Whatever goes wrong, Ctrl-C too, leaves the old file as it was and no half-written one. Raises OSError where the
    folder cannot be written.
    """
    folder = os.path.dirname(path) or "."
    os.makedirs(folder, exist_ok=True)
    handle, unfinished = tempfile.mkstemp(dir=folder, prefix=".unfinished-")
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content.encode("utf-8") if isinstance(content, str) else content)
        os.chmod(unfinished, 0o644)
        os.replace(unfinished, path)
    except BaseException:
        os.unlink(unfinished)
        raise
