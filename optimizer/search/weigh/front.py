"""The exact front of cost against one target: every receiver that none beats in both.

All other stated limits must be met, the target's own is dropped. Found point by point, each proven:
the lowest cost of all whose value is better than the last point's, and at that cost the best value
(the cheapest-first hunt with the target alone graded). A hunt tells values apart no finer than margins
do; where the next point costs the same, it takes the place of the last, so only true corners stay.
Values in dB closer than 1e-8, in degrees closer than 1e-7, count as one.
"""

from __future__ import annotations

import time
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import groupby

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import assemble, impossible
from optimizer.search.boxes import whole
from optimizer.search.feed import Pairs
from optimizer.search.hunt import Rules
from optimizer.search.query import Query
from optimizer.search.result import Candidate, Progress
from optimizer.search.shortlist import Report
from optimizer.search.space import Choice
from optimizer.search.spread.shifted import bounded
from optimizer.search.view import view
from optimizer.search.weigh import steps
from optimizer.search.weigh.conflicts import Conflicts, conflicts
from optimizer.search.weigh.ground import Ground, first, lay_out, under, value_of

Floats = NDArray[np.float64]

BLOCK = 16384
SLACK = 1e-8
"""Slack on margins, against their rounding, when pairs are left out by their bounds."""

AGAINST = tuple(name for name in margins.TARGETS if name != "cost")
"""Targets that cost can be held against."""


@dataclass(frozen=True, slots=True)
class Point:
    """One receiver of the front: the value that its target has (at the worst corner, if those count; with

    as many sources as are asked for), and the margin of that against the target's own limit, if it has one.
    """

    cost: float
    value: float
    margin: float | None
    candidate: Candidate


@dataclass(frozen=True, slots=True)
class Front:
    """Cost against `target`, cheapest first; `limit` is the target's own as stated, which is dropped.

    All `others` are met. `impossible` as in an outcome. `conflicts` say why there is no point at all.
    """

    target: str
    limit: float | None
    others: tuple[str, ...]
    points: tuple[Point, ...] = ()
    evaluated: int = 0
    seconds: float = 0.0
    impossible: tuple[str, ...] = ()
    conflicts: Conflicts | None = None

    @property
    def meets(self) -> bool:
        """Whether some point meets the whole request."""
        return any(point.margin is None or point.margin >= 0.0 for point in self.points)


@dataclass(frozen=True, slots=True)
class _Hit:
    """The setting of a point."""

    cost: float
    value: float
    choice: Choice


@dataclass(slots=True)
class _Walk:
    """The work: along target `name`, with `rest` met; `evaluated` settings so far."""

    ground: Ground
    name: str
    rest: Mapping[str, float]
    evaluated: int = 0

    def asked(self, limit: float) -> Query:
        """The target alone graded, against `limit`."""
        return under(self.ground, {self.name: limit}, musts=self.rest)

    def cheapest(self, pairs: Pairs, limit: float, *, least: float = 0.0) -> _Hit | None:
        """The cheapest setting with a margin of `least` against `limit`, and the best of those."""
        asked = self.asked(limit)
        found = first(replace(self.ground, pairs=pairs), asked, Rules("cost", 1, least))
        self.evaluated += found.evaluated
        if not found.cost.size:
            return None
        return _Hit(float(found.cost[0]), value_of(asked, found.choice, self.name), found.choice)


def front(request: Request, catalogs: Catalogs, target: str, *, progress: Report | None = None) -> Front:
    """The front of cost against `target`, one of AGAINST; `progress` is told how many points are found."""
    begun = time.perf_counter()
    space, ground = lay_out(request, catalogs)
    known, limit = impossible.reasons(space), space.limits.get(target)
    rest = {name: stated for name, stated in space.limits.items() if name != target}
    if ground is None:
        return Front(target, limit, tuple(rest), impossible=known)
    walk = _Walk(ground, target, rest)
    hits = list(_corners(_walked(walk, progress)))
    points = tuple(_point(ground, (target, limit), hit) for hit in hits)
    why = None if points else conflicts(ground, rest)[0]
    evaluated = walk.evaluated + (0 if why is None else why.evaluated)
    spent = (evaluated, time.perf_counter() - begun)
    return Front(target, limit, tuple(rest), points, *spent, known, why)


def _point(ground: Ground, target: tuple[str, float | None], hit: _Hit) -> Point:
    name, limit = target
    margin = None if limit is None else float(margins.margin(name, np.array(hit.value), limit))
    candidate = assemble.candidates(ground.space, ground.catalogs, hit.choice)[0]
    return Point(hit.cost, hit.value, margin, candidate)


def _walked(walk: _Walk, progress: Report | None) -> Iterator[_Hit]:
    """Settings each of which is better than the one before and costs no less; all of the front among them."""
    every = walk.ground.pairs
    start = walk.ground.space.limits.get(walk.name, 1.0)
    hit = walk.cheapest(every, start, least=-1.0)
    if hit is not None and np.isnan(hit.value):
        hit = walk.cheapest(every, steps.loosest(walk.name))
    reach: _Reach | None = None
    found = 0
    while hit is not None:
        yield hit
        found += 1
        if progress is not None:
            progress(Progress(found, found, walk.evaluated, None))
        limit = steps.stricter(walk.name, hit.value)
        if limit is None:
            return
        reach = _Reach.of(walk, limit) if reach is None else reach
        hit = walk.cheapest(reach.pairs(walk, limit), limit)


def _corners(hits: Iterable[_Hit]) -> Iterator[_Hit]:
    """Of several hits at one cost the last."""
    for _, alike in groupby(hits, key=lambda hit: hit.cost):
        yield list(alike)[-1]


@dataclass(frozen=True, slots=True)
class _Reach:
    """How far each pair can go, at most: its margin against the limit `against`."""

    against: float
    margin: Floats

    @staticmethod
    def of(walk: _Walk, against: float) -> _Reach:
        """Bound every pair."""
        pairs, asked = walk.ground.pairs, walk.asked(against)
        margin = np.full(pairs.size, -np.inf)
        with np.errstate(all="ignore"):
            for begin in range(0, pairs.size, BLOCK):
                part = slice(begin, begin + BLOCK)
                boxes = whole(asked.space, pairs.opamp[part], pairs.diode[part])
                level = np.full(len(boxes), -1.0)
                said = bounded(asked.index, boxes, view(asked.index, boxes), asked.goals, (level, level))
                margin[part] = np.where(said.possible, said.margin_columns[:, 0], -np.inf)
        return _Reach(against, margin)

    def pairs(self, walk: _Walk, limit: float) -> Pairs:
        """The pairs that may meet `limit`."""
        need = float(margins.margin(walk.name, np.array(limit), self.against))
        return walk.ground.pairs.take(self.margin >= need - SLACK * (1.0 + abs(need)))
