"""The whole of `luxsift board` after reading: pools, plans, checks; or why there is no plan."""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

from optimizer.board.solution import INFEASIBLE, PROVEN
from optimizer.errors import InputError
from optimizer.planning import plan
from optimizer.planning.amplifiers import amplifiers_of
from optimizer.planning.audit import audited
from optimizer.planning.columns import Field, assembled
from optimizer.planning.gather import Gathering
from optimizer.planning.kinds import Kind, asked_of, kinds_of, names_of
from optimizer.planning.lone import cheapest_alone, hopeless, together
from optimizer.planning.outline import Outline
from optimizer.planning.plan import Alone, BoardPlan, Planned, Pool, Refusal, Stage
from optimizer.planning.refused import refusal
from optimizer.planning.shelf import Shelf
from optimizer.planning.solving import Solved, Solving
from optimizer.planning.told import Chosen, UnsoundBoardError, told
from optimizer.search.crew import Found

Report = Callable[[Stage], None]

GATHER = 0.4
"""The share of the time in which candidates are gathered at most."""
EXPLAIN = 5.0
"""Seconds that the explanation of a refusal gets at least."""
SEVERAL_RAILS = (
    "channels run from different supplies, and op-amps on one are planned apart from those on another: what "
    "they save by sharing a part number is counted, but not sought, so nothing is proven"
)
UNKNOWN = (
    "the limits cannot be checked for {}: no receiver was found of whose parts all is known that they need"
)
STATUS = {PROVEN: plan.OPTIMAL, INFEASIBLE: plan.INFEASIBLE}


def plan_board(outline: Outline, progress: Report | None = None) -> Planned:
    """The ranked plans of `outline`, each graded by the physics anew and priced anew from the catalogs.

    `progress` is told the stages. Ctrl-C gives what is known by then. Raises InputError where catalogs of
    two channels disagree on a part.
    """
    return _Planning(outline, progress).planned()


class _Planning:
    """One board from its outline to its plans."""

    def __init__(self, outline: Outline, progress: Report | None) -> None:
        self.outline, self.progress = outline, progress
        self.began = time.monotonic()
        self.until = self.began + outline.solve.time
        self.faults: list[str] = []
        self.interrupted = False
        self.alone: Alone | None = None
        self.apart = False

    def planned(self) -> Planned:
        shelf = Shelf()
        kinds = kinds_of(self.outline, shelf)
        if shelf.problems:
            raise InputError(shelf.problems)
        field = Field(self.outline, kinds, shelf, amplifiers_of(kinds, shelf, _limited(self.outline)))
        self.apart = _apart(field)
        interrupted = False
        try:
            self._tell("each channel alone", math.inf, 0.0)
            alone = [cheapest_alone(kind) for kind in kinds]
            lost = [kind for kind, found in zip(kinds, alone, strict=True) if not found.cost.size]
            if lost:
                return self._hopeless(field, lost)
            gathered = self._gathering(field, alone)
            if not all(pool.held for pool in gathered.pools):
                return self._unknown(gathered)
            interrupted = not _finished(gathered.run)
            solved = Solving(gathered, self.until if not interrupted else time.monotonic()).solved()
        except KeyboardInterrupt:
            return self._ended(plan.INTERRUPTED)
        plans = _distinct(self._told(gathered, solved))
        self.interrupted = interrupted or solved.solution.interrupted
        if plans:
            return self._answer(gathered, solved, plans)
        try:
            return self._refused(gathered, solved)
        except KeyboardInterrupt:
            return self._ended(plan.INTERRUPTED)

    def _tell(self, doing: str, cost: float, floor: float) -> None:
        if self.progress is not None:
            seconds = time.monotonic() - self.began
            known = int(cost) if math.isfinite(cost) else None
            self.progress(Stage(doing, known, math.ceil(floor) if floor > 0 else None, seconds))

    def _gathering(self, field: Field, alone: Sequence[Found]) -> Gathering:
        """The pools at their beginning. Every kind has a space that is not empty: something meets it."""
        asked = [asked_of(kind) for kind in field.kinds]
        until = self.began + GATHER * self.outline.solve.time
        gathered = Gathering(field, [one for one in asked if one is not None], until, self._tell)
        gathered.begin(alone)
        self.alone = together(field, alone)
        return gathered

    def _told(self, gathered: Gathering, solved: Solved) -> Iterator[BoardPlan]:
        """The plans by name, without those that do not stand being looked at anew."""
        for rank, chosen in enumerate(solved.chosen, 1):
            try:
                one = told(chosen, rank, plan.UNPROVEN if self.apart else _scope(gathered, solved, chosen))
                audited(self.outline, one)
            except UnsoundBoardError as fault:
                self.faults.append(f"a plan did not stand the check: {fault}")
                continue
            if self.apart or one.cost != chosen.plan.totals.cost:
                least = 0 if self.apart else min(one.cost, int(gathered.floor))
                one = replace(one, proven=plan.UNPROVEN, bound=least)
            yield one

    def _answer(self, gathered: Gathering, solved: Solved, plans: tuple[BoardPlan, ...]) -> Planned:
        status = STATUS.get(solved.solution.status, plan.WITHIN)
        if self.interrupted:
            status = plan.INTERRUPTED
        if status == plan.OPTIMAL and plans[0].proven == plan.UNPROVEN:
            status = plan.WITHIN
        return replace(
            self._ended(status),
            plans=plans,
            pools=tuple(_pools(gathered)),
            solver=solved.solution.solver,
            rounds=gathered.rounds,
            floor=None if self.apart else min(math.ceil(gathered.floor), plans[0].cost),
            only=not self.apart and solved.solution.complete and len(plans) < self.outline.solve.plans,
            faults=_each_once(*solved.solution.faults, *self.faults),
            alone=self.alone,
        )

    def _refused(self, gathered: Gathering, solved: Solved) -> Planned:
        """No plan: what is in conflict, over the pools, and whether that is proven over everything."""
        solution = solved.solution
        made = assembled(gathered.field, gathered.pools)
        seconds = max(EXPLAIN, self.until - time.monotonic())
        limit = made.board.budgets.cost
        over = limit is not None and gathered.floor > limit
        proven = not self.apart and (over or (solution.status == INFEASIBLE and gathered.complete))
        sure = not self.apart and (gathered.complete or not proven)
        status = plan.INFEASIBLE if proven else plan.NOTHING
        if self.interrupted:
            return replace(self._ended(plan.INTERRUPTED), faults=solution.faults)
        self._tell("why there is no plan", math.inf, gathered.floor)
        return replace(
            self._ended(status),
            pools=tuple(_pools(gathered)),
            solver=solution.solver,
            rounds=gathered.rounds,
            floor=None if self.apart else math.ceil(gathered.floor),
            faults=_each_once(*solution.faults, *self.faults),
            refusal=refusal(gathered.field, made, seconds, told=sure),
            alone=self.alone,
        )

    def _unknown(self, gathered: Gathering) -> Planned:
        """No plan: of no receiver of some channel all is known that the limits need."""
        empty = [i for i, pool in enumerate(gathered.pools) if not pool.held]
        proven = any(not gathered.reach[i].pairs.any() for i in empty)
        names = tuple(names_of([gathered.field.kinds[i] for i in empty]))
        ended = self._ended(plan.INFEASIBLE if proven else plan.NOTHING)
        return replace(
            ended,
            pools=tuple(_pools(gathered)),
            notes=(*ended.notes, UNKNOWN.format(", ".join(names))),
            refusal=Refusal(limits=_limited(self.outline), channels=names),
        )

    def _hopeless(self, field: Field, lost: Sequence[Kind]) -> Planned:
        self._tell("why nothing meets a channel", math.inf, 0.0)
        reasons = [one for kind in lost for one in hopeless(kind)]
        order = [channel.name for channel in field.outline.channels]
        reasons.sort(key=lambda one: order.index(one.channel))
        return replace(self._ended(plan.INFEASIBLE), refusal=Refusal(hopeless=tuple(reasons)))

    def _ended(self, status: str) -> Planned:
        """An answer without plans."""
        notes = (SEVERAL_RAILS,) if self.apart else ()
        return Planned(status, (), (), "none", time.monotonic() - self.began, notes=notes)


