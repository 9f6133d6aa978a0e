"""Why nothing meets a request: the smallest sets of targets that cannot hold together, and the least
relaxation of each single target that lets something through. Eligibility is always kept.

A set of targets that some setting meets is met in every part of it, one that nothing meets in no set
that holds it: so of the sets only few have to be searched. Sets are tried from the smallest up; one
that fails then is minimal. A search ends at the first setting found, or proves that there is none.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from itertools import combinations

import numpy as np

from optimizer import margins
from optimizer.search import assemble
from optimizer.search.feed import pairs_of
from optimizer.search.hunt import Rules
from optimizer.search.query import Query
from optimizer.search.result import SOURCES, Candidate
from optimizer.search.space import Choice
from optimizer.search.weigh import steps
from optimizer.search.weigh.ground import Ground, first, under, value_of
from optimizer.search.weigh.valued import valued

MOST_SETS = 12
"""Conflicting sets that are looked for, at most; the smallest come first."""

Names = frozenset[str]
Witness = Callable[[Names], Sequence[Names]]
"""Sets of targets that some setting is known to meet, one of them as asked; empty where nothing does."""


@dataclass(frozen=True, slots=True)
class Relaxation:
    """The least relaxation of one target, alone, that lets something through.

    `limit` is what is asked, `value` the best that can be had with all else met, `margin` that of
    `value` against `limit` (not cut at -1). All are None, but `limit`, where not even dropping it helps.
    """

    target: str
    limit: float
    value: float | None = None
    margin: float | None = None
    candidate: Candidate | None = None


@dataclass(frozen=True, slots=True)
class Conflicts:
    """Why nothing meets: `sets` of targets that cannot hold together, minimal, the smallest first.

    `complete` is False where there are more sets than were looked for; all smaller than the last are
    there. Nothing is `eligible` where no setting passes the checks even without targets. `evaluated`
    counts settings.
    """

    sets: tuple[tuple[str, ...], ...]
    relaxations: tuple[Relaxation, ...]
    complete: bool = True
    eligible: bool = True
    evaluated: int = 0


def conflicts(ground: Ground, limits: Mapping[str, float]) -> tuple[Conflicts, tuple[Choice, ...]]:
    """Why nothing on `ground` meets `limits`; and the settings of the relaxations that there are."""
    names = (*limits, SOURCES) if ground.space.sources > 1 else tuple(limits)
    work = _Work(ground, _unsourced(ground), limits)
    without = {name: work.witness(frozenset(names) - {name}) for name in names}
    eased = [_relaxation(work, name) for name in limits if without[name]]
    sets, complete = minimal(names, work.witness, [one for met in without.values() for one in met])
    eligible = sets != ((),)
    helped = {one.target: one for one, _ in eased}
    relaxations = tuple(helped.get(name, Relaxation(name, limit)) for name, limit in limits.items())
    found = Conflicts(sets if eligible else (), relaxations, complete, eligible, work.evaluated)
    return found, tuple(choice for _, choice in eased)


@dataclass(slots=True)
class _Work:
    """What is looked into: `limits` on `ground`, or `alone` where one source is enough."""

    ground: Ground
    alone: Ground
    limits: Mapping[str, float]
    known: dict[Names, Sequence[Names]] = field(default_factory=dict)
    evaluated: int = 0

    def witness(self, asked: Names) -> Sequence[Names]:
        """Look for any setting that meets `asked` (the sources, where those are among them)."""
        if asked not in self.known:
            self.known[asked] = self._witness(asked)
        return self.known[asked]

    def _witness(self, asked: Names) -> Sequence[Names]:
        where = self.ground if SOURCES in asked else self.alone
        some = {name: limit for name, limit in self.limits.items() if name in asked}
        found = first(where, under(where, some), Rules("cost", 1, 0.0), any_will_do=True)
        self.evaluated += found.evaluated
        return (asked, self.met_by(found.choice)) if found.cost.size else ()

    def met_by(self, choice: Choice) -> Names:
        """The targets that one eligible setting meets."""
        values = valued(self.ground.space, choice, tuple(self.limits)).values[0]
        pairs = zip(self.limits.items(), values, strict=True)
        return frozenset(name for (name, limit), value in pairs if margins.margin(name, value, limit) >= 0.0)

    def eased(self, target: tuple[str, float], least: float) -> tuple[Choice, float] | None:
        """The setting with the best value of a target (name, limit) at margin `least`, the others met."""
        asked = self._alone(target)
        found = first(self.ground, asked, Rules("margin", 1, least))
        self.evaluated += found.evaluated
        return (found.choice, value_of(asked, found.choice, target[0])) if found.cost.size else None

    def can(self, target: tuple[str, float]) -> bool:
        """Whether some setting meets a target (name, limit) with the others met."""
        found = first(self.ground, self._alone(target), Rules("cost", 1, 0.0), any_will_do=True)
        self.evaluated += found.evaluated
        return bool(found.cost.size)

    def _alone(self, target: tuple[str, float]) -> Query:
        """One target graded against another limit, the others to be met."""
        name, against = target
        rest = {other: limit for other, limit in self.limits.items() if other != name}
        return under(self.ground, {name: against}, musts=rest)


def minimal(
    names: Sequence[str], witness: Witness, known: Sequence[Names], most: int = MOST_SETS
) -> tuple[tuple[tuple[str, ...], ...], bool]:
    """The minimal sets of `names` that `witness` finds nothing for, and whether they are all (at `most`).

    `known` are sets that can be met. The empty set is the only one where even that cannot be.
    """
    met, failed = list(known), list[Names]()
    for tried in _by_size(names):
        if any(tried <= one for one in met) or any(one <= tried for one in failed):
            continue
        found = witness(tried)
        met += found
        if not found and len(failed) == most:
            return _in_order(failed, names), False
        if not found:
            failed.append(tried)
    return _in_order(failed, names), True


def _by_size(names: Sequence[str]) -> Iterator[Names]:
    for size in range(len(names) + 1):
        yield from map(frozenset, combinations(names, size))


def _in_order(sets: Sequence[Names], names: Sequence[str]) -> tuple[tuple[str, ...], ...]:
    return tuple(tuple(name for name in names if name in one) for one in sets)


def _unsourced(ground: Ground) -> Ground:
    """`ground` where one source is enough."""
    if ground.space.sources < 2:
        return ground
    asked = replace(ground.asked, space=replace(ground.space, sources=1))
    asked = replace(asked, index=replace(asked.index, space=asked.space))
    return replace(ground, asked=asked, pairs=pairs_of(asked.index, *asked.eligible, by="cost"))


def _relaxation(work: _Work, name: str) -> tuple[Relaxation, Choice]:
    """The least relaxation of target `name`, which helps if it is dropped, and its setting.

    A hunt gives the best value only up to what margins tell apart, so a better one is asked for.
    """
    limit = work.limits[name]
    found = work.eased((name, steps.far_below(name, limit)), 0.0)
    found = found or work.eased((name, steps.loosest(name)), -1.0)
    assert found is not None, name
    better: tuple[Choice, float] | None = found
    while better is not None:
        found, better = better, None
        against = steps.stricter(name, found[1])
        if against is not None and work.can((name, against)):
            better = work.eased((name, against), 0.0)
    choice, value = found
    candidate = assemble.candidates(work.ground.space, work.ground.catalogs, choice)[0]
    margin = float(np.round(margins.raw_margin(name, np.array(value), limit), 9))
    return Relaxation(name, limit, value, margin, candidate), choice
