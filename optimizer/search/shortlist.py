"""The shortlist: hunt, fill up with near misses, count the rest, and say what was proved."""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs
from optimizer.errors import LuxsiftError
from optimizer.quantities import show
from optimizer.request.types import Request
from optimizer.search import assemble, feed, impossible, reasons
from optimizer.search.bounds import Goals
from optimizer.search.crew import Crew, Found
from optimizer.search.hunt import Rules
from optimizer.search.query import query
from optimizer.search.result import SOURCES, Outcome, Progress
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space, build
from optimizer.search.spread import yields
from optimizer.search.unusable import unusable
from optimizer.search.view import Index

Ints = NDArray[np.int64]

Report = Callable[[Progress], None]


class Interrupted(LuxsiftError):
    """The user stopped the search; `outcome` holds what it had by then.

    It is proven when only near misses and counts were still missing.
    """

    def __init__(self, outcome: Outcome) -> None:
        self.outcome = outcome
        super().__init__("interrupted")


@dataclass(frozen=True, slots=True)
class Work:
    """One request compiled, and who does the work."""

    space: Space
    index: Index
    goals: Goals
    catalogs: Catalogs
    crew: Crew


def shortlist(
    request: Request, catalogs: Catalogs, *, workers: int = 1, progress: Report | None = None
) -> Outcome:
    """The ranked shortlist of `request` over `catalogs`, proven equal to evaluating every combination.

    `workers` processes share the pairs; the result is the same for any number. `progress` is called
    about ten times a second. Raises `Interrupted` on Ctrl-C.
    """
    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        outcome = _shortlist(request, catalogs, workers, progress)
    return replace(outcome, unusable=unusable(request, catalogs))


def _shortlist(request: Request, catalogs: Catalogs, workers: int, progress: Report | None) -> Outcome:
    begun = time.perf_counter()
    space = build(request, catalogs)
    pairs = catalogs.opamps.size * catalogs.photodiodes.size
    known = impossible.reasons(space)
    if known:
        return Outcome(
            (), (), space.combinations, pairs, 0, time.perf_counter() - begun, True, impossible=known
        )
    asked = query(space)
    crew = Crew(asked.index, workers, progress, _label(space, catalogs))
    work = Work(space, asked.index, asked.goals, catalogs, crew)
    try:
        return replace(_searched(work), seconds=time.perf_counter() - begun)
    except KeyboardInterrupt:
        outcome = _outcome(work, work.crew.so_far(), None, finished=False)
        raise Interrupted(replace(outcome, seconds=time.perf_counter() - begun)) from None


def _label(space: Space, catalogs: Catalogs) -> Callable[[Choice], str]:
    """Words for the best setting so far."""

    def words(choice: Choice) -> str:
        diode = catalogs.photodiodes.text["part"][int(choice.diode[0])]
        opamp = catalogs.opamps.text["part"][int(choice.opamp[0])]
        resistance = float(space.resistors.value[int(choice.resistor[0])])
        return f"{diode} with {opamp}, Rf {show(resistance, 'resistance')}"

    return words


def _searched(work: Work) -> Outcome:
    """Hunt for pairs that meet; with too few of them, for the nearest misses too."""
    ranking, space = work.space.request.ranking, work.space
    o = np.flatnonzero(space.opamp_verdicts.alone == PASSES)
    d = np.flatnonzero(space.diode_verdicts.alone == PASSES)
    every = feed.pairs_of(work.index, o, d, by=ranking.by)
    met = work.crew.hunt(work.goals, Rules(ranking.by, ranking.show, 0.0), every)
    lacking = ranking.show - met.choice.opamp.size
    if not lacking:
        return _outcome(work, met, None, finished=True)
    taken = np.isin(
        _numbers(space, every.opamp, every.diode), _numbers(space, met.choice.opamp, met.choice.diode)
    )
    near = _nearest(work, lacking, every.take(~taken))
    blocking = () if met.choice.opamp.size else _blocking(work, every, near)
    return replace(_outcome(work, met, near, finished=True), blocking=blocking)


def _nearest(work: Work, count: int, pairs: feed.Pairs) -> Found:
    """The nearest misses, whether or not other makers could serve them."""
    crew = work.crew
    crew.index = replace(work.index, space=replace(work.space, sources=1))
    try:
        return crew.hunt(work.goals, Rules("margin", count, -1.0), pairs)
    finally:
        crew.index = work.index


def _numbers(space: Space, opamp: Ints, diode: Ints) -> Ints:
    return opamp * space.diodes.price.size + diode


def _outcome(work: Work, met: Found, near: Found | None, *, finished: bool) -> Outcome:
    space, request = work.space, work.space.request
    missed = met.choice.take(np.zeros(0, dtype=np.int64)) if near is None else near.choice
    full = near is None and met.choice.opamp.size == request.ranking.show
    shown = reasons.Shown(
        np.concatenate(
            [_numbers(space, met.choice.opamp, met.choice.diode), _numbers(space, missed.opamp, missed.diode)]
        ),
        float(met.primary[-1]) if full else None,
    )
    counts: Mapping[str, int] = {}
    candidates = assemble.candidates(space, work.catalogs, met.choice)
    if finished:
        counts = reasons.dropped(work.index, work.goals, by=request.ranking.by, shown=shown)
        candidates = yields.drawn(space, work.catalogs, met.choice, candidates)
    return Outcome(
        candidates=candidates,
        near_misses=assemble.candidates(space, work.catalogs, missed),
        combinations=space.combinations,
        pairs=work.catalogs.opamps.size * work.catalogs.photodiodes.size,
        evaluated=work.crew.evaluated,
        seconds=0.0,
        proven=bool(work.crew.met),
        dropped=counts,
    )


def _blocking(work: Work, every: feed.Pairs, near: Found) -> tuple[str, ...]:
    """The single targets of which each, if dropped, would let something through; last, second sources."""
    if not near.choice.opamp.size:
        return ()
    table, sourced = near.margin_columns, work.space.sources > 1
    names = []
    for place, name in enumerate(work.goals.limits):
        rest = {other: limit for other, limit in work.goals.limits.items() if other != name}
        alone = np.all(np.delete(table, place, axis=1) >= 0.0, axis=1) & (not sourced)
        if not rest or alone.any() or _something_meets(work, rest, every):
            names.append(name)
    if sourced and np.all(table >= 0.0, axis=1).any():
        names.append(SOURCES)
    return tuple(names)


def _something_meets(work: Work, limits: Mapping[str, float], every: feed.Pairs) -> bool:
    space = replace(work.space, limits=limits)
    index = replace(work.index, space=space)
    goals = replace(work.goals, limits=limits)
    crew = Crew(index, work.crew.workers, work.crew.progress, work.crew.label)
    found = crew.hunt(goals, Rules("cost", 1, 0.0), every, first_only=True)
    return bool(found.choice.opamp.size)
