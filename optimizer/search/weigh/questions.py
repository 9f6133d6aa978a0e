"""Several sets of limits on the same targets, and the cheapest setting known under each.

Ranked as a shortlist by cost with one row: cost, smallest margin (up to comfort), names of photodiode
and op-amp, then the other margins and the last ties. For one row this is one order of settings.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.search import keys
from optimizer.search.sources import enough, mates
from optimizer.search.space import Choice, Space
from optimizer.search.weigh import steps
from optimizer.search.weigh.valued import Valued, valued

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

COST, MARGIN, NAMES, REST = 0, 1, slice(2, 4), 4
"""Places in a key: cost, minus the smallest margin, two names; from REST on the other margins and ties."""

_BLOCK = 4096


@dataclass(frozen=True, slots=True)
class Questions:
    """One row of `limits` a question, one column a target of `names`; margins from `comfort` rank alike."""

    names: tuple[str, ...]
    limits: Floats
    comfort: float

    @property
    def size(self) -> int:
        """How many questions there are."""
        return int(self.limits.shape[0])

    def margins(self, values: Floats) -> list[tuple[Floats, Ints]]:
        """By target: margins of settings against each limit that occurs, and which of them a question has."""
        tables = []
        for k, name in enumerate(self.names):
            limits, place = np.unique(self.limits[:, k], return_inverse=True)
            tables.append((steps.graded(name, values[:, k, None], limits[None, :]), place.ravel()))
        return tables


@dataclass(slots=True)
class Best:
    """By question: the key of the best setting known (inf: none), and its choice.

    `floor` is a cost below which nothing can be found.
    """

    key: Floats
    choice: Ints
    floor: Floats

    @staticmethod
    def of(questions: Questions) -> Best:
        """Nothing known yet."""
        size, targets = questions.limits.shape
        return Best(
            np.full((size, targets + 9), np.inf),
            np.zeros((size, 6), dtype=np.int64),
            np.full(size, -np.inf),
        )

    @property
    def found(self) -> Bools:
        """Which questions have a setting."""
        return np.asarray(np.isfinite(self.key[:, COST]))


def key_of(space: Space, pair: tuple[Ints, Ints], columns: tuple[Floats, Floats, Floats]) -> Floats:
    """Key rows from op-amp and diode, and from cost, sorted margins and last ties (exact or bounds)."""
    opamp, diode = pair
    cost, vector, ties = columns
    names = (space.order_diodes[diode], space.order_opamps[opamp])
    return np.column_stack([cost, -vector[:, 0], *names, -vector[:, 1:], ties])


def offer(space: Space, questions: Questions, best: Best, found: Valued) -> None:
    """Take each of the settings `found` where it meets a question and comes before what is known."""
    for begin in range(0, found.size, _BLOCK):
        _offer(space, questions, best, found.take(np.arange(begin, min(begin + _BLOCK, found.size))))


def _offer(space: Space, questions: Questions, best: Best, found: Valued) -> None:
    tables = questions.margins(found.values)
    good = promising(questions, best, found, tables)
    if space.sources > 1:
        some = np.flatnonzero(good.any(axis=1))
        good[some] &= _sourced(space, questions, found.take(some))
    rows, which = np.nonzero(good)
    if not rows.size:
        return
    columns = np.stack([table[rows, place[which]] for table, place in tables], axis=1)
    choice = found.choice.take(rows)
    vector = np.sort(np.minimum(columns, questions.comfort), axis=1)
    graded = (found.cost[rows], vector, keys.ties(space, choice))
    key = key_of(space, (choice.opamp, choice.diode), graded)
    order = keys.order(np.column_stack([which, key]))
    first = order[np.r_[True, np.diff(which[order]) != 0]]
    first = first[keys.less(key[first], best.key[which[first]])]
    best.key[which[first]] = key[first]
    best.choice[which[first]] = np.column_stack(choice.columns())[first]


def _sourced(space: Space, questions: Questions, found: Valued) -> Bools:
    """Where op-amps of enough makers serve a setting (row) under the limits of a question (column)."""
    row, mate = mates(space, found.choice.opamp)
    theirs = Choice(mate, *found.choice.take(row).columns()[1:])
    served = valued(space, theirs, questions.names)
    row, mate = row[served.origin], mate[served.origin]
    meets = np.ones((served.size, questions.size), dtype=bool)
    for table, place in questions.margins(served.values):
        meets &= table[:, place] >= 0.0
    columns = [enough(space, found.size, row[ok], mate[ok]) for ok in meets.T]
    return np.stack(columns, axis=1)


def promising(
    questions: Questions, best: Best, found: Valued, tables: list[tuple[Floats, Ints]] | None = None
) -> Bools:
    """Where a setting (row) meets a question (column) and may come before what is known, names aside."""
    tables = questions.margins(found.values) if tables is None else tables
    least = np.full((found.size, questions.size), np.inf)
    for table, place in tables:
        np.minimum(least, table[:, place], out=least)
    cost = found.cost[:, None]
    cheaper, as_cheap = cost < best.key[:, COST], cost == best.key[:, COST]
    better = -np.minimum(least, questions.comfort) <= best.key[:, MARGIN]
    return np.asarray((least >= 0.0) & (cheaper | (as_cheap & better)))


def choice_of(best: Best, rows: list[int]) -> Choice:
    """The best settings of the questions at `rows`."""
    return Choice(*best.choice[rows].T)
