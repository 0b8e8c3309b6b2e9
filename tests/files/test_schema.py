"""The published JSON Schema: every shipped file is valid under it, a wrong one is not, and the reader agrees."""

from __future__ import annotations

from pathlib import Path

import pytest
from jsonschema import Draft202012Validator

from balance.files.document import load
from balance.files.schema import json_schema
from balance.goal.goal import Goal
from balance.machine.machine import Machine

FILES = [(path, Machine) for path in sorted(Path("plants").glob("*.yaml"))] + \
        [(path, Goal) for path in sorted(Path("designs").glob("*.yaml"))]


@pytest.mark.parametrize("record", [Machine, Goal])
def test_the_schema_is_a_schema(record):
    Draft202012Validator.check_schema(json_schema(record))


@pytest.mark.parametrize(("path", "record"), FILES, ids=[p.name for p, _ in FILES])
def test_shipped_files_are_valid(path, record):
    found = list(Draft202012Validator(json_schema(record)).iter_errors(load(str(path)).root.plain()))
    assert found == []


@pytest.mark.parametrize(("old", "new"), [
    ("mass: 3.2 kg", "mass: 3.2"), ("mass: 3.2 kg", "maas: 3.2 kg"), ("format: 1", "format: 2"),
    ("kind: reaction wheel", "kind: reaction weel"), ("speed_limit: 3600 rpm", "speed_limit: 3600")])
def test_wrong_files_are_not(tmp_path, old, new):
    text = Path("plants/bench-rig.yaml").read_text(encoding="utf-8")
    body = text[text.index("format: 1"):]
    assert old in body
    path = tmp_path / "x.yaml"
    path.write_text(body.replace(old, new, 1), encoding="utf-8")
    assert list(Draft202012Validator(json_schema(Machine)).iter_errors(load(str(path)).root.plain()))
