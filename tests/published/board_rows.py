"""Rows with published optima of integer programs, each written as a board and solved as one.

A price schedule with a stock is a capacity, one that is bought up to its last break a fixed charge; a line
item is a bin; a channel is an item, a customer or a task, and its options are what may be done with it.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

from optimizer.board.problem import Board, BoardPart, Channel, Family, Option
from optimizer.board.solution import PROVEN, SolveOptions
from optimizer.board.solve import solve

FREE = ((1.0, 0.0),)
SOLVERS = ("cbc", "highs")
BATCH = 10


def solved(parts: Sequence[BoardPart], channels: Sequence[Channel], line_item: int = 0) -> float:
    """The proven least cost of a board with one free op-amp for all; both solvers must agree."""
    amplifier = BoardPart("amplifier", FREE, amplifiers=1)
    family = Family("amplifier", (len(parts),))
    board = Board(1, (*parts, amplifier), (family,), (), tuple(channels), line_item=line_item)
    found = [solve(board, SolveOptions(60, solver)) for solver in SOLVERS]
    assert [solution.status for solution in found] == [PROVEN, PROVEN]
    costs = {solution.plans[0].totals.cost for solution in found}
    assert len(costs) == 1
    return costs.pop() / 100


def item(name: str, *ways: tuple[int, ...], count: int = 1) -> Channel:
    """A channel that takes the parts of one of `ways`."""
    return Channel(name, count, tuple(Option(parts, 0) for parts in ways))


def knapsack(C: float, w: Sequence[int], p: Sequence[float]) -> float:
    """Room is a part in short stock; what is left behind costs what it is worth."""
    parts = [
        BoardPart("room", FREE, stock=C),
        *(BoardPart(f"loss {k}", ((1.0, v),)) for k, v in enumerate(p)),
    ]
    items = [item(f"item {k}", (0,) * weight, (k + 1,)) for k, weight in enumerate(w)]
    return sum(p) - solved(parts, items)


def facility_location(d: Sequence[int], M: int, f: float, c: Sequence[Sequence[float]]) -> float:
    """Sites are parts of which a whole lot is paid; customers take their demand in tens."""
    sites = range(len(c[0]))
    lot = M // BATCH
    parts = [BoardPart(f"site {j}", ((1.0, f), (float(lot), f / lot)), stock=lot) for j in sites]
    channels = []
    for i, demand in enumerate(d):
        first = len(parts)
        parts += [BoardPart(f"way {i} {j}", ((1.0, c[i][j] * BATCH),)) for j in sites]
        channels.append(item(f"customer {i}", *((j, first + j) for j in sites), count=demand // BATCH))
    return solved(parts, channels)


def assignment(cost: Sequence[Sequence[float]]) -> float:
    """A worker is a part with a stock of one."""
    workers, tasks = range(len(cost)), range(len(cost[0]))
    parts = [BoardPart(f"worker {i}", FREE, stock=1) for i in workers]
    channels = []
    for t in tasks:
        first = len(parts)
        parts += [BoardPart(f"work {i} {t}", ((1.0, cost[i][t]),)) for i in workers]
        channels.append(item(f"task {t}", *((i, first + i) for i in workers)))
    return solved(parts, channels)


def bin_packing(w: Sequence[int], C: int) -> float:
    """A bin is a line item with room in stock; the amplifier is a line item too."""
    bins = range(len(w) // 2 + 1)
    parts = [BoardPart(f"bin {k}", FREE, stock=C) for k in bins]
    channels = [item(f"item {i}", *((k,) * weight for k in bins)) for i, weight in enumerate(w)]
    return solved(parts, channels, line_item=100) - 1


HELD: dict[str, Callable[..., float]] = {
    "MIP-01a": knapsack,
    "MIP-01b": knapsack,
    "MIP-01d": knapsack,
    "MIP-01e": knapsack,
    "MIP-02": knapsack,
    "MIP-03": facility_location,
    "MIP-06": assignment,
    "MIP-07": bin_packing,
}
