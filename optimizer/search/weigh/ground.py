"""What questions about one request share: its space laid out, the pairs that may serve it, simple answers."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import feed
from optimizer.search.crew import Found, gathered
from optimizer.search.feed import Pairs
from optimizer.search.hunt import Hunt, Rules
from optimizer.search.query import Query, graded, is_empty, query
from optimizer.search.sources import enough, mates, offered
from optimizer.search.space import Choice, Space, build
from optimizer.search.weigh.valued import valued
from optimizer.vocabulary import VOCABULARY

NOTHING_GRADED = {"cost": float("inf")}
"""Limits that every candidate meets alike: for a request of which no target is left."""


@dataclass(frozen=True, slots=True)
class Ground:
    """A request laid out; `pairs` of parts that pass their own checks, by rising least cost."""

    asked: Query
    catalogs: Catalogs
    pairs: Pairs

    @property
    def space(self) -> Space:
        """The space of the request."""
        return self.asked.space


def lay_out(request: Request, catalogs: Catalogs) -> tuple[Space, Ground | None]:
    """The space of `request`, and the ground that it gives; None where the space is empty on some axis."""
    space = build(request, catalogs)
    if is_empty(space):
        return space, None
    asked = query(space)
    opamps, diodes = asked.eligible
    if space.sources > 1:
        opamps = opamps[offered(space)[opamps]]
    return space, Ground(asked, catalogs, feed.pairs_of(asked.index, opamps, diodes, by="cost"))


def narrowed(ground: Ground, pairs: Pairs) -> Ground:
    """`ground` with no other pairs than `pairs`."""
    return replace(ground, pairs=pairs)


def under(
    ground: Ground,
    limits: Mapping[str, float],
    *,
    musts: Mapping[str, float] | None = None,
    comfort: float = margins.LARGEST,
) -> Query:
    """The ground's query with `limits` graded and `musts` to be met; without either, all rank alike."""
    assert limits or not musts
    return graded(ground.asked, limits or NOTHING_GRADED, musts=musts or {}, comfort=comfort)


def first(ground: Ground, asked: Query, rules: Rules, *, any_will_do: bool = False) -> Found:
    """The best setting of the ground's pairs that `asked` admits, or the first found; none where none is."""

    def watch(hunt: Hunt, _taken: int) -> bool:
        return any_will_do and hunt.incumbents.bar is not None

    with np.errstate(all="ignore"):
        return gathered(feed.run(asked.index, asked.goals, rules, pairs=ground.pairs, watch=watch))


def value_of(asked: Query, choice: Choice, name: str) -> float:
    """The value of target `name` that the one setting `choice` can be relied on for; NaN does not exist.

    At the worst corner where corners are graded, and with as many sources as are asked for.
    """
    space = asked.space
    own = valued(space, choice, (name,)).values
    value = float(own[0, 0]) if own.size else float("nan")
    if space.sources < 2 or np.isnan(value):
        return value
    return _served(space, choice, name, value)


def _served(space: Space, choice: Choice, name: str, value: float) -> float:
    """The best value that op-amps of enough makers reach, the chosen one (with `value`) among them."""
    row, mate = mates(space, choice.opamp)
    musts = tuple(space.musts)
    theirs = Choice(mate, *choice.take(row).columns()[1:])
    served = valued(space, theirs, (name, *musts))
    margin = [margins.margin(n, served.values[:, k], space.musts[n]) for k, n in enumerate(musts, 1)]
    meets = np.all(np.array(margin) >= 0.0, axis=0) if musts else np.ones(served.size, dtype=bool)
    mate, values = mate[served.origin][meets], served.values[meets, 0]
    higher = VOCABULARY[name].better == "higher"
    for least in np.sort(values[~np.isnan(values)])[:: -1 if higher else 1].tolist():
        far = values >= least if higher else values <= least
        if enough(space, 1, np.zeros(int(far.sum()), dtype=np.int64), mate[far])[0]:
            return float(min(value, least) if higher else max(value, least))
    return float("nan")
