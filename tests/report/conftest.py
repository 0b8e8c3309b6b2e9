"""Real answers of the shipped designs for the report's tests, made once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest

from balance.api.check import check
from balance.api.load import load
from balance.check.records import CheckResult

ROOT = Path(__file__).parents[2]


@cache
def answer(design: str, stance: str) -> CheckResult:
    """Return the whole answer of a shipped design on one stance, its first two trials only (drawing is slow)."""
    job = load(str(ROOT / "designs" / f"{design}.yaml"), stance)
    few = dict(list(job.goal.trials.items())[:2])
    return check(replace(job, goal=replace(job.goal, trials=few)))


@pytest.fixture
def answered() -> Callable[[str, str], CheckResult]:
    """Give `answer`."""
    return answer
