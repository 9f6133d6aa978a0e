"""Branch and bound for many questions at once: the cheapest setting under each set of limits, proven.

Every box belongs to one question and carries its limits, so that boxes of all questions are bounded
together, and every setting that is evaluated for one is offered to all. A question takes in pairs by
rising least cost until the next is dearer than the best setting it knows.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import rounded
from optimizer.search import keys
from optimizer.search.bounds import Goals
from optimizer.search.boxes import Boxes, settings_of, single, whole
from optimizer.search.feed import Pairs
from optimizer.search.hunt import inner_level, least_ties
from optimizer.search.space import Choice
from optimizer.search.split import filled, halves, narrowed
from optimizer.search.spread.shifted import bounded
from optimizer.search.upper import Bound
from optimizer.search.view import Index, view
from optimizer.search.weigh.questions import COST, MARGIN, REST, Best, Questions, key_of, offer, promising
from optimizer.search.weigh.valued import Valued, valued

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

BATCH = 4096
"""Boxes that are bounded at once."""
SPLIT = 2048
"""Boxes that are split in one step, shared by the questions: each has from FEWEST to LARGEST of them."""
FEWEST, LARGEST = 32, 512
FIRST, MOST = 512, 16384
"""Pairs that a question takes in first, and at most, at a time."""


@dataclass(frozen=True, slots=True)
class Pool:
    """Boxes with the question that each belongs to, the keys that bound them, and how soon each is due."""

    boxes: Boxes
    question: Ints
    key: Floats
    priority: Floats

    @property
    def size(self) -> int:
        """How many boxes there are."""
        return int(self.question.size)

    def take(self, rows: Ints | Bools) -> Pool:
        """The boxes at `rows`."""
        return Pool(self.boxes.take(rows), self.question[rows], self.key[rows], self.priority[rows])


def joined(pools: list[Pool]) -> Pool:
    """All boxes of `pools` in one."""
    return Pool(
        Boxes(np.concatenate([pool.boxes.rows for pool in pools])),
        np.concatenate([pool.question for pool in pools]),
        np.concatenate([pool.key for pool in pools]),
        np.concatenate([pool.priority for pool in pools]),
    )


Serves = Callable[[int, Ints], Bools]
"""Whether pairs (places among all) may hold anything for a question; may err on the side of yes."""


@dataclass(slots=True)
class Many:
    """The work on `questions` about one laid-out space; `pairs` by rising least cost.

    `taken` counts by question the pairs that have been taken in, `portion` how many come next.
    """

    index: Index
    questions: Questions
    pairs: Pairs
    best: Best
    serves: Serves
    taken: Ints
    portion: Ints
    evaluated: int = 0

    @staticmethod
    def of(index: Index, questions: Questions, pairs: Pairs, serves: Serves) -> Many:
        """Nothing done yet."""
        size = questions.size
        none, some = np.zeros(size, dtype=np.int64), np.full(size, FIRST)
        return Many(index, questions, pairs, Best.of(questions), serves, none, some)


def solve(many: Many, asked: Ints, watch: Callable[[Many, Pool], None]) -> None:
    """Find and prove the best setting of the questions `asked`; `watch` is called at every step."""
    with np.errstate(all="ignore"):
        pool = _nothing(many)
        while True:
            pool = pool.take(_alive(many, pool))
            hungry = _hungry(many, asked, pool)
            if hungry.size:
                pool = joined([pool, _taken_in(many, hungry)])
                pool = pool.take(_alive(many, pool))
            elif not pool.size:
                return
            pool = _stepped(many, pool)
            watch(many, pool)


def _stepped(many: Many, pool: Pool) -> Pool:
    """`pool` after the boxes that are due were split."""
    due = _due(many, pool)
    chosen = pool.take(due)
    if not chosen.size:
        return pool
    children = halves(many.index, chosen.boxes)
    split = _admitted(many, children, np.tile(chosen.question, 2))
    return joined([pool.take(~due), split])


def _nothing(many: Many) -> Pool:
    width = many.best.key.shape[1]
    none = np.zeros(0, dtype=np.int64)
    return Pool(Boxes(np.zeros((0, 10), dtype=np.int64)), none, np.zeros((0, width)), np.zeros(0))


def _next_floor(many: Many) -> Floats:
    """By question, the least cost of the pairs that have not been taken in."""
    floor = np.append(many.pairs.floor, np.inf)
    return floor[many.taken]


def _hungry(many: Many, asked: Ints, pool: Pool) -> Ints:
    """Questions that need more pairs before their boxes are worked on."""
    least = np.full(many.questions.size, np.inf)
    np.minimum.at(least, pool.question, pool.key[:, COST])
    nearest = _next_floor(many)
    more = (nearest < np.inf) & (nearest <= many.best.key[:, COST]) & (least > nearest)
    return asked[more[asked]]


def _taken_in(many: Many, hungry: Ints) -> Pool:
    """The next pairs of the `hungry` questions as whole boxes, bounded."""
    places, question = [], []
    for k in hungry.tolist():
        stop = np.searchsorted(many.pairs.floor, many.best.key[k, COST], "right")
        stop = min(int(stop), int(many.taken[k] + many.portion[k]))
        fresh = np.arange(many.taken[k], stop)
        many.taken[k] = stop
        many.portion[k] = min(2 * many.portion[k], MOST)
        fresh = fresh[many.serves(k, fresh)]
        places.append(fresh)
        question.append(np.full(fresh.size, k))
    pairs = many.pairs.take(np.concatenate(places))
    return _admitted(many, whole(many.index.space, pairs.opamp, pairs.diode), np.concatenate(question))


def _due(many: Many, pool: Pool) -> Bools:
    """The boxes to be split now: the first of each question, as many of each as there is room for."""
    open_ = np.unique(pool.question).size
    share = min(max(SPLIT // max(open_, 1), FEWEST), LARGEST)
    order = np.lexsort((pool.priority, pool.question))
    question = pool.question[order]
    start = np.searchsorted(question, question)
    due = np.zeros(pool.size, dtype=bool)
    due[order[np.arange(pool.size) - start < share]] = True
    return due & (pool.key[:, COST] <= _next_floor(many)[pool.question])


def _alive(many: Many, pool: Pool) -> Bools:
    """Where a box may hold a setting that comes before the best known of its question."""
    return keys.less(pool.key, many.best.key[pool.question])


def _admitted(many: Many, boxes: Boxes, question: Ints) -> Pool:
    """Bound `boxes`, evaluate the single ones that are left, and return the others."""
    parts = []
    for begin in range(0, len(boxes), BATCH):
        part = slice(begin, begin + BATCH)
        parts.append(_bounded(many, Boxes(boxes.rows[part]), question[part]))
    pool = joined(parts) if parts else _nothing(many)
    lone = single(pool.boxes)
    if lone.any():
        _evaluate(many, pool.boxes.take(lone))
    return pool.take(~lone)


def _bounded(many: Many, boxes: Boxes, question: Ints) -> Pool:
    """What is left of `boxes`, with their keys."""
    v = view(many.index, boxes)
    goals = _goals(many, question)
    levels = _levels(many, goals, (boxes, question), (rounded(v.cost), rounded(v.supply_current)))
    said = bounded(many.index, boxes, v, goals, levels)
    boxes = narrowed(many.index, boxes, said.left, v)
    keep = said.possible & filled(boxes)
    boxes, question = boxes.take(keep), question[keep]
    key = _key(many, (boxes, question), said, keep)
    pool = Pool(boxes, question, key, _priority(many, boxes, key))
    return pool.take(_alive(many, pool))


def _goals(many: Many, question: Ints) -> Goals:
    """The limits of each box; the bounds broadcast them."""
    questions = many.questions
    limits = dict(zip(questions.names, questions.limits[question].T, strict=True))
    return Goals(many.index.space.bench, limits, questions.comfort)


def _levels(
    many: Many, goals: Goals, rows: tuple[Boxes, Ints], known: tuple[Floats, Floats]
) -> tuple[Floats, Floats]:
    """The smallest margin that a setting of each box needs to be of any use; and what the margins other

    than cost and supply current need, where those alone hold it down. `known`: least cost and current.
    """
    boxes, question = rows
    best = many.best
    cost = np.maximum(known[0], best.floor[question])
    key = best.key[question]
    tied = cost >= key[:, COST]
    level = np.where(tied, np.maximum(-key[:, MARGIN], 0.0), 0.0)
    pair = np.column_stack([boxes.column(Boxes.OPAMP), boxes.column(Boxes.DIODE)])
    same = tied & np.all(pair == best.choice[question, :2], axis=1)
    if not same.any():
        return level, level
    targets = len(many.questions.names)
    row = np.column_stack([key[:, [COST, COST, MARGIN]], key[:, REST : REST + targets - 1]])
    return level, np.where(same, np.maximum(level, inner_level(goals, known, row)), level)


def _key(many: Many, rows: tuple[Boxes, Ints], said: Bound, keep: Bools) -> Floats:
    """The key that no setting of a box can come before."""
    boxes, question = rows
    vector = np.sort(said.margin_columns[keep], axis=1)
    cost = np.maximum(said.cost[keep], many.best.floor[question])
    pair = (boxes.column(Boxes.OPAMP), boxes.column(Boxes.DIODE))
    return key_of(many.index.space, pair, (cost, vector, least_ties(many.index, boxes)))


def _priority(many: Many, boxes: Boxes, key: Floats) -> Floats:
    """One number that sorts boxes roughly as their keys do, the smaller box first where they are alike."""
    size = np.sum(np.log2(boxes.rows[:, 3::2] - boxes.rows[:, 2::2]), axis=1)
    finer = (many.questions.comfort + key[:, MARGIN]) + 0.01 * size
    return np.asarray(key[:, COST] * (1.0 + 1e-7 * finer) + 1e-8 * finer)


def _evaluate(many: Many, boxes: Boxes) -> None:
    """Evaluate boxes of one setting each, every setting once, for all questions."""
    index, questions, best = many.index, many.questions, many.best
    rows = np.unique(boxes.rows, axis=0)
    choice: Choice = settings_of(Boxes(rows), index.resistors, index.capacitors)
    many.evaluated += rows.shape[0]
    found = valued(index.space, choice, questions.names, lambda given: _useful(many, given))
    offer(index.space, questions, best, found)


def _useful(many: Many, given: Valued) -> Bools:
    """Where a setting may still be the best of some question."""
    return np.asarray(promising(many.questions, many.best, given).any(axis=1))
