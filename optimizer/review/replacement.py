"""What replaces a part that is gone: the best substitutes by how much of the board changes.

Entry points: `replacement`, the answer as data; `record_of`, the answer as a record that every command
on records reads again.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator, Mapping
from dataclasses import asdict, dataclass, replace
from typing import Any

import numpy as np

from optimizer import margins
from optimizer import record as records
from optimizer.record import Record
from optimizer.record.build import plain
from optimizer.request.types import Request
from optimizer.review.reopen import Reopened
from optimizer.review.withdrawal import Wish, Withdrawal, withdrawal
from optimizer.search import assemble
from optimizer.search.change import substitutes
from optimizer.search.change.positions import CHANGES, Board, outlines_of, positions_of
from optimizer.search.change.substitutes import Offer
from optimizer.search.query import whole
from optimizer.search.result import Candidate, Outcome
from optimizer.search.space import Choice
from optimizer.search.spread.yields import drawn
from optimizer.search.unusable import unusable

Tell = Callable[[str], None]


@dataclass(frozen=True, slots=True)
class Substitute:
    """One candidate that takes the board's place: the kind of change, and the positions that differ."""

    change: str
    changed: tuple[str, ...]
    candidate: Candidate


@dataclass(frozen=True, slots=True)
class Lack:
    """Why a kind of change has no substitute.

    `nearest` is the eligible one of largest margin: its limiting target fails first, and minus its margin
    is the smallest relaxation that admits one. Where none is eligible, `stopped` is the check that the one
    that gets furthest fails (see `substitutes.stopped`); where there is no such candidate at all, it is ''
    and `lacking` holds the positions for which there is nothing to choose.
    """

    change: str
    nearest: Substitute | None
    stopped: str = ""
    lacking: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Search:
    """How much was covered: declared combinations, pairs, settings evaluated, seconds."""

    combinations: int
    pairs: int
    evaluated: int
    seconds: float


@dataclass(frozen=True, slots=True)
class Replacement:
    """The answer: `old` is the record's candidate, `before` its targets against today's limits.

    `substitutes` are in rank order, the least change first; `lacks` are the changes without any.
    `request` is the request in force, with what is gone excluded.
    """

    reopened: Reopened
    request: Request
    old: Mapping[str, Any]
    before: tuple[Mapping[str, Any], ...]
    withdrawal: Withdrawal
    substitutes: tuple[Substitute, ...]
    lacks: tuple[Lack, ...]
    search: Search

    @property
    def board_row(self) -> dict[str, Any]:
        """The old candidate with its parts' outlines as they are known today."""
        return {**self.old, **outlines_of(self.withdrawal.plan.board)}


def replacement(
    reopened: Reopened, old: Mapping[str, Any], wish: Wish, *, show: int, tell: Tell = lambda _: None
) -> Replacement:
    """The best `show` substitutes of each kind of change for the candidate `old` of a record.

    `tell` is called with each kind of change before it is searched. Raises InputError where the wish
    cannot be (see `withdrawal`).
    """
    begun = time.perf_counter()
    study = reopened.study
    space = whole(study.request, study.catalogs)
    taken = withdrawal(reopened, space, old, wish)
    found: list[Substitute] = []
    lacks: list[Lack] = []
    evaluated = 0
    for change, offer in substitutes.offers(space, study.catalogs, taken.plan).items():
        tell(CHANGES[change - 1])
        ranked = substitutes.ranked(offer, change, by=study.request.ranking.by, show=show)
        evaluated += ranked.evaluated
        rows = _ranked(reopened, taken.plan.board, offer, (change, ranked.choice))
        found += rows
        if not rows:
            lack, more = _lack(reopened, taken.plan.board, offer, change)
            lacks.append(lack)
            evaluated += more
    pairs = study.catalogs.opamps.size * study.catalogs.photodiodes.size
    return Replacement(
        reopened=reopened,
        request=_in_force(study.request, taken),
        old=old,
        before=tuple(before(old, space.limits)),
        withdrawal=taken,
        substitutes=tuple(found),
        lacks=tuple(lacks),
        search=Search(space.combinations, pairs, evaluated, time.perf_counter() - begun),
    )


