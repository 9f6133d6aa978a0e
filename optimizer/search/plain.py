"""The plain evaluator: every combination, one after the other. Slow, and the measure of the search.

The tests hold the search to it on small spaces, and the benchmark measures its speed.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.figures import CHECKS, evaluate
from optimizer.search import keys
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space, own_code, settings

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

BLOCK = 16384


@dataclass(frozen=True, slots=True)
class Judged:
    """Settings evaluated: what keys need. `reach`: first check failed, PASSES where eligible.

    `admitted`: eligible, and all that must be met without being graded is met.
    """

    choice: Choice
    reach: Ints
    admitted: Bools
    margin_columns: Floats
    primary: Floats
    cost: Floats
    vector: Floats

    @property
    def meets(self) -> Bools:
        """Where the setting is admitted and misses nothing."""
        return np.asarray(self.admitted & (self.vector[:, 0] >= 0.0))

    def take(self, rows: Ints | Bools) -> Judged:
        """The settings at `rows`."""
        return Judged(
            self.choice.take(rows),
            self.reach[rows],
            self.admitted[rows],
            self.margin_columns[rows],
            self.primary[rows],
            self.cost[rows],
            self.vector[rows],
        )

    @property
    def columns(self) -> tuple[Floats, Floats, Floats]:
        """Primary, cost and sorted margins, as the keys take them."""
        return self.primary, self.cost, self.vector


def judge(space: Space, choice: Choice, by: str) -> Judged:
    """Evaluate `choice` and everything that ranks it under ranking `by`."""
    with np.errstate(all="ignore"):
        result = evaluate(space.bench, settings(space, choice))
    reach = own_code(space, choice)
    for name, fails in result.fails.items():
        reach = np.minimum(reach, np.where(fails, CHECKS.index(name), PASSES))
    columns = margins.margins(result.figures, space.limits)
    vector = keys.comfortable(space, columns)
    first = keys.primary(by, result.figures, vector[:, 0])
    admitted = (reach == PASSES) & np.all(margins.margins(result.figures, space.musts) >= 0.0, axis=1)
    return Judged(choice, reach, admitted, columns, first, result.figures["cost"], vector)


def every_choice(space: Space, opamp: int, diode: int) -> Iterator[Choice]:
    """All settings of one pair, in blocks."""
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    total = int(np.prod(sizes))
    for start in range(0, total, BLOCK):
        index = np.unravel_index(np.arange(start, min(start + BLOCK, total)), sizes)
        same = np.ones(index[0].size, dtype=np.int64)
        yield Choice(opamp * same, diode * same, *(np.asarray(i, dtype=np.int64) for i in index))


@dataclass(frozen=True, slots=True)
class PairResult:
    """One pair, every setting evaluated: the best that meets, the nearest, the check reached."""

    best: Judged | None
    nearest: Judged | None
    reach: int


def pair(space: Space, opamp: int, diode: int) -> PairResult:
    """Evaluate every setting of one pair."""
    best: Judged | None = None
    nearest: Judged | None = None
    reach = -1
    for choice in every_choice(space, opamp, diode):
        judged = judge(space, choice, space.request.ranking.by)
        reach = max(reach, int(judged.reach.max()))
        best = _better(space, best, judged.take(judged.meets))
        near = judged.take(judged.admitted)
        near = replace(near, primary=-near.vector[:, 0])
        nearest = _better(space, nearest, near)
    return PairResult(best, nearest, reach)


def _better(space: Space, best: Judged | None, others: Judged) -> Judged | None:
    if not others.reach.size:
        return best
    key = keys.within_pair(space, others.choice, others.columns)
    first = others.take(keys.order(key)[:1])
    if best is None:
        return first
    old = keys.within_pair(space, best.choice, best.columns)
    return first if keys.less(keys.within_pair(space, first.choice, first.columns), old)[0] else best
