"""Good plans fast: channels are taken out and put back where they then cost least, over and over.

Ruin and recreate (Schrimpf, Schneider, Stamm-Wilbrandt, Dueck, Journal of Computational Physics 159
(2000)), accepted as in annealing. What a step costs is exact: the tables of `supplies` hold breaks,
packages and line items, and a reference is paid for by the first channel that uses it.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from optimizer.board.pools import Chosen
from optimizer.board.problem import Board
from optimizer.board.state import IMPOSSIBLE, Seen, State, seen
from optimizer.board.supplies import PLAIN, Floats, Weights

WARM, COLD = 0.03, 4e-4
"""The share of a channel's cost by which a step may worsen a plan, at first and at last."""
MOODS = (0.0, 0.1, 0.3, 0.8)
"""By how much at most a supply looks cheaper in a step than it is: so channels try others together."""
CLOSING, SWAPPING, OPENING = 0.25, 0.2, 0.25
"""How often a step does without a supply, gives another to all that may take it, or both at once."""
SHUNNED, COURTED = 1e3, 0.1
TRUST = (0.0, 0.3, 0.6, 0.9)
"""How much the guide counts in a step, against what an option adds."""
ROUNDS = 14
"""How often the prices of budgets are set anew."""
TOLERANCE = 1e-9


@dataclass(frozen=True, slots=True)
class Effort:
    """How long to look: steps and seconds at most, the seed of every random draw, and, as a guide, what each

    option costs at the prices of a bound, where shared parts are paid for by all that may share them.
    """

    steps: int
    seconds: float
    seed: int = 1
    guide: Floats | None = None


@dataclass(frozen=True, slots=True, order=True)
class Met:
    """A plan that keeps the budgets: its cost [cents a build], the choice, and pieces a board by part."""

    cost: int
    chosen: Chosen
    pieces: tuple[tuple[int, int], ...]


@dataclass(slots=True)
class Best:
    """The cheapest plans met that keep the budgets, one for each set of active parts, `keep` of them."""

    keep: int
    plans: dict[frozenset[int], Met] = field(default_factory=dict)

    @property
    def bar(self) -> float:
        """What a plan must cost at most to be worth a look."""
        return max(met.cost for met in self.plans.values()) if len(self.plans) >= self.keep else math.inf

    @property
    def cost(self) -> float:
        """The least cost [cents], infinite without a plan."""
        return min((met.cost for met in self.plans.values()), default=math.inf)

    def offer(self, active: frozenset[int], met: Met) -> bool:
        """Keep a plan if it is among the best; tell whether it is the cheapest so far."""
        first = met.cost < self.cost
        if active not in self.plans or met < self.plans[active]:
            self.plans[active] = met
        while len(self.plans) > self.keep:
            del self.plans[max(self.plans, key=lambda key: (self.plans[key], sorted(key)))]
        return first


