"""Branch and bound over boxes: the best setting of every pair that can reach the last row shown.

A hunt keeps the best setting found of each pair (its incumbent) and the last row that the shortlist
would show (the bar). A box is dropped when it holds no setting that meets, or none that comes before
its pair's incumbent, or none that reaches the bar; what is left is split, down to single settings,
which are evaluated exactly. So the result does not depend on the order of the work.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.figures import rounded
from optimizer.search import keys
from optimizer.search.bounds import Goals
from optimizer.search.boxes import Boxes, Span, settings_of, single, whole
from optimizer.search.incumbents import Incumbents, improve
from optimizer.search.plain import Judged, judge
from optimizer.search.sources import is_sourced, may_be_sourced
from optimizer.search.split import filled, halves, narrowed
from optimizer.search.spread.corners import blocks, worsened
from optimizer.search.spread.shifted import bounded
from optimizer.search.upper import Bound
from optimizer.search.view import Index, view

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

BATCH = 4096
FRONT = 4096
_PROBES = 1


@dataclass(frozen=True, slots=True)
class Rules:
    """What is hunted: the ranking, how many pairs, and the smallest margin that counts (0, or -1)."""

    by: str
    show: int
    least: float


@dataclass(slots=True)
class Pool:
    """Boxes still to be split, with the keys that bound them; one row each."""

    boxes: Boxes
    key: Floats
    priority: Floats

    @staticmethod
    def empty(width: int) -> Pool:
        """A pool without boxes."""
        return Pool(Boxes(np.zeros((0, 10), dtype=np.int64)), np.zeros((0, width)), np.zeros(0))

    def take(self, rows: NDArray[np.int64] | Bools) -> Pool:
        """The boxes at `rows`."""
        return Pool(self.boxes.take(rows), self.key[rows], self.priority[rows])

    def join(self, other: Pool) -> Pool:
        """Both pools in one."""
        return joined([self, other])


def joined(pools: Sequence[Pool]) -> Pool:
    """All boxes of `pools` in one pool."""
    return Pool(
        Boxes(np.concatenate([pool.boxes.rows for pool in pools])),
        np.concatenate([pool.key for pool in pools]),
        np.concatenate([pool.priority for pool in pools]),
    )


@dataclass(slots=True)
class Hunt:
    """One search in progress."""

    index: Index
    goals: Goals
    rules: Rules
    incumbents: Incumbents
    pool: Pool
    evaluated: int = 0


def start(index: Index, goals: Goals, rules: Rules) -> Hunt:
    """A hunt that has seen nothing yet."""
    space = index.space
    pairs = space.opamps.gbw.size * space.diodes.price.size
    width = 2 + len(goals.limits) + 6
    return Hunt(index, goals, rules, Incumbents.of(pairs), Pool.empty(width))


def add(hunt: Hunt, opamp: Ints, diode: Ints) -> None:
    """Take pairs into the hunt."""
    added = []
    for begin in range(0, opamp.size, BATCH):
        part = slice(begin, begin + BATCH)
        boxes = whole(hunt.index.space, opamp[part], diode[part])
        added.append(_admitted(hunt, boxes, np.full(len(boxes), -np.inf)))
    hunt.pool = joined([hunt.pool, *added])


def drain(hunt: Hunt, stop_at: float, enough: Callable[[], bool]) -> None:
    """Split boxes, the most promising first, until none is left up to primary figure `stop_at`.

    The best boxes are worked on apart from the others, so that a large pool is not touched at every
    step. `enough` is asked after every batch, and ends the work when it says so.
    """
    front = Pool.empty(hunt.pool.key.shape[1])
    while True:
        if not front.priority.size:
            hunt.pool = hunt.pool.take(_alive(hunt, hunt.pool))
            if not hunt.pool.priority.size or hunt.pool.key[:, 0].min() > stop_at:
                return
            front, hunt.pool = _best(hunt.pool, FRONT)
        front = front.take(_alive(hunt, front))
        chosen, front = _best(front, BATCH // 2)
        if chosen.priority.size:
            children = halves(hunt.index, chosen.boxes)
            front = front.join(_admitted(hunt, children, np.tile(chosen.key[:, 0], 2)))
        if front.priority.size > 4 * FRONT:
            front, rest = _best(front, FRONT)
            hunt.pool = hunt.pool.join(rest)
        if enough():
            hunt.pool = hunt.pool.join(front)
            return


def _best(pool: Pool, count: int) -> tuple[Pool, Pool]:
    """The `count` boxes of least priority, and the others."""
    if pool.priority.size <= count:
        return pool, pool.take(np.zeros(0, dtype=np.int64))
    order = np.argpartition(pool.priority, count - 1)
    return pool.take(order[:count]), pool.take(order[count:])


def _pairs(hunt: Hunt, boxes: Boxes) -> Ints:
    return boxes.column(Boxes.OPAMP) * hunt.index.space.diodes.price.size + boxes.column(Boxes.DIODE)


def _admitted(hunt: Hunt, boxes: Boxes, inherited: Floats) -> Pool:
    """Bound `boxes`, evaluate the single ones that are left, and return the others."""
    v = view(hunt.index, boxes)
    level, inner = _levels(hunt, boxes, (rounded(v.cost), rounded(v.supply_current)), inherited)
    limits = bounded(hunt.index, boxes, v, hunt.goals, (level, inner))
    boxes = narrowed(hunt.index, boxes, limits.left, v)
    keep = limits.possible & filled(boxes)
    if hunt.index.space.sources > 1:
        keep[keep] = may_be_sourced(hunt.index, boxes.take(keep), hunt.goals, hunt.rules.least)
    key = _key(hunt, boxes.take(keep), limits, keep)
    key[:, 0] = np.maximum(key[:, 0], inherited[keep])
    if hunt.rules.by == "margin":
        key = _probed(hunt, boxes.take(keep), key)
    boxes = boxes.take(keep)
    pool = Pool(boxes, key, _priority(hunt, boxes, key))
    pool = pool.take(_alive(hunt, pool))
    lone = single(pool.boxes)
    if lone.any():
        _evaluate(hunt, pool.take(lone))
    return pool.take(~lone)


def _probed(hunt: Hunt, boxes: Boxes, key: Floats) -> Floats:
    """`key` with the margin bound lowered: a box that holds nothing at a level has no such margin."""
    low, high = np.full(len(boxes), hunt.rules.least), -key[:, 0]
    v = view(hunt.index, boxes)
    for _ in range(_PROBES):
        middle = 0.5 * (low + high)
        possible = bounded(hunt.index, boxes, v, hunt.goals, (middle, middle)).possible
        low, high = np.where(possible, middle, low), np.where(possible, high, middle)
    key[:, 0] = np.maximum(key[:, 0], -high)
    key[:, 2] = np.maximum(key[:, 2], -high)
    return key


def _levels(
    hunt: Hunt, boxes: Boxes, known: tuple[Floats, Floats], inherited: Floats
) -> tuple[Floats, Floats]:
    """The smallest margin that a setting of each box needs to be of any use; and what the margins other

    than cost and supply current need. `known`: least cost and supply current, rounded.
    """
    rules, incumbents = hunt.rules, hunt.incumbents
    cost, current = known
    level = np.full(len(boxes), rules.least)
    first = {"cost": cost, "supply_current": current}.get(rules.by)
    if first is None:
        first = inherited
    if incumbents.bar is not None:
        tied = _not_before(rules.by, (first, cost), incumbents.bar[None, :])
        level = np.where(tied, np.maximum(level, -incumbents.bar[2]), level)
    slots = incumbents.slot_of[_pairs(hunt, boxes)]
    has = slots >= 0
    if not has.any():
        return level, level
    best = incumbents.key[slots]
    tied = has & _not_before(rules.by, (first, cost), best)
    level = np.where(tied, np.maximum(level, -best[:, 2]), level)
    dearer = tied & (cost >= best[:, 1])
    return level, np.where(dearer, np.maximum(level, inner_level(hunt.goals, known, best)), level)


def inner_level(goals: Goals, known: tuple[Floats, Floats], best: Floats) -> Floats:
    """What the other margins need where cost or supply current alone hold the smallest ones down.

    If the margin of one of them is at most the incumbent's smallest, a setting of the same primary and
    cost comes before only if every other margin reaches the incumbent's second; and so on.
    """
    figures = dict(zip(("cost", "supply_current"), known, strict=True))
    fixed = [margins.margin(n, f, goals.limits[n]) for n, f in figures.items() if n in goals.limits]
    vector = -best[:, 2 : 2 + len(goals.limits)]
    inner = vector[:, 0]
    held = np.ones(inner.size, dtype=bool)
    for place, most in enumerate(np.sort(np.array(fixed), axis=0) if fixed else ()):
        held = held & (most <= vector[:, place])
        if place + 1 < vector.shape[1]:
            inner = np.where(held, vector[:, place + 1], inner)
    return inner


def _not_before(by: str, known: tuple[Floats, Floats], best: Floats) -> Bools:
    """Where primary and cost cannot come before those of `best`, so that the margin must be as large.

    A margin hunt needs the margin first of all.
    """
    first, cost = known
    if by == "margin":
        return np.ones(first.size, dtype=bool)
    return np.asarray((first > best[:, 0]) | ((first == best[:, 0]) & (cost >= best[:, 1])))


def _key(hunt: Hunt, boxes: Boxes, limits: Bound, keep: Bools) -> Floats:
    """The key that no setting of a box can come before."""
    vector = np.sort(limits.margin_columns[keep], axis=1)
    cost = limits.cost[keep]
    first = {
        "cost": cost,
        "supply_current": limits.supply_current[keep],
        "margin": -vector[:, 0],
        "snr": -limits.snr[keep],
    }[hunt.rules.by]
    first = np.where(np.isnan(first), np.inf, first)
    return np.column_stack([first, cost, -vector, least_ties(hunt.index, boxes)])


def least_ties(index: Index, boxes: Boxes) -> Floats:
    """What settles the last ties (see `keys.ties`), at least, in each box."""
    column = boxes.column
    return np.column_stack(
        [
            index.resistors.value[column(Boxes.R0)],
            index.capacitors.value[column(Boxes.C0)],
            column(Boxes.X0),
            column(Boxes.L0),
            index.resistors.family.least(Span.of(column(Boxes.R0), column(Boxes.R1))),
            index.capacitors.family.least(Span.of(column(Boxes.C0), column(Boxes.C1))),
        ]
    )


def _priority(hunt: Hunt, boxes: Boxes, key: Floats) -> Floats:
    """One number that sorts boxes roughly as their keys do, the smaller box first where they are alike."""
    first = np.clip(key[:, 0], -1e30, 1e30)
    cost = key[:, 1] / (1.0 + key[:, 1])
    size = np.sum(np.log2(boxes.rows[:, 3::2] - boxes.rows[:, 2::2]), axis=1)
    finer = (hunt.goals.comfort + key[:, 2]) + 0.01 * size
    return np.asarray(first + np.abs(first) * 1e-7 * finer + 1e-6 * cost + 1e-8 * finer)


def _alive(hunt: Hunt, pool: Pool) -> Bools:
    """Where a box can still come before its pair's incumbent and reach the bar."""
    return _comes_before(hunt, (pool.boxes.column(Boxes.OPAMP), pool.boxes.column(Boxes.DIODE)), pool.key)


