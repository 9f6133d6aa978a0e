"""Why no plan meets the board: the smallest set of budgets and channels in conflict, and what would help.

The smallest conflict is found by implicit hitting sets (Chandrasekaran, Karp, Moreno-Centeno, Vempala,
Algorithms for implicit hitting set problems, SODA 2011): what is proposed is the smallest set that meets all
known corrections; where a plan exists for it, the plan is stretched to as many demands as possible, and the
rest is one more correction.
"""

from __future__ import annotations

import time
from dataclasses import dataclass, replace
from typing import Any

from optimizer.board import runs, solvers
from optimizer.board.check import UnsoundPlanError, examined
from optimizer.board.covers import smallest_hitting
from optimizer.board.model import build
from optimizer.board.pools import pools_of
from optimizer.board.problem import Board, checked
from optimizer.board.reading import read
from optimizer.board.runs import Task
from optimizer.board.solution import INFEASIBLE, PROVEN, SolveOptions
from optimizer.board.solve import solve

Demand = tuple[str, int]
"""A budget by name with 0, or 'channel' with its place."""

LEAST = 0.5


@dataclass(frozen=True, slots=True)
class Conflict:
    """Budgets and channels that cannot be met together; `smallest`: proved that no fewer are in conflict."""

    budgets: tuple[str, ...]
    channels: tuple[int, ...]
    smallest: bool


@dataclass(frozen=True, slots=True)
class Relaxation:
    """The least use of one budget with which all others can be kept; None where there is none.

    `proven`: it is the least; else it is one that will do (or nothing was found in time).
    """

    budget: str
    limit: float
    least: float | None
    proven: bool


def conflict(board: Board, options: SolveOptions | None = None) -> Conflict | None:
    """The smallest conflict in a board; None where a plan meets it all, or that could not be told in time."""
    return _Conflicts(checked(board), options or SolveOptions()).smallest()


class _Conflicts:
    """The demands of one board, and whether some of them can be met together."""

    def __init__(self, board: Board, options: SolveOptions) -> None:
        self.board, self.options = board, options
        self.until = time.monotonic() + options.time
        self.demands: tuple[Demand, ...] = (
            *((name, 0) for name in board.budgets.stated()),
            *(("channel", i) for i in range(len(board.channels))),
        )
        self.solver = solvers.resolved(options.solver)

    def smallest(self) -> Conflict | None:
        """Propose, test, correct, until the proposal is in conflict."""
        whole = self._met(frozenset(self.demands))
        if whole is not False or self.solver is None:
            return None
        corrections: list[frozenset[Demand]] = []
        while time.monotonic() < self.until:
            weights = dict.fromkeys(self.demands, 1.0)
            proposed = smallest_hitting(corrections, weights, self.solver, self._left())
            met = None if proposed is None else self._met(proposed)
            if proposed is None or met is None:
                break
            if not met:
                return self._conflict(proposed, True)
            corrections.append(frozenset(self.demands) - self._stretched(proposed))
        return self._conflict(frozenset(self.demands), False)

    def _left(self) -> float:
        return max(LEAST, self.until - time.monotonic())

    def _conflict(self, demands: frozenset[Demand], smallest: bool) -> Conflict:
        budgets = tuple(name for name, _ in self.demands if (name, 0) in demands and name != "channel")
        channels = tuple(i for name, i in self.demands if name == "channel" and (name, i) in demands)
        return Conflict(budgets, channels, smallest)

    def _stretched(self, demands: frozenset[Demand]) -> frozenset[Demand]:
        """As many more demands as can be met together, one after the other."""
        for demand in self.demands:
            if demand not in demands and self._met(demands | {demand}):
                demands |= {demand}
        return demands

    def _met(self, demands: frozenset[Demand]) -> bool | None:
        """Whether a plan meets the demands; None where that could not be told in time."""
        budgets = {name for name, _ in demands if name != "channel"}
        channels = tuple(c for i, c in enumerate(self.board.channels) if ("channel", i) in demands)
        if not channels:
            return True
        dropped: dict[str, Any] = {name: None for name in self.board.budgets.stated() if name not in budgets}
        part = replace(self.board, channels=channels, budgets=replace(self.board.budgets, **dropped))
        seconds = self._left()
        options = replace(self.options, time=seconds, plans=1, progress=None, enough=True)
        found = solve(part, options)
        if found.plans:
            return True
        return False if found.status == INFEASIBLE else None


def relaxations(board: Board, options: SolveOptions | None = None) -> tuple[Relaxation, ...]:
    """For each stated budget the least use that admits a plan with all the others kept."""
    checked(board)
    options = options or SolveOptions()
    stated = board.budgets.stated()
    until = time.monotonic() + options.time
    found = []
    for left, (name, limit) in zip(range(len(stated), 0, -1), stated.items(), strict=True):
        seconds = max(LEAST, (until - time.monotonic()) / left)
        least, proven = _least(board, name, replace(options, time=seconds, plans=1, progress=None))
        found.append(Relaxation(name, limit, least, proven))
    return tuple(found)


def _least(board: Board, budget: str, options: SolveOptions) -> tuple[float | None, bool]:
    """The least use of a budget, and whether that is proved."""
    free = replace(board, budgets=replace(board.budgets, **{budget: None}))
    if budget == "cost":
        found = solve(free, options)
        best = found.best
        return (best.totals.cost if best else None), found.status in {PROVEN, INFEASIBLE}
    return _least_by_solver(free, budget, options)


def _least_by_solver(board: Board, budget: str, options: SolveOptions) -> tuple[float | None, bool]:
    solver = solvers.resolved(options.solver)
    pools = pools_of(board)
    if solver is None or not all(channel.options for channel in board.channels):
        return None, solver is not None
    model = build(pools.board, budget)
    run = solvers.run(solver, Task(model.problem, options.time))
    if run.values is None:
        return None, run.outcome == runs.INFEASIBLE
    try:
        met = read(model, pools, run.values)
    except UnsoundPlanError:
        return None, False
    used = getattr(examined(board, met.chosen, dict(met.pieces)), budget)
    return used, run.outcome == runs.OPTIMAL
