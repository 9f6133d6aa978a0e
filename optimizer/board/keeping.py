"""The board that changes least from one that is built already: fewest changed positions, then least cost.

A position is what a copy of a channel chooses (photodiode, Rf, ...), a package, or a shared level. Of
packages as many change as leave or come, whichever are more: one that gives way to another is one
change. A level that gives way to another is one change too, however many channels use it.
"""

from __future__ import annotations

import time
from collections import Counter, defaultdict
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from optimizer.board import runs, solvers
from optimizer.board.check import UnsoundPlanError
from optimizer.board.model import Model, build, forbid, use_references
from optimizer.board.pools import Chosen, Pools
from optimizer.board.problem import Board, Budgets, checked
from optimizer.board.reading import plan_of, read
from optimizer.board.runs import Task
from optimizer.board.solution import INFEASIBLE, INTERRUPTED, PROVEN, TIME_LIMIT, Plan, SolveOptions

LEAST = 0.5
"""Seconds that a solver gets at least."""
STATUS = {
    runs.OPTIMAL: PROVEN,
    runs.INFEASIBLE: INFEASIBLE,
    runs.STOPPED: TIME_LIMIT,
    runs.INTERRUPTED: INTERRUPTED,
}


@dataclass(frozen=True, slots=True)
class Standing:
    """A board that is built, in terms of a `Board` to choose from.

    `packages`: how many of each op-amp part; `lost`: how many more of parts that are not listed.
    `moves`: by channel and option, how many positions of one copy change, apart from the level of a copy
    that uses a shared level before and after. `homes`: by channel the old level of its copies (None: none).
    `kin`: by old level, the references that are that level as it stands. `swaps`: how many packages may
    change at most (None: any number).
    """

    packages: Mapping[int, int]
    lost: int
    moves: tuple[tuple[int, ...], ...]
    homes: tuple[int | None, ...]
    kin: tuple[frozenset[int], ...]
    swaps: int | None = None


@dataclass(frozen=True, slots=True)
class Kept:
    """A plan, and how many positions it changes.

    `fewest`: no plan (with other active parts than those before) changes fewer; `cheapest`: none that
    changes as few costs less, which is what the plan's bound says.
    """

    plan: Plan
    changes: int
    fewest: bool
    cheapest: bool


@dataclass(frozen=True, slots=True)
class Keeping:
    """What came of it: plans in rank order; `status` is that of the first, `complete`: there are no more."""

    status: str
    plans: tuple[Kept, ...]
    solver: str
    complete: bool
    faults: tuple[str, ...]
    seconds: float


def keeping(board: Board, standing: Standing, options: SolveOptions, least: int | None = None) -> Keeping:
    """The `options.plans` boards that change least from `standing`, each with active parts of its own.

    `least` is a number of positions that every board changes, where one is known: if some board changes
    no more, it is looked for first.
    """
    return _Search(checked(board), standing, options, least).run()


def fewest(board: Board, standing: Standing, options: SolveOptions) -> int | None:
    """How many positions every board changes at least, budgets and all stock but of op-amps aside.

    None where that is not proven.
    """
    parts = tuple(
        replace(part, stock=part.stock if part.amplifiers else None, breaks=((1.0, 0.0),))
        for part in board.parts
    )
    free = replace(board, parts=parts, budgets=Budgets(), line_item=0, placement=0)
    return _Search(checked(free), standing, options, None).fewest()


def changed(board: Board, standing: Standing, chosen: Chosen, pieces: Mapping[int, int]) -> int:
    """How many positions a plan changes, counted without the model."""
    copies = sum(moves[j] for moves, taken in zip(standing.moves, chosen, strict=True) for j in taken)
    return copies + _swapped(board, standing, pieces) + _levels_changed(board, standing, chosen)


def _swapped(board: Board, standing: Standing, pieces: Mapping[int, int]) -> int:
    before = Counter(standing.packages)
    after = Counter({part: n for part, n in pieces.items() if board.parts[part].amplifiers})
    return max(standing.lost + (before - after).total(), (after - before).total())


