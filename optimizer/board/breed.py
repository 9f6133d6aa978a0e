"""Better plans from several good ones: the pools cut to what some of them use, and searched again.

Plans that are found from different beginnings differ in which parts they open. A board with the parts of
a few of them only is small, so a search of it is quick and combines what is good in each. (Tour merging,
after Cook and Seymour, INFORMS Journal on Computing 15 (2003), for plans instead of tours.)
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from optimizer.board.heuristic import Best, Effort, Met, look
from optimizer.board.pools import with_options
from optimizer.board.problem import Board
from optimizer.board.supplies import Floats

STARTS, KEPT, CHILDREN, PARENTS = 10, 8, 6, 3
IDLE = 2
"""Generations without a better plan after which no more are bred."""
FIRST, LATER = 25, 45
"""Steps of a search for each channel: of the first plans, and of those bred."""


@dataclass(frozen=True, slots=True)
class Breeding:
    """Until when (monotonic seconds), the seed, a guide for the first plans, and whom to tell a cost."""

    until: float
    seed: int
    guide: Floats | None
    told: Callable[[int], None]


def bred(board: Board, best: Best, breeding: Breeding) -> None:
    """Fill `best` with plans of `board`: first ones, then those bred from them, until nothing is gained."""
    copies = sum(channel.count for channel in board.channels)
    stock: list[Met] = list(best.plans.values())
    for k in range(STARTS):
        guide = breeding.guide if k % 2 else None
        steps = FIRST * copies
        stock += _found(board, best, breeding, Effort(steps, _left(breeding), breeding.seed + k, guide))
    idle, generation = 0, 0
    while idle < IDLE and stock and _left(breeding) > 0:
        generation += 1
        stock = sorted({met.cost: met for met in stock}.values())[:KEPT]
        before = best.cost
        for k in range(CHILDREN):
            draw = np.random.default_rng((breeding.seed, generation, k))
            parents = [stock[p] for p in draw.permutation(len(stock))[:PARENTS]]
            stock = stock + _child(board, best, breeding, parents, generation * CHILDREN + k)
        idle = 0 if best.cost < before else idle + 1


def _left(breeding: Breeding) -> float:
    return breeding.until - time.monotonic()


def _found(board: Board, best: Best, breeding: Breeding, effort: Effort) -> list[Met]:
    """The plan of one search, kept in `best` too."""
    everything = [list(range(len(channel.options))) for channel in board.channels]
    return _among(board, best, breeding, (everything, effort))


def _child(board: Board, best: Best, breeding: Breeding, parents: Sequence[Met], seed: int) -> list[Met]:
    """The plan of a search among the parts and references of some plans only."""
    steps = LATER * sum(channel.count for channel in board.channels)
    effort = Effort(steps, _left(breeding), breeding.seed + seed)
    return _among(board, best, breeding, (inherited(board, parents), effort))


def _among(board: Board, best: Best, breeding: Breeding, task: tuple[list[list[int]], Effort]) -> list[Met]:
    """The best plan of one search among some options of each channel; all it met are offered to `best`."""
    keep, effort = task
    if effort.seconds <= 0:
        return []
    own, found = Best(best.keep), []
    look(with_options(board, keep), own, effort)
    for active, met in own.plans.items():
        chosen = tuple(tuple(keep[i][j] for j in js) for i, js in enumerate(met.chosen))
        found.append(replace(met, chosen=chosen))
        if best.offer(active, found[-1]):
            breeding.told(met.cost)
    return [min(found)] if found else []


def inherited(board: Board, parents: Sequence[Met]) -> list[list[int]]:
    """The options of each channel that use only what some of `parents` use."""
    parts = {part for met in parents for part, _ in met.pieces}
    families = {f for f, family in enumerate(board.families) if parts.intersection(family.packages)}
    references = {
        board.channels[i].options[j].reference
        for met in parents
        for i, js in enumerate(met.chosen)
        for j in js
    }
    return [
        [
            j
            for j, option in enumerate(channel.options)
            if option.family in families
            and parts.issuperset(option.parts)
            and (option.reference is None or option.reference in references)
        ]
        for channel in board.channels
    ]
