"""The worst case of one stance: the law as it is, the machine and the delay anywhere within their tolerances."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from balance.design.build import response
from balance.design.margins import margins_of
from balance.design.records import Design, Margins, Range, Robustness, WorstCase
from balance.design.robustness.ranges import LATENCY
from balance.design.robustness.screen import JUDGED, Screen, screen_of
from balance.design.robustness.search import Pool, search
from balance.design.sampled_margins import at_actuator

Array = NDArray[np.float64]

IDLE = 0.02
"""A parameter that gives back less than this share of what a margin has lost is not named as its cause."""


def worst_case(design: Design, ranges: tuple[Range, ...]) -> Robustness | None:
    """Return the worst case of each margin, or None where there is nothing to move or no stable loop to start from.

    Found by search (`search`), not proved; never better than nominal, for the nominal loop is one of those tried.
    """
    if not ranges or design.refused or not design.margins.stable:
        return None
    screen = screen_of(design.plant, design.law)
    pool = search(lambda points: screen.scores([deviation(ranges, x) for x in points]), len(ranges))
    places = [pool.lowest(column) for column in range(len(JUDGED))]
    full = {_key(places[JUDGED.index(name)]) for name in ("disk", "delay")}
    exact = {_key(x): exact_margins(screen, deviation(ranges, x), _key(x) in full) for x in places}
    cases = tuple(_case(design, screen, ranges, pool, column, exact) for column in range(len(JUDGED)))
    by = deviation(ranges, places[JUDGED.index("disk")])
    sampled = screen.sampled(by)
    return Robustness(
        ranges=ranges, stable=bool(np.all(pool.values[:, 0] >= 0.0)), cases=cases,
        evaluations=len(pool.points), worst=sampled.plant, late=by.get(LATENCY, 0.0),
        margins=exact[_key(places[JUDGED.index("disk")])], response=response(sampled, design.law))


def deviation(ranges: tuple[Range, ...], x: Array) -> dict[str, float]:
    """Return the deviations at a point (p,) of the box −1 … 1: 0 is nominal, each side is scaled by itself."""
    return {one.name: float(v * one.high if v > 0.0 else -v * one.low) for one, v in zip(ranges, x, strict=True)}


def exact_margins(screen: Screen, by: Mapping[str, float], delay: bool) -> Margins:
    """Return the margins of one deviated loop, crossings refined; without `delay`, the dear one of them, it is NaN."""
    loop = at_actuator(screen.sampled(by), screen.law)
    if delay:
        return margins_of(loop)
    margins = margins_of(replace(loop, growth=lambda factor, late: 1.0 if late else loop.growth(factor, 0.0)))
    return replace(margins, delay=math.nan)


def _case(design: Design, screen: Screen, ranges: tuple[Range, ...], pool: Pool, column: int,
          exact: dict[bytes, Margins]) -> WorstCase:
    """Return one margin's worst case: the least of everything that was measured exactly."""
    name = JUDGED[column]
    nominal = float(getattr(design.margins, name))
    found = {key: float(getattr(m, name)) for key, m in exact.items() if name != "delay" or not math.isnan(m.delay)}
    worse = max if name == "gain_lower" else min
    if not all(m.stable for m in exact.values()):
        value, x = math.nan, pool.lowest(column)
    else:
        key = worse(found, key=lambda k: found[k])
        value, x = found[key], np.frombuffer(key)
    if not math.isnan(value) and worse(nominal, value) == nominal:
        value, x = nominal, np.zeros(len(ranges))
    return WorstCase(name, nominal, value, _causes(screen, ranges, x, column))


def _causes(screen: Screen, ranges: tuple[Range, ...], x: Array, column: int) -> dict[str, float]:
    """Return the deviations that matter at a point: those whose return to nominal gives the margin something back."""
    if not np.any(x):
        return {}
    moved = [i for i in range(len(x)) if x[i] != 0.0]
    tried = [np.zeros_like(x), x, *(np.where(np.arange(len(x)) == i, 0.0, x) for i in moved)]
    value = screen.scores([deviation(ranges, y) for y in tried])[:, column]
    value = np.where(np.isfinite(value), value, 1e9)
    gained = (value[2:] - value[1]) / max(value[0] - value[1], 1e-12)
    order = [i for i in np.argsort(-gained, kind="stable") if gained[i] >= IDLE]
    by = deviation(ranges, x)
    return {ranges[moved[i]].name: by[ranges[moved[i]].name] for i in order}


def _key(x: Array) -> bytes:
    return np.ascontiguousarray(x, dtype=np.float64).tobytes()
