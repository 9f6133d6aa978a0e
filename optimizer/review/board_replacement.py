"""What replaces parts that are gone from a board: the fewest changed positions on the whole board, then cost.

Entry points: `board_replacement`, the answer as data; `board_record_of`, the answer as a board's record.

Positions are what each copy of a channel chooses (photodiode, wiring, reference with its divider, Rf, Cf,
low-pass), each op-amp package, and each shared level. Receivers that nothing is withdrawn from stay as they
are, unless they share a level with one that changes.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from typing import Any

from optimizer.board.keeping import Keeping, Kept, Standing, fewest, keeping
from optimizer.board.problem import Budgets
from optimizer.board.solution import FAILED, SolveOptions
from optimizer.planning.audit import audited
from optimizer.planning.columns import Assembled, Field, assembled
from optimizer.planning.plan import POOLS, UNPROVEN, BoardPlan, Planned, Pool
from optimizer.planning.told import Chosen, UnsoundBoardError, told
from optimizer.record import BoardRecord
from optimizer.record.board import build
from optimizer.record.build import plain
from optimizer.review.board import ReopenedBoard
from optimizer.review.board_changes import BoardChange, changes_of, renamed
from optimizer.review.board_field import Ways, field_of, ways_of, widen, widen_whole
from optimizer.review.board_gone import Gone, Hit, gone_from
from optimizer.review.board_standing import standing_of
from optimizer.review.withdrawal import Wish
from optimizer.search import assemble
from optimizer.search.change import substitutes
from optimizer.search.change.substitutes import Offer
from optimizer.search.result import Candidate

Tell = Callable[[str], None]


@dataclass(frozen=True, slots=True)
class BoardSubstitute:
    """A plan that takes the old one's place: what it changes, and how many positions that are.

    `fewest`: no plan (with other active parts than those before) changes fewer, all receivers kept that
    nothing is withdrawn from; `cheapest`: none that changes as few costs less.
    """

    plan: BoardPlan
    changes: int
    changed: tuple[BoardChange, ...]
    fewest: bool
    cheapest: bool


@dataclass(frozen=True, slots=True)
class ChannelLack:
    """A channel for which nothing is left that meets its request: the nearest miss, if any is eligible."""

    channel: str
    nearest: Candidate | None
    stopped: str = ""


@dataclass(frozen=True, slots=True)
class BoardReplacement:
    """The answer: the `old` plan, what is `gone`, `substitutes` in rank order.

    Without any, `lacks` are the channels that nothing meets; else `beyond` is a plan of few changes with no
    limit on the board, whose totals say which limits are in the way (None: not even that). `everything`:
    all ways to build the channels that may change were looked at.
    """

    opened: ReopenedBoard
    old: Mapping[str, Any]
    gone: Gone
    keep: tuple[str, ...]
    substitutes: tuple[BoardSubstitute, ...]
    lacks: tuple[ChannelLack, ...]
    beyond: BoardSubstitute | None
    pools: tuple[Pool, ...]
    everything: bool
    found: Keeping
    faults: tuple[str, ...]
    seconds: float


def board_replacement(
    opened: ReopenedBoard,
    plan: Mapping[str, Any],
    wish: Wish,
    *,
    show: int,
    tell: Tell = lambda _: None,
) -> BoardReplacement:
    """The `show` boards that change least from `plan` and do without what is gone.

    Raises InputError where the wish cannot be (see `gone_from`).
    """
    began = time.monotonic()
    tell("what is gone")
    gone = gone_from(opened, plan, wish)
    search = _Search(opened, plan, gone, show)
    found = search.run(tell)
    rows = search.told(found)
    lacks = () if rows else tuple(search.lacks())
    beyond = None if rows or lacks else search.beyond
    return BoardReplacement(
        opened=opened,
        old=plan,
        gone=gone,
        keep=wish.keep,
        substitutes=rows,
        lacks=lacks,
        beyond=beyond,
        pools=search.pools(),
        everything=search.everything,
        found=found,
        faults=(*found.faults, *search.faults),
        seconds=time.monotonic() - began,
    )


class _Search:
    """The ways to build each receiver, widened until no board that changes less can be missing."""

    def __init__(self, opened: ReopenedBoard, plan: Mapping[str, Any], gone: Gone, show: int) -> None:
        self.opened, self.plan, self.gone, self.show = opened, plan, gone, show
        self.field: Field = field_of(opened.outline, plan, gone)
        self.ways: list[Ways] = ways_of(self.field, plan, gone)
        self.until = time.monotonic() + opened.outline.solve.time
        self.faults: list[str] = []
        self.made = self._assembled()
        self.found = Keeping(FAILED, (), "none", complete=False, faults=(), seconds=0.0)
        self.beyond: BoardSubstitute | None = None
        self.floor: int | None = None

    def run(self, tell: Tell) -> Keeping:
        """The best boards over the ways that are needed to prove the first the best."""
        self._direct(tell)
        self._look()
        if not self.found.plans and all(way.moves for way in self.ways):
            self.beyond = self._without_limits()
        while self._left() > 0.0 and not self._settled() and self._open():
            for way in self._open():
                widen_whole(way)
            self._look()
        return self.found

    def _direct(self, tell: Tell) -> None:
        """Take in the ways of boards whose receivers change no more than their op-amps and levels make them.

        Limits and stock aside, no other board changes as few positions: exchange one of its receivers for
        the way of fewest changes over the same op-amp and level, and it changes fewer.
        """
        wider = self.ways
        while wider:
            for way in wider:
                tell(way.hit.receiver.channel)
                self._widen(way)
            tell("the whole board")
            self._count()
            wider = self._narrow() if self._left() > 0.0 else []

    def _count(self) -> None:
        """How many positions a board changes at least, limits and stock aside."""
        self.made = self._assembled()
        self.floor = fewest(self.made.board, self._standing(self.made), self._options(1))

    def _look(self) -> None:
        """Look for boards over the ways there are now; what was found before stays where nothing is."""
        made = self._assembled()
        found = keeping(made.board, self._standing(made), self._options(self.show), self.floor)
        if found.plans or not self.found.plans:
            self.found, self.made = found, made

    def _standing(self, made: Assembled) -> Standing:
        return standing_of(self.plan, self.gone, (self.field, made), self.ways)

    def _options(self, plans: int) -> SolveOptions:
        solve = self.opened.outline.solve
        return SolveOptions(max(0.0, self._left()), solve.solver, plans)

    def _widen(self, way: Ways) -> None:
        """One position more, and as many as it takes until there is some way."""
        while way.looked < way.most:
            widen(way)
            if way.moves:
                return

    def _narrow(self) -> list[Ways]:
        """The receivers whose further ways may come to a board that changes fewer positions, or as few."""
        if self._hopeless():
            return []
        wider = [way for way in self.ways if way.looked < way.most]
        if self.floor is None:
            return wider
        return [way for way in wider if self._bound(way, way.looked) <= self.floor]

    def _hopeless(self) -> bool:
        """Whether some receiver has no way at all, however much of it changes."""
        return any(not way.moves and way.looked >= way.most for way in self.ways)

    def _open(self) -> list[Ways]:
        """The receivers of which not all ways were taken in that may matter, limits and stock in mind."""
        wider = [way for way in self.ways if way.whole < way.most]
        plans = self.found.plans
        if not plans:
            return [] if self._hopeless() else wider
        return [way for way in wider if self._bound(way, way.whole) <= plans[0].changes]

    def _settled(self) -> bool:
        """Whether the first board changes as few positions as one that limits and stock do not bind."""
        plans = self.found.plans
        return bool(plans and self.floor is not None and plans[0].changes <= self.floor)

    def _bound(self, way: Ways, looked: int) -> int:
        """How many positions a board changes at least that builds some copy in a way not looked for."""
        others = sum(other.copies * other.least for other in self.ways) - way.least
        return looked + 1 + others + self.gone.packages

    def _left(self) -> float:
        return self.until - time.monotonic()

    def _assembled(self) -> Assembled:
        return assembled(self.field, [way.pool for way in self.ways])

    def told(self, found: Keeping) -> tuple[BoardSubstitute, ...]:
        """The boards found by name, without those that do not stand being looked at anew."""
        rows: list[BoardSubstitute] = []
        for kept in found.plans:
            try:
                one = self._substitute(kept, self.made, len(rows) + 1)
                audited(self.opened.outline, one.plan)
            except UnsoundBoardError as fault:
                self.faults.append(f"a plan did not stand the check: {fault}")
                continue
            rows.append(one)
        return tuple(rows)

    def _substitute(self, kept: Kept, made: Assembled, rank: int) -> BoardSubstitute:
        fewest, cheapest = self._proven(kept) if rank == 1 else (False, False)
        chosen = Chosen(self.field, [way.pool for way in self.ways], made, kept.plan)
        plan = renamed(told(chosen, rank, POOLS if cheapest else UNPROVEN), self.plan, self.gone)
        return BoardSubstitute(
            plan=plan,
            changes=kept.changes,
            changed=changes_of(self.plan, plan),
            fewest=fewest,
            cheapest=cheapest,
        )

    def _proven(self, kept: Kept) -> tuple[bool, bool]:
        """Whether no board changes fewer positions than the first, and whether none as few costs less."""
        complete = all(way.complete for way in self.ways)
        covered = all(way.covered for way in self.ways)
        left = [self._bound(way, way.whole) for way in self.ways if way.whole < way.most]
        bound = min(left, default=math.inf)
        direct = self.floor is not None and kept.changes <= self.floor
        fewest = kept.fewest and covered and (direct or (complete and kept.changes <= bound))
        return fewest, fewest and complete and kept.cheapest and (direct or kept.changes < bound)

    def lacks(self) -> list[ChannelLack]:
        """The channels that nothing meets any more, each once."""
        empty = {way.hit.receiver.channel: way for way in self.ways if not way.moves}
        return [self._lack(channel, way) for channel, way in empty.items()]

    def _lack(self, channel: str, way: Ways) -> ChannelLack:
        assert way.grades is not None
        offer = Offer(way.pool.kind.space, way.grades)
        near = substitutes.nearest(offer, 0)
        rows = assemble.candidates(offer.space, way.hit.catalogs, near.choice)
        if rows:
            return ChannelLack(channel, rows[0])
        return ChannelLack(channel, None, substitutes.stopped(offer, 0))

    def _without_limits(self) -> BoardSubstitute | None:
        """The board that changes least with no limits at all, over the ways looked for so far."""
        free = replace(self.made, board=replace(self.made.board, budgets=Budgets()))
        found = keeping(free.board, self._standing(free), self._options(1), self.floor)
        return self._substitute(found.plans[0], free, 1) if found.plans else None

    @property
    def everything(self) -> bool:
        """Whether all ways were looked at."""
        return all(way.complete and way.whole >= way.most for way in self.ways)

    def pools(self) -> tuple[Pool, ...]:
        """What was looked at for each receiver."""
        return tuple(
            Pool(
                channel=way.hit.receiver.channel,
                combinations=way.pool.kind.space.combinations,
                pairs=len({key[:2] for key in way.moves}),
                kept=len(way.moves),
                complete=way.complete,
                left_out=0 if way.complete else None,
            )
            for way in self.ways
        )


def board_record_of(answer: BoardReplacement) -> BoardRecord:
    """The substitutes as a board's record, the first one chosen.

    Beside the keys of a board's record, each plan holds `changes` and `changed`, and whether these are
    proven the `fewest` and the plan the `cheapest` of as few; `replaces` holds the old plan, what is gone
    (`out` as names to exclude) and what was kept.
    """
    found = answer.found
    planned = Planned(
        status=found.status,
        plans=tuple(one.plan for one in answer.substitutes),
        pools=answer.pools,
        solver=found.solver,
        seconds=answer.seconds,
        only=found.complete,
        faults=answer.faults,
    )
    data = build(answer.opened.outline, planned).data
    plans = [
        row
        | {"changes": one.changes, "fewest": one.fewest, "cheapest": one.cheapest}
        | {"changed": [asdict(change) for change in one.changed]}
        for row, one in zip(data["plans"], answer.substitutes, strict=True)
    ]
    replaces = {
        "plan": answer.old,
        "gone": [asdict(part) for part in answer.gone.parts],
        "out": list(dict.fromkeys((*_out_before(answer), *answer.gone.names))),
        "keep": sorted(answer.keep),
    }
    return BoardRecord({**data, "plans": plain(plans), "replaces": plain(replaces)})


def _out_before(answer: BoardReplacement) -> Sequence[str]:
    """What an earlier replacement took away: that stays away."""
    out: Sequence[str] = answer.opened.record.data.get("replaces", {}).get("out", ())
    return out


def stale_of(gone: Gone) -> list[Hit]:
    """The receivers from which nothing is withdrawn, but which no longer hold as they stand."""
    return [hit for hit in gone.hits if hit.stale]