def look(board: Board, best: Best, effort: Effort, told: Callable[[int], None] | None = None) -> Weights:
    """Fill `best` with plans of `board`; returns the prices of budgets under which they were found."""
    limits = {name: limit for name, limit in board.budgets.stated().items() if name != "cost"}
    until = time.monotonic() + effort.seconds
    if not limits:
        _Search(seen(board), best, effort, told).run(until)
        return PLAIN
    weights, kept = PLAIN, PLAIN
    for round_ in range(ROUNDS):
        if time.monotonic() > until:
            break
        share = replace(effort, steps=max(1, effort.steps // ROUNDS), seed=effort.seed + round_)
        search = _Search(seen(board, weights), best, share, told)
        before = best.cost
        over = search.run(until)
        kept = weights if best.cost < before else kept
        weights = _priced(weights, over, limits, search)
    return kept


def _priced(weights: Weights, over: dict[str, float], limits: dict[str, float], search: _Search) -> Weights:
    """Dearer prices for budgets that the last plan broke, lower ones for those that it kept."""
    changes = {}
    for name, limit in limits.items():
        now = getattr(weights, name)
        first = 0.1 * min(search.lowest, IMPOSSIBLE / 10) / max(limit, 1e-12)
        changes[name] = max(2.0 * now, first) if over[name] > limit * (1 + TOLERANCE) else 0.6 * now
    return replace(weights, **changes)


class _Search:
    """One annealed ruin and recreate under fixed weights."""

    def __init__(self, seen: Seen, best: Best, effort: Effort, told: Callable[[int], None] | None) -> None:
        self.seen, self.best, self.effort, self.told = seen, best, effort, told
        self.random = np.random.default_rng(effort.seed)
        self.limits = seen.board.budgets.stated()
        self.plain = seen.weights == PLAIN
        self.may_take = [set(self._all_takes(i)) for i in range(len(seen.board.channels))]
        self.able = np.array(sorted(set().union(*self.may_take)))
        self.lowest = math.inf
        self.over: dict[str, float] = {}

    def run(self, until: float) -> dict[str, float]:
        """Search; returns the use of budgets of the cheapest plan under the weights."""
        state, options = State(self.seen), [-1] * len(self.seen.copies)
        calm = np.ones(len(self.seen.costs))
        self._recreate(state, options, self.random.permutation(len(options)).tolist(), calm)
        self._meet(state, options)
        for step in range(self.effort.steps):
            if time.monotonic() > until:
                break
            self._step(state, options, step / self.effort.steps)
        return self.over

    def _step(self, state: State, options: list[int], age: float) -> None:
        before, cost = list(options), state.cost
        out, mood = self._ruined(state, options)
        for k in out:
            state.drop(options[k])
        self._recreate(state, options, out, mood)
        warmth = WARM * (COLD / WARM) ** age * cost / len(options)
        allowed = warmth * -math.log(1.0 - float(self.random.random()))
        if state.cost < self.lowest or state.cost < self.best.bar:
            self._meet(state, options)
        if state.cost > cost + allowed:
            self._back(state, options, before)

    def _back(self, state: State, options: list[int], before: list[int]) -> None:
        changed = [k for k, option in enumerate(before) if option != options[k]]
        for k in changed:
            state.drop(options[k])
        for k in changed:
            state.put(before[k])
            options[k] = before[k]

    def _ruined(self, state: State, options: list[int]) -> tuple[list[int], Floats]:
        """The copies to take out, and by how much each supply looks cheaper or dearer while they go back."""
        mood = np.asarray(1.0 - self.random.choice(MOODS) * self.random.random(len(self.seen.costs)))
        move, out = self.random.random(), set()
        if move < CLOSING + SWAPPING:
            used = np.flatnonzero(state.number[:-1])
            supply = int(used[int(self.random.integers(used.size))])
            out |= {k for k, option in enumerate(options) if self._takes(option, supply)}
            mood[supply] = SHUNNED
        if CLOSING <= move < CLOSING + SWAPPING + OPENING:
            supply = int(self.able[int(self.random.integers(self.able.size))])
            able = [k for k, channel in enumerate(self.seen.copies) if supply in self.may_take[channel]]
            out |= set(self._some(able, len(able)))
            mood[supply] = COURTED
        return self._some(sorted(out), len(out)) if out else self._some(range(len(options)), 5), mood

    def _some(self, copies: Sequence[int], most: int) -> list[int]:
        """All of a few copies, or some at random, in random order."""
        size = len(copies)
        if most < size or self.random.random() < 0.5:
            size = 1 + int(self.random.integers(min(most, size)))
        return [copies[int(k)] for k in self.random.permutation(len(copies))[:size]]

    def _takes(self, option: int, supply: int) -> bool:
        reference = self.seen.reference_counters[int(self.seen.shares[option])]
        return any(s == supply for s, _ in self.seen.counters[option]) or any(
            s == supply for s, _ in reference
        )

    def _all_takes(self, channel: int) -> Iterator[int]:
        for option in range(int(self.seen.starts[channel]), int(self.seen.starts[channel + 1])):
            yield from (supply for supply, _ in self.seen.counters[option])

    def _recreate(self, state: State, options: list[int], out: list[int], mood: Floats) -> None:
        trust = 0.0 if self.effort.guide is None else float(self.random.choice(TRUST))
        for k in out:
            channel = self.seen.copies[k]
            offers = state.offers(channel, state.prices() * mood)
            if self.effort.guide is not None and trust:
                a, b = self.seen.starts[channel], self.seen.starts[channel + 1]
                offers = (1.0 - trust) * offers + trust * self.effort.guide[a:b]
            options[k] = int(self.seen.starts[channel]) + int(offers.argmin())
            state.put(options[k])

    def _meet(self, state: State, options: list[int]) -> None:
        """Note a plan that is cheaper than what is known, if it can be bought and keeps the budgets."""
        if state.cost >= IMPOSSIBLE / 2:
            self.lowest = min(self.lowest, state.cost)
            self.over = self.over or dict.fromkeys(self.limits, math.inf)
            return
        bought = state.bought()
        use = {} if self.plain and self.limits.keys() <= {"cost"} else state.use(bought, options)
        if state.cost < self.lowest:
            self.lowest, self.over = state.cost, use
        cost = self._plain_cost(state, use)
        kept = all(use[name] <= limit * (1 + TOLERANCE) for name, limit in self.limits.items() if name in use)
        if kept and cost <= self.limits.get("cost", math.inf) and cost < self.best.bar:
            active = frozenset(part for part in bought if self.seen.board.is_active(part))
            met = Met(cost, self._chosen(options), tuple(sorted(bought.items())))
            if self.best.offer(active, met) and self.told is not None:
                self.told(cost)

    def _plain_cost(self, state: State, use: dict[str, float]) -> int:
        """The cents of a plan: its weighted cost without the prices of budgets."""
        weights = self.seen.weights
        priced = sum(float(getattr(weights, name)) * value for name, value in use.items())
        return round((state.cost - priced) / weights.cost)

    def _chosen(self, options: list[int]) -> Chosen:
        found: list[list[int]] = [[] for _ in self.seen.board.channels]
        for channel, option in zip(self.seen.copies, options, strict=True):
            found[channel].append(option - int(self.seen.starts[channel]))
        return tuple(tuple(sorted(taken)) for taken in found)