def _ranked(reopened: Reopened, board: Board, offer: Offer, found: tuple[int, Choice]) -> list[Substitute]:
    """The substitutes in order; those that do not reach the yield asked for go behind the others."""
    wanted = reopened.study.request.tolerance.yield_
    rows = list(_named(reopened, board, offer, found))
    return rows if wanted is None else sorted(rows, key=lambda row: not _reaches(row.candidate, wanted))


def _reaches(candidate: Candidate, wanted: float) -> bool:
    return candidate.simulated is not None and candidate.simulated.reaches(wanted)


def _named(reopened: Reopened, board: Board, offer: Offer, found: tuple[int, Choice]) -> Iterator[Substitute]:
    """The settings of one change as substitutes, with their random draws where the request states any."""
    (change, choice), catalogs = found, reopened.study.catalogs
    candidates = assemble.candidates(offer.space, catalogs, choice)
    changed = positions_of(offer.space, board, offer.grades, choice)
    for row, (candidate, names) in enumerate(zip(candidates, changed, strict=True)):
        (one,) = drawn(offer.space, catalogs, choice.take(np.array([row])), [candidate])
        yield Substitute(CHANGES[change - 1], names, one)


def _lack(reopened: Reopened, board: Board, offer: Offer, change: int) -> tuple[Lack, int]:
    """Why a change has no substitute, and how many settings were evaluated to say so."""
    near = substitutes.nearest(offer, change)
    rows = list(_named(reopened, board, offer, (change, near.choice)))
    if rows:
        return Lack(CHANGES[change - 1], rows[0]), near.evaluated
    stopped = substitutes.stopped(offer, change)
    lacking = () if stopped else substitutes.lacking(offer.grades, change)
    return Lack(CHANGES[change - 1], None, stopped, lacking), near.evaluated


def before(old: Mapping[str, Any], limits: Mapping[str, float]) -> Iterator[Mapping[str, Any]]:
    """The targets of a record's candidate against `limits`: as recorded where the limit is the same still,

    else its recorded figure against the limit of today.
    """
    recorded = {target["name"]: target for target in old["targets"]}
    for name, limit in limits.items():
        target = recorded.get(name)
        if target is not None and target["limit"] == limit:
            yield target
            continue
        value = old["figures"].get(name)
        figure = np.array(np.nan if value is None else value)
        yield {
            "name": name,
            "value": value,
            "limit": limit,
            "margin": float(margins.margin(name, figure, limit)),
        }


def _in_force(request: Request, taken: Withdrawal) -> Request:
    excluded = dict.fromkeys((*request.space.exclude, *taken.names))
    return replace(request, space=replace(request.space, exclude=tuple(excluded)))


def record_of(answer: Replacement) -> Record:
    """The substitutes as a record, the first one chosen; the nearest misses of changes without any follow.

    Beside the keys of a shortlist, each candidate holds `change` and `changed`, and `replaces` holds the
    old candidate, what is gone (`out` as names to exclude) and what was kept.
    """
    near = [lack.nearest for lack in answer.lacks if lack.nearest is not None]
    search = answer.search
    outcome = Outcome(
        candidates=tuple(one.candidate for one in answer.substitutes),
        near_misses=tuple(one.candidate for one in near),
        combinations=search.combinations,
        pairs=search.pairs,
        evaluated=search.evaluated,
        seconds=search.seconds,
        proven=True,
        unusable=unusable(answer.request, answer.reopened.study.catalogs),
    )
    data = records.build(replace(answer.reopened.study, request=answer.request), outcome).data
    rows = {"candidates": answer.substitutes, "near_misses": near}
    marked = {
        group: [
            row | {"change": one.change, "changed": list(one.changed)}
            for row, one in zip(data[group], substitutes_of, strict=True)
        ]
        for group, substitutes_of in rows.items()
    }
    taken = answer.withdrawal
    replaces = {
        "candidate": answer.old,
        "gone": [asdict(part) for part in taken.parts],
        "out": taken.names,
        "keep": sorted(taken.plan.keep),
    }
    return Record({**data, **marked, "replaces": plain(replaces)})
