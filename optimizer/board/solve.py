"""The board solved: plans met early, a proved bound, the mixed-integer model of what is left, and checks."""

from __future__ import annotations

import math
import time
from functools import partial

from optimizer.board import runs, solvers
from optimizer.board.bound import Terms
from optimizer.board.check import UnsoundPlanError
from optimizer.board.heuristic import Met
from optimizer.board.model import Model, build, forbid, use_references, values_of
from optimizer.board.narrow import Narrowing, Wish
from optimizer.board.pools import Pools
from optimizer.board.problem import Board, checked
from optimizer.board.reading import plan_of, read
from optimizer.board.runs import GAP, Run, Task
from optimizer.board.solution import (
    FAILED,
    INFEASIBLE,
    INTERRUPTED,
    PROVEN,
    TIME_LIMIT,
    Plan,
    Progress,
    Solution,
    SolveOptions,
)
from optimizer.board.tighten import tighten

LEAST = 0.5
"""Seconds that a solver gets at least: the time may have gone into narrowing."""
SHARES = (0.03, 0.005)
"""By what shares of the best cost a plan may be cheaper: asked one after the other where much is open."""
WIDE, MANY = 0.04, 3000
"""A gap (share of the cost) and a number of options from which on the proof may not come in time."""
ROUNDING = 0.005
"""Cents by which a solver's bound may be off: with it the gap of 0.99 still leaves no whole cent open."""

STATUS = {
    runs.STOPPED: TIME_LIMIT,
    runs.INTERRUPTED: INTERRUPTED,
    runs.FAILED: FAILED,
    runs.OPTIMAL: FAILED,
}


def solve(board: Board, options: SolveOptions | None = None) -> Solution:
    """The best plans of `board`, ranked, each with its own active parts; see `Solution` for what is proved.

    Raises BoardError where the board does not hang together. Ctrl-C gives what is known by then.
    """
    return Solving(checked(board), options or SolveOptions()).solution()


