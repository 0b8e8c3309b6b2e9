"""YAML, stricter than YAML: what people write and strangers send."""

from __future__ import annotations

import pytest

from balance.base.errors import InputError
from balance.files.document import DEEPEST, LARGEST, load


@pytest.fixture
def problems(tmp_path):
    """Load a text; return its problems (from the error, or those kept beside the tree)."""
    def run(text):
        path = tmp_path / "x.yaml"
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        try:
            return list(load(str(path)).problems)
        except InputError as error:
            return list(error.problems)
    return run


def test_a_clean_file_has_none(problems):
    assert problems("a: 1\nb: {c: [2, on, yes, 1e-3]}\n") == []


def test_duplicate_keys_are_refused_with_both_places(problems):
    (only,) = problems("a: 1\nb: 2\na: 3\n")
    assert (only.line, only.column, only.key) == (3, 1, "a")
    assert "a second time" in only.given
    assert "line 1" in f"{only.given} {only.allowed} {only.hint}"


@pytest.mark.parametrize(("text", "line", "says"), [
    ("a:\n\t- 1\n", 2, ""), ("a: [1, 2\n", 2, ""), ("a: 1\n---\nb: 2\n", 2, "second document"), ("", 1, "empty file"),
    ("a: !!python/object:os.system {}\n", 1, "tag"), (b"a: \xff\xfe\n", 1, "UTF-8"), ("a: 1\nb: \x01\n", 2, "U+0001")])
def test_what_is_no_machine_file(problems, text, line, says):
    (only,) = problems(text)
    assert only.line == line
    assert says in f"{only.given} {only.allowed} {only.hint}"


def test_size_depth_and_aliases_are_bounded(problems):
    assert "megabyte" in problems("a: " + "x" * LARGEST)[0].given
    assert "levels" in problems("a: " + "[" * (DEEPEST + 2) + "]" * (DEEPEST + 2))[0].given
    bomb = "a: &a [1,1,1,1,1,1,1,1,1,1]\n" + "".join(
        f"{chr(98 + i)}: &{chr(98 + i)} [{','.join(['*' + chr(97 + i)] * 10)}]\n" for i in range(8))
    assert len(problems(bomb)) == 1


def test_a_missing_file_is_one_clear_error(tmp_path):
    with pytest.raises(InputError) as caught:
        load(str(tmp_path / "no.yaml"))
    assert "No such file" in str(caught.value)
