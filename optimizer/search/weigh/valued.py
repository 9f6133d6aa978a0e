"""Settings by the value of every target, nominal or the worst of the corners: for any limits at all.

A margin does not fall where its value gets better, so the margin of the worst value is the worst margin.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import evaluate
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space, own_code, settings
from optimizer.search.spread.corners import BLOCK, Corner, blocks, deviations, evaluated
from optimizer.vocabulary import VOCABULARY

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Valued:
    """Settings, their cost, and the value of each target (one column a target); NaN does not exist.

    `origin` says which of the settings given each was.
    """

    choice: Choice
    cost: Floats
    values: Floats
    origin: Ints

    @property
    def size(self) -> int:
        """How many settings there are."""
        return int(self.cost.size)

    def take(self, rows: Ints | Bools) -> Valued:
        """The settings at `rows`."""
        return Valued(self.choice.take(rows), self.cost[rows], self.values[rows], self.origin[rows])


Useful = Callable[[Valued], Bools]


def every(given: Valued) -> Bools:
    """Leave nothing out."""
    return np.ones(given.size, dtype=bool)


def valued(space: Space, choice: Choice, names: tuple[str, ...], useful: Useful = every) -> Valued:
    """The eligible settings among `choice` with the values of targets `names`.

    Left out is what `useful` refuses; it is asked before corners are evaluated, and between blocks of
    them, of values that can only get worse.
    """
    with np.errstate(all="ignore"):
        result = evaluate(space.bench, settings(space, choice))
    columns = [np.broadcast_to(result.figures[name], choice.opamp.shape) for name in names]
    places = np.arange(choice.opamp.size)
    nominal = Valued(choice, result.figures["cost"], np.column_stack(columns), places)
    nominal = nominal.take(np.asarray(result.eligible & (own_code(space, choice) == PASSES)))
    divided = space.contexts.divided[nominal.choice.context]
    parts = [
        _worst(space, nominal.take(divided == kind), names, useful, divided=kind) for kind in (False, True)
    ]
    return _joined(parts)


def _worst(space: Space, given: Valued, names: tuple[str, ...], useful: Useful, *, divided: bool) -> Valued:
    for block in blocks(space, divided=divided):
        given = given.take(useful(given))
        step = max(BLOCK // len(block), 1)
        rows = [np.arange(b, min(b + step, given.size)) for b in range(0, given.size, step)]
        if rows:
            given = _joined([_worse(space, given.take(part), names, block) for part in rows])
    return given


def _worse(space: Space, given: Valued, names: tuple[str, ...], corners: tuple[Corner, ...]) -> Valued:
    shape = (len(corners), given.size)
    choice, deviation = deviations(space, given.choice, corners)
    result, fine = evaluated(space, choice, deviation)
    values = given.values.copy()
    for k, name in enumerate(names):
        there = np.broadcast_to(result.figures[name], choice.opamp.shape).reshape(shape)
        # NaN spreads through both: a figure that does not exist somewhere is the worst there is
        worse = np.minimum if VOCABULARY[name].better == "higher" else np.maximum
        values[:, k] = worse(values[:, k], worse.reduce(there, axis=0))
    return replace(given, values=values).take(np.asarray(fine.reshape(shape).all(axis=0)))


def _joined(parts: list[Valued]) -> Valued:
    columns = zip(*(part.choice.columns() for part in parts), strict=True)
    return Valued(
        Choice(*(np.concatenate(column) for column in columns)),
        np.concatenate([part.cost for part in parts]),
        np.concatenate([part.values for part in parts]),
        np.concatenate([part.origin for part in parts]),
    )