def _finished(work: Callable[[], None]) -> bool:
    """Do `work`; False where the user stopped it."""
    try:
        work()
    except KeyboardInterrupt:
        return False
    return True


def _distinct(plans: Iterator[BoardPlan]) -> tuple[BoardPlan, ...]:
    """The cheapest plan of each set of active parts by name, whatever supplies they are on; ranked."""
    best: dict[frozenset[tuple[str, str, str]], BoardPlan] = {}
    for one in sorted(plans, key=lambda each: each.cost):
        active = [line for line in one.bill if line.role in ("photodiode", "opamp")]
        best.setdefault(frozenset((line.role, line.maker, line.part) for line in active), one)
    return tuple(replace(one, rank=rank) for rank, one in enumerate(best.values(), 1))


def _apart(field: Field) -> bool:
    """Whether some op-amp may serve on several supplies, and so is planned as several parts."""
    keys = [field.shelf.parts[part].key[:3] for packages in field.amplifiers.packages for part in packages]
    return len(set(keys)) < len(keys)


def _each_once(*words: str) -> tuple[str, ...]:
    return tuple(dict.fromkeys(words))


def _limited(outline: Outline) -> tuple[str, ...]:
    """The limits for which something must be known of every part."""
    stated = {"supply_current": outline.limits.supply_current, "area": outline.limits.area}
    return tuple(name for name, limit in stated.items() if limit is not None)


def _scope(gathered: Gathering, solved: Solved, chosen: Chosen) -> str:
    """Over what a plan is proven to be the cheapest."""
    if not chosen.plan.proven:
        return plan.UNPROVEN
    everything = (gathered.complete and solved.lossless) or gathered.floor > chosen.plan.totals.cost - 1
    return plan.CATALOGS if everything and chosen is solved.chosen[0] else plan.POOLS


def _pools(gathered: Gathering) -> Iterator[Pool]:
    """What was looked at, by channel."""
    columns = (gathered.pools, gathered.open, gathered.first_pairs)
    for pool, left, pairs in zip(*columns, strict=True):
        for channel in pool.kind.channels:
            yield Pool(
                channel=channel.name,
                combinations=pool.kind.space.combinations,
                pairs=pairs,
                kept=len(pool.held),
                complete=left == 0,
                left_out=left,
            )
