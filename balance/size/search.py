"""From hundreds of thousands of candidates to a confirmed front: closed forms prune, a shortlist is simulated.

Deterministic: the shortlist comes from the closed forms alone, every candidate is tested by itself with its own seeds, and
answers are put back in the order of the shortlist, so one worker and two give the same front.
"""

from __future__ import annotations

import json
import multiprocessing
import os
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import suppress
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

from balance.size.closed import margin
from balance.size.confirm import Confirmed, Task, confirm, from_plain, to_plain
from balance.size.grid import Grid, grid
from balance.size.question import Question

Array = NDArray[np.float64]
Tell = Callable[[str], None]

LARGER, MORE = 5, 1.15
"""Beside the smallest: how many larger ones stand on the front of mass against push, each with so many times the room."""
TRIED, ROUNDS = 1, 6
"""Smallest ones of a family simulated at once, and how often the next ones are taken when none of them passes."""


@dataclass(frozen=True)
class Survey:
    """One family by the closed forms."""

    grid: Grid
    margin: Array      # (n,) can ÷ must, safety taken off
    push: Array        # (n,) N·s

    @property
    def enough(self) -> NDArray[np.int64]:
        """Indices of those that can do it, lightest first; ties in the grid's own order."""
        able = np.flatnonzero(self.margin >= 1.0)
        return able[np.argsort(self.grid.added[able], kind="stable")]


def survey(question: Question, family: str) -> Survey:
    """Return every candidate of a family with what the closed forms say."""
    found = grid(family, question.sizing, question.parts, question.machine.supply, question.count)
    can, push = margin(found, question.parts, question.machine, question.goal, question.lines)
    return Survey(found, can, push)


def rounds(one: Survey) -> Iterator[list[Task]]:
    """Return batches of tasks: the smallest of each motor, gear and drive in turn; the larger ones with the first."""
    order, at, kinds = one.enough, 0, _kinds(one.grid)
    smallest: list[int] = []
    seen: set[tuple[int, ...]] = set()
    for i in order:
        if kinds[i] not in seen:
            seen.add(kinds[i])
            smallest.append(int(i))
        if len(smallest) >= TRIED * ROUNDS:
            break
    while at < len(smallest):
        batch = [Task(one.grid.take(i), True) for i in smallest[at:at + TRIED]]
        if at == 0:
            batch += [Task(one.grid.take(i), False) for i in _larger(one)]
        at += TRIED
        yield batch


def _kinds(columns: Grid) -> list[tuple[int, ...]]:
    """Return what makes two candidates different in kind: motor and gear of a wheel, drive and material of a gimbal."""
    wheel = columns.drive < 0
    first = np.where(wheel, columns.motor, columns.drive)
    second = np.where(wheel, columns.ratio, columns.material)
    return [(int(a), int(b)) for a, b in zip(first, second, strict=True)]


def _larger(one: Survey) -> list[int]:
    """Return the lightest candidates that can do more and more, each a good deal more than the one before."""
    found: list[int] = []
    level = MORE
    while len(found) < LARGER:
        able = np.flatnonzero(one.margin >= level)
        if not len(able):
            break
        found.append(int(able[np.argmin(one.grid.added[able])]))
        level = MORE * float(one.margin[found[-1]])
    return found


def search(question: Question, workers: int, state: str, tell: Tell) -> tuple[tuple[Survey, ...], tuple[Confirmed, ...]]:
    """Return every family's survey and what was confirmed, in order.

    `state`: a file that keeps what was confirmed, so that a search that was stopped goes on where it was; "" keeps none.
    """
    known, families = Kept(state, question.key()), question.sizing.families
    surveys = tuple(survey(question, family) for family in families)
    for one in surveys:
        tell(f"{one.grid.family}: {len(one.enough)} of {len(one.grid)} candidates can do it by the closed forms")
    waiting = {family: rounds(one) for family, one in zip(families, surveys, strict=True)}
    answers: dict[str, list[Confirmed]] = {family: [] for family in families}
    with _pool(workers) as run:
        while waiting:
            batch = [(family, task) for family in waiting for task in next(waiting[family], [])]
            found = known.through([task for _, task in batch], partial(run, partial(confirm, question)), tell)
            for (family, _), one_found in zip(batch, found, strict=True):
                answers[family].append(one_found)
            asked = {family for family, _ in batch}
            waiting = {f: r for f, r in waiting.items()
                       if f in asked and not any(c.passed and c.binding for c in answers[f])}
    return surveys, tuple(c for family in families for c in answers[family])


class Kept:
    """Confirmed answers on disk, a JSON line each behind one that names the question; another question's are dropped."""

    def __init__(self, path: str, key: str) -> None:
        self.path, self.lines = path, dict[str, Confirmed]()
        if path and os.path.isfile(path):
            with open(path, encoding="utf-8") as file:
                rows = file.read().split("\n")
            if rows[0] == key:
                for row in rows[1:]:
                    with suppress(ValueError):               # a line cut short by an interruption
                        entry = json.loads(row)
                        self.lines[entry["task"]] = from_plain(entry["found"])
        if path and not self.lines:
            os.makedirs(os.path.dirname(path) or ".", exist_ok=True)
            with open(path, "w", encoding="utf-8") as file:
                file.write(key + "\n")

    def through(self, batch: Sequence[Task], run: Callable[[list[Task]], Iterator[Confirmed]],
                tell: Tell) -> list[Confirmed]:
        """Return the answers to a batch in its order; each is kept as soon as it is there."""
        fresh = [t for t in batch if repr(t) not in self.lines]
        for task, found in zip(fresh, run(fresh), strict=True):
            self.lines[repr(task)] = found
            tell(f"{task.candidate.family}: {found.candidate.words()}: {found.refused or 'passes'}")
            if self.path:
                with open(self.path, "a", encoding="utf-8") as file:
                    file.write(json.dumps({"task": repr(task), "found": to_plain(found)}) + "\n")
        return [self.lines[repr(t)] for t in batch]


class _pool:  # noqa: N801 - used as a word
    """Run tasks here, or in worker processes; answers come back in order either way."""

    def __init__(self, workers: int) -> None:
        self.workers = workers
        self.executor: ProcessPoolExecutor | None = None

    def __enter__(self) -> Callable[[Callable[[Task], Confirmed], list[Task]], Iterator[Confirmed]]:
        if self.workers > 1:
            self.executor = ProcessPoolExecutor(self.workers, mp_context=multiprocessing.get_context("spawn"))
        return self.run

    def __exit__(self, *_: object) -> None:
        if self.executor is not None:
            self.executor.shutdown(cancel_futures=True)

    def run(self, work: Callable[[Task], Confirmed], tasks: list[Task]) -> Iterator[Confirmed]:
        """Return the answers in order."""
        return map(work, tasks) if self.executor is None else self.executor.map(work, tasks)
