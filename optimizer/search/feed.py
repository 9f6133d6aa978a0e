"""Which pairs a hunt takes in, in what order, and when it may stop."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import rounded
from optimizer.search import hunt as hunting
from optimizer.search.bounds import Goals
from optimizer.search.boxes import whole
from optimizer.search.hunt import Hunt, Rules
from optimizer.search.spread.shifted import bounded
from optimizer.search.view import Index, totals, view

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

FIRST = 1024
LARGEST = 65536
_BLOCK = 16384


@dataclass(frozen=True, slots=True)
class Pairs:
    """Pairs by rising `floor`, the least that the ranked figure (or else the cost) can be."""

    opamp: Ints
    diode: Ints
    floor: Floats

    def take(self, rows: NDArray[np.int64] | NDArray[np.bool_]) -> Pairs:
        """The pairs at `rows`."""
        return Pairs(self.opamp[rows], self.diode[rows], self.floor[rows])

    @property
    def size(self) -> int:
        """How many pairs there are."""
        return int(self.opamp.size)


def floors(index: Index, opamp: Ints, diode: Ints, *, by: str) -> Floats:
    """The least supply current (if that ranks) or cost of each pair, rounded as figures are."""
    least = np.empty(opamp.size)
    for begin in range(0, opamp.size, _BLOCK):
        part = slice(begin, begin + _BLOCK)
        figures = totals(index, whole(index.space, opamp[part], diode[part]))
        least[part] = rounded(figures["supply_current" if by == "supply_current" else "cost"])
    return np.where(np.isnan(least), np.inf, least)


def pairs_of(index: Index, opamps: Ints, diodes: Ints, *, by: str) -> Pairs:
    """Every pair of `opamps` and `diodes`, by rising floor."""
    opamp = np.repeat(opamps, diodes.size)
    diode = np.tile(diodes, opamps.size)
    floor = floors(index, opamp, diode, by=by)
    order = np.argsort(floor, kind="stable")
    return Pairs(opamp[order], diode[order], floor[order])


def by_snr(index: Index, goals: Goals, pairs: Pairs) -> Pairs:
    """The pairs that may meet the request, by falling bound on their snr; the floor is minus that bound."""
    floor = np.full(pairs.size, np.inf)
    for begin in range(0, pairs.size, _BLOCK):
        part = slice(begin, begin + _BLOCK)
        boxes = whole(index.space, pairs.opamp[part], pairs.diode[part])
        zero = np.zeros(len(boxes))
        said = bounded(index, boxes, view(index, boxes), goals, (zero, zero))
        floor[part] = np.where(said.possible, -said.snr, np.inf)
    order = np.argsort(floor, kind="stable")[: int((floor < np.inf).sum())]
    return Pairs(pairs.opamp[order], pairs.diode[order], floor[order])


def run(
    index: Index, goals: Goals, rules: Rules, *, pairs: Pairs, watch: Callable[[Hunt, int], bool]
) -> Hunt:
    """Hunt through `pairs`; `watch(hunt, pairs taken in)` is asked after every batch whether to stop."""
    hunt = hunting.start(index, goals, rules)
    if rules.by == "snr":
        pairs = by_snr(index, goals, pairs)
    ranked = rules.by != "margin"
    taken = 0
    for chunk in _rising(pairs) if ranked else _sampled(pairs):
        bar = hunt.incumbents.bar
        if ranked and bar is not None and chunk.floor[0] > bar[0]:
            break
        hunting.add(hunt, chunk.opamp, chunk.diode)
        taken += chunk.size
        after = pairs.floor[taken] if ranked and taken < pairs.size else np.inf
        hunting.drain(hunt, after, lambda taken=taken: watch(hunt, taken))  # type: ignore[misc]
        if watch(hunt, taken):
            return hunt
    hunting.drain(hunt, np.inf, lambda: watch(hunt, taken))
    return hunt


def _rising(pairs: Pairs) -> Iterator[Pairs]:
    """Chunks by rising floor, each larger than the one before."""
    begin, size = 0, FIRST
    while begin < pairs.size:
        yield pairs.take(np.arange(begin, min(begin + size, pairs.size)))
        begin, size = begin + size, min(2 * size, LARGEST)


def _sampled(pairs: Pairs) -> Iterator[Pairs]:
    """An even sample first, so that the bar is high early; then the rest by rising floor."""
    sample = np.unique(np.linspace(0, pairs.size - 1, min(FIRST, pairs.size)).astype(int))
    rest = np.ones(pairs.size, dtype=bool)
    rest[sample] = False
    yield pairs.take(sample)
    yield from _rising(pairs.take(rest))
