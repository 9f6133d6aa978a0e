"""How much the parts of chosen candidates hang on their supply.

Entry points: `exposure`, over the records of many boards; `exposed`, the same of one candidate for a page.

A substitute counts where it meets every target of the request, with every check, in place of the part
alone: as a drop-in, or with values changed in the footprints that are there (see `search.positions`).
Everything else stays as it is, save what the catalogs call obsolete or no longer hold: that gives way to
whatever fits. Of a family that is used more than once, those count that can stand in for Rf, else for Cf.
"""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import groupby
from typing import Any

from optimizer.catalog.parts import Catalogs
from optimizer.figures import CHECKS
from optimizer.review.board import space_of
from optimizer.review.reopen import Reopened
from optimizer.review.shelf import Taken
from optimizer.review.supply import Case, Exposure, located, pieces, summed, worst_first
from optimizer.review.withdrawal import CATALOG_OF, Wish, taken_away
from optimizer.search.change import dividers
from optimizer.search.change.positions import USES, Board, Fitted, board_of
from optimizer.search.change.serving import Serving, serving
from optimizer.search.locate import NotFound, locate
from optimizer.search.plain import judge
from optimizer.search.query import whole
from optimizer.search.roles import PASSES
from optimizer.search.space import Space

Tell = Callable[[str], None]
Key = tuple[str, str, str]

CHOSEN = (
    "photodiode",
    "photodiode_maker",
    "opamp",
    "opamp_maker",
    "wiring",
    "reference",
    "feedback_resistance",
    "resistor_family",
    "feedback_capacitance",
    "capacitor_family",
    "low_pass",
)
"""What tells candidates apart."""


@dataclass(frozen=True, slots=True)
class Stale:
    """A record whose chosen candidate no longer holds as it stands, and why, in the keys of the checks."""

    record: str
    why: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Exposures:
    """Every part, the worst first; records whose candidate no longer holds."""

    parts: tuple[Exposure, ...]
    stale: tuple[Stale, ...]


def exposure(taken: Sequence[Taken], tell: Tell = lambda _: None) -> Exposures:
    """The parts that the chosen candidates of `taken` use; `tell` is called with each record's name.

    Each request is compiled once, and equal candidates of it are looked at once.
    """
    cases: dict[Key, Case] = {}
    stale: list[Stale] = []
    for _, group in groupby(sorted(taken, key=_request_of), key=_request_of):
        for alike, one in _looked_at(list(group), tell):
            _add(cases, alike, one)
            stale += [Stale(_place(each), one.stale) for each in alike if one.stale]
    order = {one.name: place for place, one in enumerate(taken)}
    places = {_place(one): place for place, one in enumerate(taken)}
    for case in cases.values():
        for name, channels in case.records.items():
            channels.sort(key=lambda channel, of=name: places[located(of, [channel])])  # type: ignore[misc]
    parts = sorted((summed(case, order) for case in cases.values()), key=worst_first)
    return Exposures(tuple(parts), tuple(sorted(stale, key=lambda one: places[one.record])))


def exposed(reopened: Reopened, candidate: Mapping[str, Any]) -> tuple[Exposure, ...]:
    """The parts of one candidate, the worst first."""
    return exposure([Taken("", reopened, candidate)]).parts


@dataclass(frozen=True, slots=True)
class _Looked:
    """One candidate looked at: its parts with their uses and what serves, and why it no longer holds."""

    catalogs: Catalogs
    quantity: int
    extra_package: bool
    parts: tuple[tuple[Fitted, tuple[str, ...], Serving], ...]
    stale: tuple[str, ...]


def _place(one: Taken) -> str:
    """The record, of a board with the channel."""
    return one.name if one.channel is None else located(one.name, [one.channel])


def _request_of(one: Taken) -> tuple[str, tuple[str, ...], int, int, bool]:
    """What must be equal for the same space to be compiled: a board has a say in quantity and sources."""
    request, place = one.reopened.study.request, os.path.realpath(one.reopened.study.request.path)
    sources = request.resilience.opamp_sources
    return place, request.space.exclude, request.quantity, sources, one.board is None