class Solving:
    """One solve: what is known so far survives an interrupt, or a solver that dies."""

    def __init__(self, board: Board, options: SolveOptions) -> None:
        self.board, self.options = board, options
        self.began = time.monotonic()
        self.solver = solvers.resolved(options.solver)
        self.narrow = Narrowing(
            board, Wish(options.plans, options.time, options.seed, self._tell, options.enough)
        )
        self.plans: list[Plan] = []
        self.faults: list[str] = []
        self.outcome, self.bound = runs.FAILED, 0.0

    def solution(self) -> Solution:
        """Narrow, solve, check."""
        try:
            if self.options.narrow:
                self.narrow.run()
            if not (self.options.enough and self.narrow.best.plans):
                self._solve()
        except KeyboardInterrupt:
            self.outcome = runs.INTERRUPTED
        if self.outcome not in {runs.OPTIMAL, runs.INFEASIBLE}:
            self._fill_up()
        return self._answer()

    def _answer(self) -> Solution:
        first = self.plans[0] if self.plans else None
        if first is None:
            status = INFEASIBLE if self.outcome == runs.INFEASIBLE else STATUS[self.outcome]
        else:
            status = PROVEN if first.proven else STATUS[self.outcome]
        return Solution(
            status=status,
            plans=tuple(self.plans),
            bound=first.bound if first else self._cents(max(self.bound, self.narrow.bound)),
            solver=self.solver or "none",
            complete=self.outcome == runs.INFEASIBLE,
            faults=tuple(self.faults),
            seconds=time.monotonic() - self.began,
            options=sum(len(channel.options) for channel in self.board.channels),
            considered=self.narrow.pools.size,
            interrupted=self.outcome == runs.INTERRUPTED,
        )

    def _left(self) -> float:
        return self.options.time - (time.monotonic() - self.began)

    def _tell(self, stage: str, cost: float | None, bound: float | None) -> None:
        if self.options.progress is None:
            return
        best = min(self.narrow.best.cost, math.inf if cost is None else cost)
        least = max(self.narrow.bound, self.bound, bound or 0.0)
        self.options.progress(
            Progress(
                stage,
                round(best) if math.isfinite(best) else None,
                self._cents(least) if least > 0 else None,
                time.monotonic() - self.began,
            )
        )

    @staticmethod
    def _cents(bound: float) -> int:
        return max(0, math.ceil(bound - ROUNDING))

    # Plan after plan

    def _solve(self) -> None:
        """The plans wanted, by the solver, over the pools that are left."""
        board = self.narrow.pools.board
        if not all(channel.options for channel in board.channels):
            self.outcome = runs.INFEASIBLE
            return
        if self.solver is None:
            self.faults.append(solvers.absence(self.options.solver))
            return
        self._close_in()
        if self.narrow.best.plans and self._left() <= 0:
            self.outcome = runs.STOPPED
            return
        model = _tight(self.narrow.pools, self.narrow.terms(self.narrow.pools))
        if self.options.plans > 1:
            use_references(model)
        for rank in range(1, self.options.plans + 1):
            met = self._next(model)
            if met is None or self.outcome != runs.OPTIMAL:
                return
            self._add(met, self.bound)
            forbid(model, self._active(met), f"other_{rank}")

    def _close_in(self) -> None:
        """Whether plans are cheaper by some share: told sooner than which is cheapest, of fewer options."""
        best, least = self.narrow.best.cost, self.narrow.bound
        if best == math.inf or (least >= (1 - WIDE) * best and self.narrow.pools.size <= MANY):
            return
        for cost in (math.ceil((1 - share) * best) for share in SHARES):
            if cost > least and (self._left() <= 0 or not self._none_below(cost)):
                return

    def _none_below(self, cost: float) -> bool:
        """Whether it is proved that no plan costs less; a plan that does is kept."""
        pools, terms = self.narrow.within(cost)
        if all(channel.options for channel in pools.board.channels):
            model, seconds = _tight(pools, terms), max(LEAST, self._left())
            told = partial(self._tell, "solver", None)
            run = solvers.run(
                str(self.solver), Task(model.problem, seconds, None, lambda _, bound: told(bound), cost)
            )
            self._note(run, self._checked(model, pools, run), cost)
            if run.outcome == runs.INTERRUPTED:
                raise KeyboardInterrupt
            if run.outcome not in {runs.OPTIMAL, runs.INFEASIBLE} or self.narrow.best.cost < cost:
                return False
        self.bound = max(self.bound, cost - GAP)
        return True

    def _next(self, model: Model) -> Met | None:
        """The next plan, by the solver or, for `auto`, by the other one where that failed."""
        known = self._known()
        if known is not None and known.cost - self.bound <= GAP:
            self.outcome = runs.OPTIMAL
            return known
        for name in self._names():
            self.solver = name
            run = solvers.run(name, self._task(model, known))
            met = self._checked(model, self.narrow.pools, run)
            self.outcome = run.outcome
            if run.outcome != runs.FAILED and not (met is None and run.values):
                break
            self.outcome = runs.FAILED
        self._note(run, met, self.narrow.best.bar)
        return met

    def _names(self) -> list[str]:
        first = str(self.solver)
        others = [name for name in solvers.NAMES if name != first and solvers.available(name)]
        return [first, *others] if self.options.solver == "auto" else [first]

    def _task(self, model: Model, known: Met | None) -> Task:
        start = None
        small = self.narrow.pools.small(known.chosen) if known is not None else None
        if known is not None and small is not None:
            start = values_of(model, small, dict(known.pieces))
        return Task(
            model.problem,
            max(LEAST, self._left()),
            start,
            lambda best, bound: self._tell("solver", best, bound),
        )

    def _note(self, run: Run, met: Met | None, within: float) -> None:
        """Keep a run's plan, and what it proved (with what was proved before) of plans `within` a cost."""
        proved = run.bound if run.bound is not None else 0.0
        if run.outcome == runs.OPTIMAL and met is not None:
            proved = max(proved, met.cost - GAP)
        self.bound = max(self.bound, min(proved, within), self.narrow.bound)
        if met is not None:
            self.narrow.best.offer(self._active(met), met)

    def _checked(self, model: Model, pools: Pools, run: Run) -> Met | None:
        """The plan of a run, read off and priced anew; a fault where it is not sound."""
        if run.fault:
            self.faults.append(run.fault)
        if run.values is None:
            return None
        try:
            return read(model, pools, run.values)
        except UnsoundPlanError as fault:
            self.faults.append(f"a plan of {self.solver} did not stand the check: {fault}")
            return None

    # Plans

    def _active(self, met: Met) -> frozenset[int]:
        return frozenset(part for part, _ in met.pieces if self.board.is_active(part))

    def _known(self) -> Met | None:
        """The cheapest plan met whose active parts no ranked plan has."""
        taken = {frozenset(line.part for line in plan.lines) & self._all_active() for plan in self.plans}
        return min((met for key, met in self.narrow.best.plans.items() if key not in taken), default=None)

    def _all_active(self) -> frozenset[int]:
        return frozenset(part for part in range(len(self.board.parts)) if self.board.is_active(part))

    def _fill_up(self) -> None:
        """The plans met, where the solver did not get so far: sound, but not proved."""
        while len(self.plans) < self.options.plans:
            known = self._known()
            if known is None:
                return
            self._add(known, max(self.bound, self.narrow.bound))

    def _add(self, met: Met, bound: float) -> None:
        self.plans.append(plan_of(self.board, met, self._cents(bound)))


def _tight(pools: Pools, terms: Terms | None) -> Model:
    """The model of some pools, with the rows of their prices."""
    model = build(pools.board)
    if terms is not None:
        tighten(model, terms)
    return model
