"""A plan in the making: how many of each supply it needs, what it costs, and what one more channel adds."""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import dataclass

import numpy as np

from optimizer.board.pools import Chosen
from optimizer.board.problem import Board
from optimizer.board.supplies import (
    PLAIN,
    Floats,
    Ints,
    Weights,
    family_supply,
    packages,
    padded,
    reference_uses,
    tables,
)

IMPOSSIBLE = 1e13
"""Cents for what cannot be bought: any plan that can be built costs less."""

Takes = tuple[tuple[int, int], ...]
"""Supplies with their number."""


@dataclass(frozen=True, slots=True)
class Seen:
    """A board as arrays: what each option takes (by column, channel after channel from `starts`) and draws.

    `copies` names the channel of each copy; `packed` remembers packages by family and amplifiers. The last
    reference is the one of options that share none.
    """

    board: Board
    weights: Weights
    costs: Floats
    starts: Ints
    takes: Ints
    draws: Floats
    shares: Ints
    counters: tuple[Takes, ...]
    reference_takes: Ints
    reference_draws: Floats
    reference_counters: tuple[Takes, ...]
    copies: tuple[int, ...]
    packed: dict[tuple[int, int], dict[int, int]]


def seen(board: Board, weights: Weights = PLAIN) -> Seen:
    """The arrays of `board`, with costs under `weights`."""
    costs = tables(board, weights)
    costs = np.where(np.isfinite(costs), costs, IMPOSSIBLE * np.arange(1, costs.shape[1] + 1))
    nothing, none = len(costs) - 1, len(board.references)
    options = [option for channel in board.channels for option in channel.options]
    rows = [[*o.parts, *[family_supply(board, o.family)] * o.amplifiers] for o in options]
    references = [*(reference_uses(board, r) for r in range(none)), []]
    return Seen(
        board=board,
        weights=weights,
        costs=costs,
        starts=np.cumsum([0, *(len(c.options) for c in board.channels)]),
        takes=padded(rows, nothing),
        draws=weights.current * np.array([o.current for o in options]),
        shares=np.array([none if o.reference is None else o.reference for o in options], dtype=np.int64),
        counters=tuple(tuple(Counter(row).items()) for row in rows),
        reference_takes=padded(([s for s, n in uses for _ in range(n)] for uses in references), nothing),
        reference_draws=weights.current * np.array([*(r.current for r in board.references), 0.0]),
        reference_counters=tuple(map(tuple, references)),
        copies=tuple(i for i, channel in enumerate(board.channels) for _ in range(channel.count)),
        packed={},
    )


class State:
    """How many of each supply a partial plan needs, how often each reference is used, and the cost."""

    def __init__(self, seen: Seen) -> None:
        self.seen = seen
        self.rows = np.arange(len(seen.costs))
        self.number = np.zeros(len(seen.costs), dtype=np.int64)
        self.users = np.zeros(len(seen.reference_draws), dtype=np.int64)
        self.cost = 0.0

    def put(self, option: int) -> None:
        """Build one more channel as `option`."""
        reference = int(self.seen.shares[option])
        self._take(self.seen.counters[option], 1)
        if not self.users[reference]:
            self._take(self.seen.reference_counters[reference], 1)
            self.cost += float(self.seen.reference_draws[reference])
        self.users[reference] += 1
        self.cost += float(self.seen.draws[option])

    def drop(self, option: int) -> None:
        """Build one less."""
        reference = int(self.seen.shares[option])
        self._take(self.seen.counters[option], -1)
        self.users[reference] -= 1
        if not self.users[reference]:
            self._take(self.seen.reference_counters[reference], -1)
            self.cost -= float(self.seen.reference_draws[reference])
        self.cost -= float(self.seen.draws[option])

    def _take(self, taken: Takes, sign: int) -> None:
        costs, number = self.seen.costs, self.number
        for supply, count in taken:
            before = number[supply]
            after = before + sign * count
            self.cost += float(costs[supply, after] - costs[supply, before])
            number[supply] = after

    def prices(self) -> Floats:
        """What one more of each supply costs."""
        costs = self.seen.costs
        return np.asarray(costs[self.rows, self.number + 1] - costs[self.rows, self.number])

    def offers(self, channel: int, each: Floats) -> Floats:
        """What each option of a channel adds at the prices `each` (a supply taken twice at the first)."""
        a, b = self.seen.starts[channel], self.seen.starts[channel + 1]
        shared = each[self.seen.reference_takes].sum(axis=0) + self.seen.reference_draws
        shared[self.users > 0] = 0.0
        added = each[self.seen.takes[:, a:b]].sum(axis=0) + shared[self.seen.shares[a:b]]
        return np.asarray(added + self.seen.draws[a:b])

    def bought(self) -> dict[int, int]:
        """The parts on a board with their number, families in their cheapest packages."""
        board, parts = self.seen.board, len(self.seen.board.parts)
        found: dict[int, int] = {}
        for supply in np.flatnonzero(self.number).tolist():
            if supply < parts:
                found[supply] = int(self.number[supply])
            elif supply < parts + len(board.families):
                found |= self._packed(supply - parts, int(self.number[supply]))
        return found

    def _packed(self, family: int, amplifiers: int) -> dict[int, int]:
        """The cheapest packages, worked out once for each number of amplifiers."""
        known = self.seen.packed
        if (family, amplifiers) not in known:
            board, weights = self.seen.board, self.seen.weights
            known[family, amplifiers] = packages(board, family, amplifiers, weights)
        return known[family, amplifiers]

    def use(self, bought: dict[int, int], options: list[int]) -> dict[str, float]:
        """How much of each budget but cost the plan uses."""
        parts, board = self.seen.board.parts, self.seen.board
        flat = [option for channel in board.channels for option in channel.options]
        drawn = sum(board.references[r].current for r in np.flatnonzero(self.users[:-1]).tolist())
        packs = {part: n for part, n in bought.items() if parts[part].amplifiers}
        return {
            "current": math.fsum(parts[p].current * n for p, n in packs.items())
            + drawn
            + sum(flat[option].current for option in options),
            "area": math.fsum((parts[p].area or 0.0) * n for p, n in bought.items()),
            "line_items": len(bought),
            "opamp_parts": len(packs),
        }


def placed(seen: Seen, chosen: Chosen) -> State:
    """The state of a whole plan."""
    state = State(seen)
    for channel, options in enumerate(chosen):
        for j in options:
            state.put(int(seen.starts[channel]) + j)
    return state