def _comes_before(hunt: Hunt, pair: tuple[Ints, Ints], key: Floats) -> Bools:
    """Where `key` comes before the incumbent of its `pair` (op-amp, diode) and reaches the bar."""
    incumbents, space = hunt.incumbents, hunt.index.space
    opamp, diode = pair
    slots = incumbents.slot_of[opamp * space.diodes.price.size + diode]
    before = np.ones(slots.size, dtype=bool)
    has = slots >= 0
    if has.any():
        before[has] = keys.less(key[has], incumbents.key[slots[has]])
    if incumbents.bar is not None:
        names = (space.order_diodes[diode], space.order_opamps[opamp])
        between = np.column_stack([key[:, :3], *names])
        before &= ~keys.less(incumbents.bar[None, :], between)
    return before


def _evaluate(hunt: Hunt, pool: Pool) -> None:
    """Evaluate boxes of one setting each and keep what is better than the incumbents."""
    index = hunt.index
    choice = settings_of(pool.boxes, index.resistors, index.capacitors)
    hunt.evaluated += pool.priority.size
    judged = judge(index.space, choice, hunt.rules.by)
    divided = index.space.contexts.divided[choice.context]
    for kind in (False, True):
        part = judged.take(divided == kind)
        for block in blocks(index.space, divided=kind):
            part = part.take(_useful(hunt, part))
            part = worsened(index.space, part, block, hunt.rules.by)
        part = part.take(part.admitted & (part.vector[:, 0] >= hunt.rules.least))
        if index.space.sources > 1:
            part = part.take(_useful(hunt, part))
            part = part.take(is_sourced(index.space, part.choice, hunt.rules.least))
        if part.reach.size:
            improve(index.space, hunt.incumbents, part, show=hunt.rules.show)


def _useful(hunt: Hunt, judged: Judged) -> Bools:
    """Where a setting that can only get worse may still be admitted and come before what is known."""
    useful = judged.admitted & (judged.vector[:, 0] >= hunt.rules.least)
    key = keys.within_pair(hunt.index.space, judged.choice, judged.columns)
    return useful & _comes_before(hunt, (judged.choice.opamp, judged.choice.diode), key)