def _levels_changed(board: Board, standing: Standing, chosen: Chosen) -> int:
    """Levels that go, come or give way, and copies that leave theirs: the least over who follows whom."""
    users: Counter[tuple[int | None, int]] = Counter()
    for channel, home, taken in zip(board.channels, standing.homes, chosen, strict=True):
        for j in taken:
            reference = channel.options[j].reference
            if reference is not None:
                users[home, reference] += 1
    references = sorted({reference for _, reference in users})
    return _matched(standing, users, 0, references)


def _matched(
    standing: Standing, users: Mapping[tuple[int | None, int], int], level: int, free: list[int]
) -> int:
    """The fewest changes for the old levels from `level` on, each followed by one of `free` or by none."""
    if level == len(standing.kin):
        return len(free)
    moved = sum(n for (home, _), n in users.items() if home == level)
    best = 1 + moved + _matched(standing, users, level + 1, free)
    for reference in free:
        rest = [other for other in free if other != reference]
        own = 0 if reference in standing.kin[level] else 1
        left = moved - users.get((level, reference), 0)
        best = min(best, own + left + _matched(standing, users, level + 1, rest))
    return best


class _Search:
    """One search: plan after plan, first the fewest changes, then the least cost with as few."""

    def __init__(self, board: Board, standing: Standing, options: SolveOptions, least: int | None) -> None:
        self.board, self.standing, self.options, self.least = board, standing, options, least
        self.began = time.monotonic()
        self.solver = solvers.resolved(options.solver)
        places = tuple((i,) for i in range(len(board.channels)))
        everything = tuple(tuple(range(len(channel.options))) for channel in board.channels)
        self.pools = Pools(board, board, places, everything)
        self.faults: list[str] = []
        self.outcome = runs.FAILED

    def run(self) -> Keeping:
        plans: list[Kept] = []
        if not all(channel.options for channel in self.board.channels):
            self.outcome = runs.INFEASIBLE
        elif self.solver is None:
            self.faults.append(solvers.absence(self.options.solver))
        else:
            while len(plans) < self.options.plans and (found := self._next(plans)) is not None:
                plans.append(found)
        first = plans[0] if plans else None
        status = STATUS.get(self.outcome, "failed")
        if first is not None:
            status = PROVEN if first.fewest and first.cheapest else TIME_LIMIT
        return Keeping(
            status=status,
            plans=tuple(plans),
            solver=self.solver or "none",
            complete=self.outcome == runs.INFEASIBLE,
            faults=tuple(self.faults),
            seconds=time.monotonic() - self.began,
        )

    def fewest(self) -> int | None:
        """How many positions the first plan changes, if that is proven the fewest."""
        if self.solver is None or not all(channel.options for channel in self.board.channels):
            return None
        model, changes = self._model()
        model.problem.setObjective(changes)
        found = self._plan(model, fewest=True)
        return found.changes if found is not None and found.fewest else None

    def _model(self) -> tuple[Model, Any]:
        """The model, and how many positions change in it."""
        model = build(self.board)
        use_references(model)
        return model, _count(model, self.standing)

    def _within(self, least: int) -> Kept | None:
        """The cheapest plan that changes no more than `least` positions, which every plan changes."""
        model, changes = self._model()
        model.problem.addConstraint(changes <= least, "no_more_changes")
        model.problem.setObjective(model.use["cost"])
        return self._plan(model, fewest=False)

    def _next(self, before: list[Kept]) -> Kept | None:
        """The plan that changes least of those with other active parts than the plans `before`."""
        if not before and self.least is not None:
            found = self._within(self.least)
            if found is not None:
                return found
        model, changes = self._model()
        for rank, plan in enumerate(before):
            forbid(
                model,
                {line.part for line in plan.plan.lines if self.board.is_active(line.part)},
                f"other_{rank}",
            )
        model.problem.setObjective(changes)
        least = self._plan(model, fewest=True)
        if least is None or not least.fewest:
            return least
        model.problem.addConstraint(changes <= least.changes, "no_more_changes")
        model.problem.setObjective(model.use["cost"])
        return self._plan(model, fewest=False) or least

    def _plan(self, model: Model, *, fewest: bool) -> Kept | None:
        """One run for the objective set: the plan read off, priced and counted anew."""
        left = max(LEAST, self.options.time - (time.monotonic() - self.began))
        run = solvers.run(str(self.solver), Task(model.problem, left))
        self.outcome = run.outcome
        if run.fault:
            self.faults.append(run.fault)
        if run.values is None:
            return None
        try:
            met = read(model, self.pools, run.values)
        except UnsoundPlanError as fault:
            self.faults.append(f"a plan of {self.solver} did not stand the check: {fault}")
            return None
        done = run.outcome == runs.OPTIMAL
        cheapest = done and not fewest
        return Kept(
            plan=plan_of(self.board, met, met.cost if cheapest else 0),
            changes=changed(self.board, self.standing, met.chosen, dict(met.pieces)),
            fewest=done if fewest else True,
            cheapest=cheapest,
        )


