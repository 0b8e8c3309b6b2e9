"""The cache of machine code follows every file of the room."""

from __future__ import annotations

import os
import subprocess
import sys

from balance.kernel import cache_folder, room_hash


def test_any_edit_moves_the_cache(tmp_path):
    (tmp_path / "a.py").write_text("x = 1\n")
    (tmp_path / "b.py").write_text("y = 1\n")
    first = room_hash(tmp_path)
    (tmp_path / "b.py").write_text("y = 2\n")
    second = room_hash(tmp_path)
    (tmp_path / "b.py").rename(tmp_path / "c.py")
    third = room_hash(tmp_path)
    assert len({first, second, third}) == 3
    (tmp_path / "notes.txt").write_text("no code")
    assert room_hash(tmp_path) == third
    assert cache_folder(tmp_path).name == f"kernel-{room_hash(tmp_path)}"


def answer(folder, code, **more):
    environment = {**os.environ, **more}
    done = subprocess.run([sys.executable, "-c", code], cwd=folder, env=environment, capture_output=True, text=True,
                          check=True)
    return done.stdout.strip()


def test_the_folder_is_set_before_numba_looks_and_a_users_own_is_kept(tmp_path):
    code = "import balance.kernel.layout, os; print(os.environ['NUMBA_CACHE_DIR'])"
    root = os.getcwd()
    bare = {"NUMBA_CACHE_DIR": "", "XDG_CACHE_HOME": str(tmp_path), "PYTHONPATH": root}
    unset = "import os; os.environ.pop('NUMBA_CACHE_DIR'); " + code
    assert answer(tmp_path, unset, **bare).startswith(str(tmp_path / "balance-assist" / "kernel-"))
    assert answer(tmp_path, code, **{**bare, "NUMBA_CACHE_DIR": str(tmp_path / "mine")}) == str(tmp_path / "mine")