def _looked_at(group: Sequence[Taken], tell: Tell) -> Iterator[tuple[list[Taken], _Looked]]:
    """Each distinct candidate of one request, with the records that choose it."""
    study = group[0].reopened.study
    space = _space(group[0])
    alike: dict[str, list[Taken]] = {}
    for one in group:
        alike.setdefault(_told_apart(one.candidate), []).append(one)
    for several in alike.values():
        for one in several:
            tell(one.name)
        yield several, _look(space, study.catalogs, several[0].candidate)


def _space(one: Taken) -> Space:
    study = one.reopened.study
    if one.board is None:
        return whole(study.request, study.catalogs)
    return space_of(one.board, next(c for c in one.board.channels if c.name == one.channel))


def _told_apart(candidate: Mapping[str, Any]) -> str:
    named = {key: value for key, value in candidate.items() if key in CHOSEN or key.endswith("_family")}
    return json.dumps(named, sort_keys=True)


def _look(space: Space, catalogs: Catalogs, candidate: Mapping[str, Any]) -> _Looked:
    board = board_of(space, catalogs, candidate)
    parts = []
    for part, uses in _parts_of(board):
        taken = taken_away(catalogs, board, Wish((_full(part),)))
        parts.append((part, uses, serving(space, catalogs, taken.plan, uses[0])))
    stale = tuple(no_longer(space, catalogs, candidate))
    return _Looked(catalogs, space.request.quantity, board.extra_package, tuple(parts), stale)


def _parts_of(board: Board) -> list[tuple[Fitted, tuple[str, ...]]]:
    """Each part of a board once, with its uses in the order of USES."""
    uses: dict[tuple[str, str, str | None], list[str]] = {}
    for use in USES:
        if use in board.parts:
            part = board.parts[use]
            uses.setdefault((CATALOG_OF[use], part.name, part.maker), []).append(use)
    return [(board.parts[names[0]], tuple(names)) for names in uses.values()]


def _full(part: Fitted) -> str:
    return part.name if part.maker is None else f"{part.maker}/{part.name}"


def no_longer(space: Space, catalogs: Catalogs, candidate: Mapping[str, Any]) -> Iterator[str]:
    """Why `candidate` as it stands is no candidate any more: what is missing, a check, or missed targets."""
    priced = dividers.recorded(space, catalogs, candidate)
    try:
        judged = judge(priced, locate(priced, catalogs, candidate), "cost")
    except NotFound as lack:
        yield from (f"missing {position}" for position, _ in lack.missing)
        return
    reach = int(judged.reach[0])
    if reach < PASSES:
        yield CHECKS[reach]
        return
    for name, margin in zip(priced.limits, judged.margin_columns[0], strict=True):
        if margin < 0.0:
            yield f"misses {name}"


def _add(cases: dict[Key, Case], alike: Sequence[Taken], one: _Looked) -> None:
    for part, uses, served in one.parts:
        case = cases.setdefault((CATALOG_OF[uses[0]], part.name, part.maker or ""), Case(part))
        case.uses |= set(uses)
        for taken in alike:
            channels = case.records.setdefault(taken.name, [])
            channels += [] if taken.channel is None or taken.channel in channels else [taken.channel]
            case.needed += one.quantity * _pieces_of(taken, one, part, uses)
        case.catalogs.append(one.catalogs)
        case.served.append(served)


def _pieces_of(taken: Taken, one: _Looked, part: Fitted, uses: Sequence[str]) -> int:
    """The pieces of `part` that `taken` stands for: as its board counts them, or those of one receiver."""
    if taken.pieces is None:
        return sum(pieces(use, one.extra_package) for use in uses)
    role = CATALOG_OF[uses[0]].removesuffix("s")
    return taken.pieces.get((role, part.name, part.maker or ""), 0)