def _count(model: Model, standing: Standing) -> Any:
    """How many positions change, as an expression of the model; the rows that it needs are added."""
    copies = [standing.moves[i][j] * x for (i, j), x in model.x.items() if standing.moves[i][j]]
    return _sum(copies) + _packages(model, standing) + _levels(model, standing)


def _packages(model: Model, standing: Standing) -> Any:
    """The packages that change: those that leave or those that come, whichever are more."""
    problem = model.problem
    swapped = problem.add_variable("swapped", 0, standing.swaps, "Integer")
    gone, come = [], []
    for part in {p for p in model.number if model.board.parts[p].amplifiers} | set(standing.packages):
        before, now = standing.packages.get(part, 0), model.number.get(part, 0)
        leaves, comes = (problem.add_variable(f"{word}_{part}", 0) for word in ("leaves", "comes"))
        problem.addConstraint(leaves - comes + now == before, f"swap_{part}")
        gone.append(leaves)
        come.append(comes)
    problem.addConstraint(swapped >= _sum(gone) + standing.lost, "swapped_gone")
    problem.addConstraint(swapped >= _sum(come), "swapped_come")
    return swapped


def _levels(model: Model, standing: Standing) -> Any:
    """Levels that go, come or give way to another, and copies that leave theirs for another."""
    problem, references = model.problem, sorted(model.v)
    follows = {
        (level, r): problem.add_variable(f"follows_{level}_{r}", 0, 1, "Binary")
        for level in range(len(standing.kin))
        for r in references
    }
    counted: list[Any] = []
    for level, kin in enumerate(standing.kin):
        mine = {r: follows[level, r] for r in references}
        problem.addConstraint(_sum(mine.values()) <= 1, f"follower_{level}")
        counted.append(1 - _sum(mine[r] for r in kin if r in mine))
    for r in references:
        taken = _sum(follows[level, r] for level in range(len(standing.kin)))
        problem.addConstraint(taken <= model.v[r], f"followed_{r}")
        counted.append(model.v[r] - taken)
    return _sum(counted) + _sum(_leavers(model, standing, follows))


def _leavers(model: Model, standing: Standing, follows: Mapping[tuple[int, int], Any]) -> list[Any]:
    """How many copies use a level that does not follow theirs, by channel and reference."""
    found = []
    for i, (channel, home) in enumerate(zip(model.board.channels, standing.homes, strict=True)):
        if home is None:
            continue
        users: dict[int, list[Any]] = defaultdict(list)
        for j, option in enumerate(channel.options):
            if option.reference is not None:
                users[option.reference].append(model.x[i, j])
        for r, taken in users.items():
            left = model.problem.add_variable(f"leave_{i}_{r}", 0)
            model.problem.addConstraint(
                left >= _sum(taken) - channel.count * follows[home, r], f"leaving_{i}_{r}"
            )
            found.append(left)
    return found


def _sum(terms: Any) -> Any:
    from pulp import lpSum

    return lpSum(list(terms))
