"""How a report knows that nobody has written into it since it was made."""

from __future__ import annotations

import hashlib
import os

from balance.base.whole import write_whole

MARK = "<!-- whole: "
END = " -->\n</body></html>\n"


def sealed(body: str) -> str:
    """Close a page (all of it up to the end of its body) with a digest of what stands above."""
    return f"{body}{MARK}{digest(body)}{END}"


def digest(body: str) -> str:
    """Return the SHA-256 of a text, in hexadecimal."""
    return hashlib.sha256(body.encode("utf-8")).hexdigest()


def untouched(path: str) -> bool:
    """Tell whether the file at `path` is a page made here and not edited since; True where there is no file."""
    try:
        with open(path, encoding="utf-8", newline="") as file:
            text = file.read()
    except FileNotFoundError:
        return True
    except (UnicodeDecodeError, IsADirectoryError):
        return False
    body, mark, rest = text.rpartition(MARK)
    return bool(mark) and rest == digest(body) + END


def put(page: str, folder: str, name: str) -> str:
    """Write a page into `folder` (made if it is not there), whole or not at all, in its free place; return its path."""
    os.makedirs(folder, exist_ok=True)
    path = free_place(folder, name)
    write_whole(path, page)
    return path


def free_place(folder: str, name: str) -> str:
    """Return the path of `name` in `folder`, or of the first `name-2`, `name-3`, … that holds no person's edits."""
    stem, ending = os.path.splitext(name)
    path, number = os.path.join(folder, name), 1
    while not untouched(path):
        number += 1
        path = os.path.join(folder, f"{stem}-{number}{ending}")
    return path
