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
from optimizer.planning.kinds import Kind, asked_of, kinds_of
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
    "channels run from different supplies: op-amps on one supply are planned apart from those on another, "
    "so a part number that both could share may be missed"
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
        self.sound = 0
        self.interrupted = False
        self.alone: Alone | None = None

    def planned(self) -> Planned:
        shelf = Shelf()
        kinds = kinds_of(self.outline, shelf)
        if shelf.problems:
            raise InputError(shelf.problems)
        field = Field(self.outline, kinds, shelf, amplifiers_of(kinds, shelf, _limited(self.outline)))
        interrupted = False
        try:
            self._tell("each channel alone", math.inf, 0.0)
            alone = [cheapest_alone(kind) for kind in kinds]
            lost = [kind for kind, found in zip(kinds, alone, strict=True) if not found.cost.size]
            if lost:
                return self._hopeless(field, lost)
            gathered = self._gathering(field, alone)
            interrupted = not _finished(gathered.run)
            solved = Solving(gathered, self.until if not interrupted else time.monotonic()).solved()
        except KeyboardInterrupt:
            return self._ended(plan.INTERRUPTED)
        plans = tuple(self._told(gathered, solved))
        self.interrupted = interrupted or solved.solution.interrupted
        return self._answer(gathered, solved, plans) if plans else self._refused(gathered, solved)

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
        for chosen in solved.chosen:
            rank = 1 + self.sound
            try:
                one = told(chosen, rank, _scope(gathered, solved, chosen))
                audited(self.outline, one)
            except UnsoundBoardError as fault:
                self.faults.append(f"a plan did not stand the check: {fault}")
                continue
            if one.cost != chosen.plan.totals.cost:
                one = replace(one, proven=plan.UNPROVEN, bound=min(one.cost, int(gathered.floor)))
            self.sound += 1
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
            floor=min(math.ceil(gathered.floor), plans[0].cost),
            only=solved.solution.complete and len(plans) < self.outline.solve.plans,
            faults=(*solved.solution.faults, *self.faults),
            alone=self.alone,
        )

    def _refused(self, gathered: Gathering, solved: Solved) -> Planned:
        """No plan: what is in conflict, over the pools, and whether that is proven over everything."""
        solution = solved.solution
        made = assembled(gathered.field, gathered.pools)
        seconds = max(EXPLAIN, self.until - time.monotonic())
        limit = made.board.budgets.cost
        over = limit is not None and gathered.floor > limit
        proven = over or (solution.status == INFEASIBLE and gathered.complete)
        status = plan.INFEASIBLE if proven else plan.NOTHING
        if self.interrupted:
            return replace(self._ended(plan.INTERRUPTED), faults=solution.faults)
        self._tell("why there is no plan", math.inf, gathered.floor)
        return replace(
            self._ended(status),
            pools=tuple(_pools(gathered)),
            solver=solution.solver,
            rounds=gathered.rounds,
            floor=math.ceil(gathered.floor),
            faults=(*solution.faults, *self.faults),
            refusal=refusal(gathered.field, made, seconds, told=gathered.complete or not proven),
            alone=self.alone,
        )

    def _hopeless(self, field: Field, lost: Sequence[Kind]) -> Planned:
        self._tell("why nothing meets a channel", math.inf, 0.0)
        reasons = [one for kind in lost for one in hopeless(kind)]
        order = [channel.name for channel in field.outline.channels]
        reasons.sort(key=lambda one: order.index(one.channel))
        return replace(self._ended(plan.INFEASIBLE), refusal=Refusal(hopeless=tuple(reasons)))

    def _ended(self, status: str) -> Planned:
        """An answer without plans."""
        supplies = {(c.study.request.supply.high, c.study.request.supply.low) for c in self.outline.channels}
        notes = (SEVERAL_RAILS,) if len(supplies) > 1 else ()
        return Planned(status, (), (), "none", time.monotonic() - self.began, notes=notes)


def _finished(work: Callable[[], None]) -> bool:
    """Do `work`; False where the user stopped it."""
    try:
        work()
    except KeyboardInterrupt:
        return False
    return True


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
    for kind, pool, left in zip(gathered.field.kinds, gathered.pools, gathered.open, strict=True):
        pairs = int(gathered.first_pairs[gathered.field.kinds.index(kind)])
        for channel in kind.channels:
            yield Pool(
                channel=channel.name,
                combinations=kind.space.combinations,
                pairs=pairs,
                kept=len(pool.held),
                complete=left == 0,
                left_out=left,
            )
