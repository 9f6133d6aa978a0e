"""Plans from pools: solved, improved over all passives with their active parts kept, and solved again."""

from __future__ import annotations

import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from optimizer.board.heuristic import Best, Effort, look
from optimizer.board.solution import Progress, Solution, SolveOptions
from optimizer.board.solve import solve
from optimizer.planning.columns import Field, Key, Pool, assembled
from optimizer.planning.gather import Gathering
from optimizer.planning.polish import polished
from optimizer.planning.told import Chosen
from optimizer.planning.trim import trimmed

MORE = 250
"""Candidates with the passives of one plan's active parts, of each kind, that an improvement may add."""
TURNS = 3
"""How often the pools are solved at most."""
SOLVE, IMPROVE = 0.6, 0.1
"""The shares of the time left that a solve, and an improvement of one plan, may take."""
PREPARE, STEPS = 0.2, 50
"""The share of the time for a search for good plans before the first solve, and its steps a channel."""
LEAST = 0.5


@dataclass(frozen=True, slots=True)
class Solved:
    """The plans, the cheapest first, and what the last solve said.

    `lossless`: it saw everything that matters of the pools.
    """

    chosen: tuple[Chosen, ...]
    solution: Solution
    lossless: bool


class Solving:
    """Works on the pools of `gathered` until `until` (monotonic seconds)."""

    def __init__(self, gathered: Gathering, until: float) -> None:
        self.gathered, self.until = gathered, until
        self.field: Field = gathered.field
        self.options = gathered.field.outline.solve
        self.best: list[Chosen] = []
        self.last: list[Chosen] = []
        self.solution: Solution | None = None
        self.lossless = False

    def solved(self) -> Solved:
        """Solve, improve the passives of the first plan, and solve again while that finds anything.

        Ctrl-C gives the plans known by then, or those that are met at once.
        """
        try:
            self._prepare()
            self._turns()
            self.best = _cheapest([self._polished(one) for one in self._kept()], self.options.plans)
            self.last = self.best
        except KeyboardInterrupt:
            if self.solution is None or not self.best:
                self._solve_all(LEAST)
            assert self.solution is not None
            self.solution = replace(self.solution, interrupted=True)
        assert self.solution is not None
        return Solved(tuple(self._kept()), self.solution, self.lossless)

    def _turns(self) -> None:
        for turn in range(1, TURNS + 1):
            self._solve_all(self._left() * (SOLVE if turn < TURNS else 1.0))
            assert self.solution is not None
            better = self._improved(self.last[0]) if self.last and turn < TURNS else None
            if better is None or self.solution.interrupted:
                return
            self.best = _cheapest([*self.best, better], self.options.plans)

    def _solve_all(self, seconds: float) -> None:
        """Solve over all pools; what is cheaper than before joins the best plans."""
        cut = trimmed(self.field, self.gathered.pools)
        self.lossless = cut.lossless
        self.solution, found = self._solve(cut.pools, self.options.plans, seconds)
        self.last = found
        self.best = _cheapest([*found, *self.best], self.options.plans)
        if self.best:
            self.gathered.cost = min(self.gathered.cost, self.best[0].plan.totals.cost)

    def _kept(self) -> list[Chosen]:
        """The best plans; what an earlier solve proved of one, it proved over smaller pools."""
        last = {id(one) for one in self.last}
        return [one if id(one) in last else unproven(one, self.gathered.floor) for one in self.best]

    def _left(self) -> float:
        return self.until - time.monotonic()

    def _solve(self, pools: Sequence[Pool], plans: int, seconds: float) -> tuple[Solution, list[Chosen]]:
        made = assembled(self.field, pools)
        options = SolveOptions(
            time=max(LEAST, seconds), solver=self.options.solver, plans=plans, progress=self._tell
        )
        solution = solve(made.board, options)
        return solution, [Chosen(self.field, pools, made, plan) for plan in solution.plans]

    def _tell(self, progress: Progress) -> None:
        inf = float("inf")
        cost = inf if progress.cost is None else float(progress.cost)
        self.gathered.tell(progress.stage, min(cost, self.gathered.cost), self.gathered.floor)

    def _prepare(self) -> None:
        """More passives for the active parts of good plans, so that the first solve need not be the last."""
        made = assembled(self.field, self.gathered.pools)
        known = Best(self.options.plans)
        look(made.board, known, Effort(STEPS * self.field.copies, PREPARE * max(LEAST, self._left())))
        for met in known.plans.values():
            if self._left() > LEAST:
                used = [{keys[j] for j in js} for keys, js in zip(made.keys, met.chosen, strict=True)]
                self._enriched(self.gathered.pools, used)

    def _improved(self, chosen: Chosen) -> Chosen | None:
        """The plan with other passives and the same active parts, where that is cheaper."""
        if self._left() < LEAST or not self._enriched(chosen.pools, _used(chosen)):
            return None
        pools = trimmed(self.field, list(self._same_active(chosen))).pools
        _, again = self._solve(pools, 1, IMPROVE * self._left())
        if again and again[0].plan.totals.cost < chosen.plan.totals.cost:
            return again[0]
        return None

    def _polished(self, chosen: Chosen) -> Chosen:
        """The plan with more margin at no more cost."""
        better = polished(chosen, list(self._same_active(chosen)))
        cheaper = better.plan.totals.cost < chosen.plan.totals.cost
        return unproven(better, self.gathered.floor) if cheaper else better

    def _enriched(self, pools: Sequence[Pool], used: Sequence[set[Key]]) -> int:
        """Take more candidates with the active parts of `used`, by kind, into the pools; how many are new."""
        added = 0
        for i, keys in enumerate(used):
            rows = np.array([pools[i].held[key][1][:2] for key in sorted(keys)], dtype=np.int64)
            pairs = np.unique(rows, axis=0)
            added += self.gathered.passives(i, (pairs[:, 0], pairs[:, 1]), MORE)
        return added

    def _same_active(self, chosen: Chosen) -> Iterator[Pool]:
        """The pools cut to the active parts of a plan."""
        for pool, keys in zip(self.gathered.pools, _used(chosen), strict=True):
            active = {key[:2] for key in keys}
            yield Pool(pool.kind, pool.group, {k: v for k, v in pool.held.items() if k[:2] in active})


def _used(chosen: Chosen) -> list[set[Key]]:
    """By kind, the options that a plan takes."""
    return [
        {keys[j] for j in options} for keys, options in zip(chosen.made.keys, chosen.plan.chosen, strict=True)
    ]


def active_of(chosen: Chosen) -> frozenset[int]:
    """The photodiodes and op-amps of a plan, by place on the shelf."""
    made = chosen.made
    return frozenset(made.parts[line.part] for line in chosen.plan.lines if made.board.is_active(line.part))


def _cheapest(plans: Sequence[Chosen], most: int) -> list[Chosen]:
    """The cheapest plan of each set of active parts, the cheapest first; of equal ones the earlier."""
    best: dict[frozenset[int], Chosen] = {}
    for one in sorted(plans, key=lambda chosen: chosen.plan.totals.cost):
        best.setdefault(active_of(one), one)
    return list(best.values())[:most]


def unproven(chosen: Chosen, floor: float) -> Chosen:
    """The plan with no more than `floor` said of its bound."""
    least = min(chosen.plan.totals.cost, int(floor))
    return replace(chosen, plan=replace(chosen.plan, bound=least, proven=False))
