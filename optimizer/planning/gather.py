"""Pools out of the search: candidates priced in until none is left that a better plan could use.

Round after round the best plan of the pools is sought, the bound over them is raised, and its prices are
carried over everything that the requests admit (see `tariff`). At these prices each request is searched
for its cheapest candidate, which bounds every plan from below, and for the candidates that a better plan
may use: they join the pools, and what none of them uses is out of reach for good. This is column
generation (Gilmore and Gomory, Operations Research 9 (1961)) with the exact search as its pricing problem.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from optimizer.board.bound import Pace, climb, layout
from optimizer.board.heuristic import Best, Effort, look
from optimizer.board.prices import CENTS
from optimizer.board.supplies import PLAIN, Weights
from optimizer.planning.columns import Assembled, Field, Pool, assembled, without_limits
from optimizer.planning.fit import packaged, usable
from optimizer.planning.kinds import NONE, affordable
from optimizer.planning.reach import Reach, everything, left_by
from optimizer.planning.tariff import Known, Tariff, Universe, priced
from optimizer.search import feed
from optimizer.search.boxes import Boxes
from optimizer.search.collect import collect
from optimizer.search.crew import Found
from optimizer.search.hunt import Rules
from optimizer.search.query import Query, ask_pairs
from optimizer.search.space import Choice

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Tell = Callable[[str, float, float], None]

FIRST, SIDE = 20, 4
"""Pairs of each kind that begin its pool, and those for each other view of what is scarce."""
EACH, MOST = 80, 320
"""Candidates of each kind that a round may add, at first and at last."""
CLOSE = 1000
"""Settings of each kind so few that they all may join at once."""
ROUNDS, IDLE = 12, 2
"""Rounds at most, and those without gain after which no more are made."""
STEPS, LOOK = 30, 0.25
"""Steps of the search for a plan for each channel, and its share of the time, in one round."""
CLIMB = Pace(800, 20, 0.75)
CLIMBING = 0.25
GAINED = 1e-4
"""The relative gain of a round that counts."""
SLACK, ROUNDING = 0.02, 1e-8
"""Cents, and a share of a figure, by which sums may be off."""


class Gathering:
    """One board's pools, and what is proved of all that is not in them.

    `cost` is that of the cheapest plan met, `floor` one that no plan at all passes below; `open` counts, by
    kind, the settings within reach of a better plan that are in no pool, at most.
    """

    def __init__(self, of: Field, asked: Sequence[Query], until: float, tell: Tell) -> None:
        self.field, self.asked, self.until, self.tell = of, tuple(asked), until, tell
        pairs = zip(of.kinds, of.amplifiers.group, strict=True)
        self.pools = [Pool(kind, group) for kind, group in pairs]
        self.reach: list[Reach] = []
        self.prices: list[Query] = []
        self.least: list[float] = []
        self.open: list[int | None] = [None] * len(of.kinds)
        self.first_pairs = [0] * len(of.kinds)
        self.weights = PLAIN
        self.cost, self.floor = math.inf, 0.0
        self.rounds = 0

    @property
    def complete(self) -> bool:
        """Whether the pools hold every candidate that a plan better than the best met could use."""
        return all(left == 0 for left in self.open)

    def _closable(self) -> bool:
        """Whether so little is open that all of it may join the pools."""
        return all(left is not None and left <= CLOSE for left in self.open)

    def run(self) -> None:
        """Gather until nothing changes, or the time is over."""
        each, idle = EACH, 0
        for _ in range(ROUNDS):
            if self.rounds and time.monotonic() > self.until:
                return
            cost, floor = self.cost, self.floor
            added = self._round(each)
            gained = self.cost < cost or self.floor > floor + GAINED * abs(floor)
            idle = 0 if gained else idle + 1
            if self.complete:
                return
            if self._closable():
                each = CLOSE
            elif idle >= IDLE:
                return
            else:
                each = each if gained and added else min(MOST, 2 * each)

    def begin(self, alone: Sequence[Found]) -> None:
        """Begin with the best receivers by themselves, and those at the least prices that parts can have."""
        for i, found in enumerate(alone):
            self._take(i, found.choice, found.vector[:, 0])
        for i, kind in enumerate(self.field.kinds):
            group, rows = self.field.amplifiers.group[i], self.field.amplifiers.rows[i]
            able = affordable(self.asked[i], np.flatnonzero(group != NONE), kind.space.limits.get("cost"))
            pairs = np.zeros_like(able)
            for row in rows:  # one package stands for all of its group
                pairs[row] = able[group == group[row]].any(axis=0)
            self.reach.append(everything(self.field, i, pairs))
            self.first_pairs[i] = int(self.reach[i].pairs.sum())
        self._seen(PLAIN, FIRST)

    def _seen(self, weights: Weights, show: int) -> None:
        """Take in the best of each kind at the least prices that parts can have under `weights`."""
        first = Universe(self.field, self.reach, weights).first()
        for i in range(len(self.pools)):
            self._hunted(i, self._priced(i, first), show)

    def _widen(self) -> None:
        """Where nothing in the pools keeps the limits: look for what is scarce, and for op-amps to share."""
        for weights in self._views():
            if time.monotonic() < self.until:
                self._seen(weights, SIDE)
        if self.field.outline.rules.opamp_parts or self.field.outline.limits.line_items:
            self._spread()

    def _views(self) -> list[Weights]:
        """Cost with a price on each limit in turn."""
        limits = self.field.outline.limits
        scale = CENTS * self.field.outline.quantity * max(limits.cost or 0.0, 10.0)
        stated = {"current": limits.supply_current, "area": limits.area}
        prices = [(name, scale / limit) for name, limit in stated.items() if limit]
        return [Weights(**{name: times * price}) for times in (10.0, 1.0) for name, price in prices]

    def _spread(self) -> None:
        """The best of each kind with every op-amp: where part numbers are few, channels must share them."""
        first = Universe(self.field, self.reach).first()
        asked = [self._priced(i, first) for i in range(len(self.pools))]
        pairs = [self._pairs(i, one) for i, one in enumerate(asked)]
        for group in range(len(self.field.amplifiers.names)):
            for i, one in enumerate(asked):
                mine = self.field.amplifiers.group[i][pairs[i].opamp] == group
                if mine.any() and time.monotonic() < self.until:
                    found = ask_pairs(one, pairs[i].take(mine), Rules("cost", SIDE, 0.0))
                    self._take(i, found.choice, found.vector[:, 0])

    def _priced(self, i: int, tariff: Tariff) -> Query:
        return priced(self.asked[i], self.field, i, tariff)

    def _pairs(self, i: int, asked: Query) -> feed.Pairs:
        """The pairs of a kind that are within reach, the cheapest first."""
        _, diodes = asked.eligible
        pairs = feed.pairs_of(asked.index, self.field.amplifiers.rows[i], diodes, by="cost")
        return pairs.take(self.reach[i].pairs[pairs.opamp, pairs.diode])

    def _hunted(self, i: int, asked: Query, show: int) -> float:
        """Take the best of `show` pairs into the pool; returns what the very cheapest costs."""
        found = ask_pairs(asked, self._pairs(i, asked), Rules("cost", show, 0.0))
        self._take(i, found.choice, found.vector[:, 0])
        return float(found.cost[0]) if found.cost.size else math.inf

    def _take(self, i: int, choice: Choice, margin: Floats) -> int:
        """Into the pool with those that the board may use; returns how many were not there."""
        choice = packaged(self.field, i, choice)
        fit = usable(self.field, i, choice)
        return self.pools[i].add(choice.take(fit), margin[fit])

    def _round(self, each: int) -> int:
        """One round; returns how many candidates it added."""
        made = assembled(self.field, self.pools)
        if not all(channel.options for channel in made.board.channels):
            return 0
        self._look(made)
        if math.isinf(self.cost) and not self.rounds:
            self._widen()
            made = assembled(self.field, self.pools)
            self._look(made)
        tariff = self._tariff(made)
        asked = [self._priced(i, tariff) for i in range(len(self.pools))]
        least = [self._hunted(i, query, 1) for i, query in enumerate(asked)]
        counts = [kind.count for kind in self.field.kinds]
        floor = sum(n * cost for n, cost in zip(counts, least, strict=True)) * (1.0 - ROUNDING) + tariff.lost
        self.floor = max(self.floor, min(floor, self.cost))
        self.rounds += 1
        self.prices, self.least = asked, [cost + self.cost - floor + SLACK for cost in least]
        self.tell("candidates", self.cost, self.floor)
        return sum(self._collected(i, query, each) for i, query in enumerate(asked))

    def _look(self, made: Assembled) -> None:
        """A good plan of the pools; where there are limits, the prices on them under which it was found."""
        best = Best(1)
        effort = Effort(STEPS * self.field.copies, self._share(LOOK), 1 + self.rounds)
        self.weights = look(made.board, best, effort)
        self.cost = min(self.cost, best.cost)
        self.tell("first plans", self.cost, self.floor)

    def _share(self, share: float) -> float:
        return max(0.3, share * (self.until - time.monotonic()))

    def _tariff(self, made: Assembled) -> Tariff:
        """The prices of the best bound over the pools, and over all else."""
        seen = layout(made.board, self.weights)
        until = time.monotonic() + self._share(CLIMBING)
        pace = Pace(CLIMB.steps, CLIMB.patience, CLIMB.smaller, until)
        target = self.cost if math.isfinite(self.cost) else 2.0 * self._guess(made)
        found = climb(seen, target + SLACK, pace)
        return Universe(self.field, self.reach, self.weights).tariff(Known(made, seen, found.prices))

    def _guess(self, made: Assembled) -> float:
        best = Best(1)
        look(without_limits(made).board, best, Effort(STEPS * self.field.copies, self._share(LOOK)))
        return best.cost if math.isfinite(best.cost) else 1e6

    def _collected(self, i: int, asked: Query, each: int) -> int:
        """The candidates of a kind that a better plan may use; what none of them uses is out of reach."""
        pairs = self._pairs(i, asked)
        found = collect(asked, (pairs.opamp, pairs.diode), self.least[i], each)
        if math.isfinite(self.cost):
            self.reach[i] = self.reach[i] & left_by(self.field, i, asked, found)
        self.open[i] = held_in(found.open)
        return self._take(i, found.choice, found.margin)

    def passives(self, i: int, pairs: tuple[Ints, Ints], most: int) -> int:
        """More candidates with the active parts of `pairs`, the cheapest at the last prices; how many."""
        if not self.prices:
            return 0
        group, rows = self.field.amplifiers.group[i], self.field.amplifiers.rows[i]
        standing = rows[np.argmax(group[pairs[0]][:, None] == group[rows], axis=1)]
        found = collect(self.prices[i], (standing, pairs[1]), math.inf, most)
        return self._take(i, found.choice, found.margin)


def held_in(boxes: Boxes) -> int:
    """How many settings lie in `boxes`."""
    widths = boxes.rows[:, 3::2] - boxes.rows[:, 2::2]
    return int(np.prod(widths.astype(object), axis=1).sum()) if len(boxes) else 0
