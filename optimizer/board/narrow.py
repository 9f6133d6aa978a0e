"""A board made small before the solver sees it: good plans, a proved bound, and only the options that matter.

First plans give a cost that no better plan may pass; the bound at its best prices tells which options such
a plan may use; a sweep over partial plans tells it more closely. What is left holds every plan that is at
most as dear as the dearest of the plans wanted. Each step only removes, so it may be skipped or cut short.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace

from optimizer.board.bound import Bound, Pace, Terms, ask, carried, climb, layout, useful
from optimizer.board.breed import Breeding, bred
from optimizer.board.heuristic import Best, Effort, look
from optimizer.board.pools import Pools, pools_of
from optimizer.board.problem import Board
from optimizer.board.supplies import PLAIN, Weights
from optimizer.board.sweep import sweep

SLACK = 0.01
"""Cents by which a bound may be off by rounding."""
CLIMBS = (Pace(600, 12, 0.6), Pace(1500, 20, 0.8), Pace(4000, 40, 0.7), Pace(6000, 60, 0.7))
"""How the bound is raised, round after round: ever more patiently, on ever fewer options."""
SMALL = 30
"""Options so few that the solver needs no more help."""
STEPS, LOOKS = 75, 3
"""Steps of one search for plans for each channel, and how many begin anew at most."""
FRONT = 12
"""Channels, copies counted, up to which partial plans are swept: the front grows with each."""
LOOK, CLIMB = 0.25, 0.4
"""The shares of the time after which the search for plans, and the bound, are cut short."""

Tell = Callable[[str, float, float], None]


@dataclass(frozen=True, slots=True)
class Wish:
    """What is wanted: how many plans, the seconds there are, the seed, whom to tell (stage, cost, bound), and

    whether any plan is enough.
    """

    plans: int
    seconds: float
    seed: int
    tell: Tell
    enough: bool = False


class Narrowing:
    """The work in order. `pools` only shrinks and `bound` only rises, so that it may end at any time.

    `best` holds plans of the original board. Every plan of it that costs at most `best.bar` is in `pools`.
    """

    def __init__(self, board: Board, wish: Wish) -> None:
        self.wish, self.began = wish, time.monotonic()
        self.pools = pools_of(board)
        self.copies = sum(channel.count for channel in board.channels)
        self.best = Best(wish.plans)
        self.bound = 0.0
        self.priced: Terms | None = None

    def terms(self, pools: Pools) -> Terms | None:
        """The best prices found, for what is left of the pools; None before the first bound."""
        if self.priced is None:
            return None
        seen = layout(pools.board, self.priced.weights)
        return replace(self.priced, seen=seen, prices=carried(seen, self.priced.seen, self.priced.prices))

    def within(self, cost: float) -> tuple[Pools, Terms | None]:
        """What is left of the pools for plans of at most `cost` (perhaps nothing), and its prices."""
        terms = self.terms(self.pools)
        if terms is None:
            return self.pools, None
        answer = ask(terms.seen, terms.prices)
        known = Bound(answer.bound, terms.prices, answer)
        pools = self.pools.keeping(useful(terms.seen, known, cost + SLACK))
        if not all(channel.options for channel in pools.board.channels):
            return pools, None
        seen = layout(pools.board, terms.weights)
        found = climb(seen, cost + 2 * SLACK, CLIMBS[1])
        pools = pools.keeping(useful(seen, found, cost + SLACK))
        after = layout(pools.board, terms.weights)
        return pools, Terms(after, carried(after, seen, found.prices), terms.weights)

    def _past(self, share: float) -> bool:
        return time.monotonic() - self.began > share * self.wish.seconds

    def _tell(self, stage: str) -> None:
        self.wish.tell(stage, self.best.cost, self.bound)

    def run(self) -> None:
        """Look for plans, then bound and cut, round after round."""
        if not self.pools.board.channels or not all(c.options for c in self.pools.board.channels):
            return
        weights = self._look()
        if not math.isfinite(self._target()) or (self.wish.enough and self.best.plans):
            return
        if self.copies > FRONT:
            self._breed(weights)
        self._cut(weights)

    def _breed(self, weights: Weights) -> None:
        """Better plans of boards that are too large to sweep, with the prices of a first bound as a guide."""
        board = self.pools.board
        until = self.began + LOOK * self.wish.seconds
        first = climb(layout(board, weights), self._target(), replace(CLIMBS[0], until=until))
        self.bound = max(self.bound, min(first.value, self._target()))
        self._tell("bound")
        with self._kept() as found:
            guide = first.answer.option_costs
            bred(board, found, Breeding(until, self.wish.seed, guide, self._heard))

    @contextmanager
    def _kept(self) -> Iterator[Best]:
        """Room for plans of the pools as they are; kept as plans of the original, whatever happens."""
        found = Best(self.wish.plans)
        try:
            yield found
        finally:
            for active, met in found.plans.items():
                self.best.offer(active, replace(met, chosen=self.pools.whole(met.chosen)))

    def _heard(self, cost: int) -> None:
        self.wish.tell("plans", cost, self.bound)

    def _look(self) -> Weights:
        """First plans, looked for a few times; returns the prices of budgets under which they were found."""
        steps, weights = STEPS * max(4, self.copies), PLAIN
        with self._kept() as found:
            for k in range(LOOKS):
                left = LOOK * self.wish.seconds / 2 - (time.monotonic() - self.began)
                if k and (left <= 0 or (self.wish.enough and found.plans)):
                    break
                effort = Effort(steps, max(left, 0.05), 1000 * self.wish.seed + k)
                weights = look(self.pools.board, found, effort, self._heard)
        return weights

    def _target(self) -> float:
        limit = self.pools.board.budgets.cost
        return min(self.best.bar, math.inf if limit is None else limit) + SLACK

    def _cut(self, weights: Weights) -> None:
        """Bound and cut until little is left, nothing more goes, or the time for it is over."""
        for pace in CLIMBS:
            self._climb(pace, weights)
            if self.pools.size <= SMALL or self._past(CLIMB):
                return
            if self.copies <= FRONT and self.pools.size and self._sweep():
                return

    def _climb(self, pace: Pace, weights: Weights) -> None:
        """Raise the bound and keep the options that can be part of a plan within the target."""
        seen = layout(self.pools.board, weights)
        pace = replace(pace, until=self.began + CLIMB * self.wish.seconds)
        found = climb(seen, self._target() + SLACK, pace)
        self.bound = max(self.bound, min(found.value, self._target()))
        self.pools = self.pools.keeping(useful(seen, found, self._target()))
        self.priced = Terms(seen, found.prices, weights)
        self._tell("bound")

    def _sweep(self) -> bool:
        """Sweep the partial plans; True where it came to its end."""
        terms = self.terms(self.pools)
        assert terms is not None  # a bound comes first
        swept = sweep(self.pools.board, terms, self._target())
        self.pools = self.pools.keeping(swept.options)
        self._tell("sweep")
        return swept.complete
