"""The best value that one target can reach over some pairs, with other targets to be met or none.

A climb from random settings finds a good value. The search then finds a setting that beats it, from
which the climb goes on, or proves that there is none. Only the value is asked for, so among settings
that reach it none is preferred: a search that had to name the cheapest would have to visit all of them.
A single target without the others can leave the bounds little to hold on to; where they prove nothing
within STEPS, what is found is given with a bound that nothing passes.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.search import hunt as hunting
from optimizer.search.hunt import Hunt, Rules
from optimizer.search.query import Query, graded
from optimizer.search.space import Choice
from optimizer.search.spread.corners import active
from optimizer.search.weigh.steps import moved
from optimizer.search.weigh.valued import Valued, valued
from optimizer.vocabulary import VOCABULARY

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

FINE = 1e-7
"""The margin, against the value found, from which a setting counts as better.

So no setting beats that value by more than this fraction of it (3e-6 deg, 1e-6 dB).
"""

DRAWN = 4096
"""Random settings to climb from."""
DRAWN_AT_CORNERS = 128
"""The same where each has to be evaluated at every corner."""
SWEEPS = 12
"""Changes of one axis at a time that a climb takes at most."""
PATIENCE = 6
"""Steps after which a search that finds nothing better gives way to a climb."""
STEPS = 96
"""Steps of the search, of some thousand boxes each, that a value alone may take; with the others, twice."""

_LEAST_POSSIBLE = ("peaking", "offset", "supply_current", "cost")
"""Targets that nothing can take below 0."""


@dataclass(frozen=True, slots=True)
class Ground:
    """The pairs of `opamps` and `diodes` in the space of `asked`, and settings `known` to begin from."""

    asked: Query
    opamps: Ints
    diodes: Ints
    names: tuple[str, ...]
    known: Valued


def ground(asked: Query, opamps: Ints, diodes: Ints, hints: Choice) -> Ground:
    """What to climb on: random eligible settings (the same ones every time) and the eligible `hints`."""
    space = asked.space
    rng = np.random.default_rng(0)
    drawn = DRAWN_AT_CORNERS if active(space) else DRAWN
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    columns = (
        rng.choice(opamps, drawn),
        rng.choice(diodes, drawn),
        *(rng.integers(n, size=drawn) for n in sizes),
    )
    start = Choice(*(np.concatenate(both) for both in zip(hints.columns(), columns, strict=True)))
    names = tuple(space.limits)
    return Ground(asked, opamps, diodes, names, valued(space, start, names))


@dataclass(frozen=True, slots=True)
class Best:
    """The best `value` found, which no setting beats by more than FINE; or only by as much as `bound`.

    `value` is None where no setting meets what must be met, NaN where the figure exists in none of
    those that do. `bound` is None where the value is proven, inf where nothing bounds it.
    """

    value: float | None
    bound: float | None = None


def best(on: Ground, name: str, musts: Mapping[str, float]) -> Best:
    """The best value of target `name` among eligible settings that meet `musts`."""
    top, left = _highest(on, name, musts, on.known), 2 * STEPS if musts else STEPS
    while True:
        if top is not None:
            top = _climbed(on, name, musts, top)
            if _perfect(name, _value(on, name, top)):
                return Best(_value(on, name, top))
        found, steps, bound = _beyond(on, name, musts, (top, left))
        left -= steps
        if found is None:
            return Best(None if top is None else _value(on, name, top), bound)
        top = found


def _value(on: Ground, name: str, one: Valued) -> float:
    return float(one.values[0, on.names.index(name)])


def _perfect(name: str, value: float) -> bool:
    return name in _LEAST_POSSIBLE and value <= 0.0


def _highest(on: Ground, name: str, musts: Mapping[str, float], among: Valued) -> Valued | None:
    """The best of `among` that meets `musts`; None where none does."""
    misses, height = _score(on, name, musts, among)
    good = np.flatnonzero(misses >= 0.0)
    return among.take(good[[np.argmax(height[good])]]) if good.size else None


def _score(on: Ground, name: str, musts: Mapping[str, float], among: Valued) -> tuple[Floats, Floats]:
    """The smallest margin of `musts`, cut at 0, and the value so that more is better (-inf: none)."""
    misses = np.zeros(among.size)
    for other, limit in musts.items():
        column = among.values[:, on.names.index(other)]
        misses = np.minimum(misses, margins.margin(other, column, limit))
    value = among.values[:, on.names.index(name)]
    height = value if VOCABULARY[name].better == "higher" else -value
    return misses, np.where(np.isnan(height), -np.inf, height)


def _climbed(on: Ground, name: str, musts: Mapping[str, float], top: Valued) -> Valued:
    """The best that changes along one axis at a time lead to from `top`."""
    for _ in range(SWEEPS):
        found = _highest(on, name, musts, _better(on, name, musts, top))
        if found is None:
            return top
        top = found
    return top


def _better(on: Ground, name: str, musts: Mapping[str, float], top: Valued) -> Valued:
    """The neighbours of `top` that are better and meet `musts`.

    Values only get worse from corner to corner, so those that are no better at nominal are dropped first.
    """
    _, least = _score(on, name, {}, top)

    def useful(given: Valued) -> NDArray[np.bool_]:
        misses, height = _score(on, name, musts, given)
        return np.asarray((misses >= 0.0) & (height > least[0]))

    around = valued(on.asked.space, _neighbours(on, top.choice), on.names, useful)
    return around.take(useful(around))


def _neighbours(on: Ground, one: Choice) -> Choice:
    """Every setting that differs from `one` along one axis at most."""
    space = on.asked.space
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    axes = (on.opamps, on.diodes, *(np.arange(size) for size in sizes))
    here = np.array([int(column[0]) for column in one.columns()])
    blocks = []
    for place, values in enumerate(axes):
        block = np.tile(here, (values.size, 1))
        block[:, place] = values
        blocks.append(block)
    return Choice(*np.concatenate(blocks).T)


def _beyond(
    on: Ground, name: str, musts: Mapping[str, float], known: tuple[Valued | None, int]
) -> tuple[Valued | None, int, float | None]:
    """Some setting that is better than the best `known` (any at all where that is None), and the steps taken.

    Without one, the third says what bounds the value after the steps that are left (None: proven). Whether
    there is any setting is always settled.
    """
    top, most = known
    limit, least = on.asked.space.limits[name], -1.0
    if top is not None:
        limit, least = _bar(name, _value(on, name, top), limit)
    asked = graded(on.asked, {name: limit}, musts=musts, comfort=margins.LARGEST)
    hunt, steps = _hunted(on, asked, least, np.inf if top is None else most)
    judged = hunt.incumbents.judged
    if judged is not None:
        found = judged.take(hunt.incumbents.shown[:1]).choice
        return valued(on.asked.space, found, on.names), steps, None
    if not hunt.pool.priority.size:
        return None, steps, None
    highest = float(-hunt.pool.key[:, 0].min())
    return None, steps, moved(name, limit, highest) if highest < margins.LARGEST else np.inf


def _hunted(on: Ground, asked: Query, least: float, most: float) -> tuple[Hunt, int]:
    """A hunt that ends when it has found something and nothing better for a while, or after `most` steps.

    And how many steps it took.
    """
    hunt = hunting.start(asked.index, asked.goals, Rules("margin", 1, least))
    steps, last, highest = 0, 0, -np.inf

    def enough() -> bool:
        nonlocal steps, last, highest
        steps += 1
        bar = hunt.incumbents.bar
        if bar is not None and -bar[0] > highest:
            last, highest = steps, -bar[0]
        return bool(steps >= most or (bar is not None and steps - last >= PATIENCE))

    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        hunting.add(hunt, np.repeat(on.opamps, on.diodes.size), np.tile(on.diodes, on.opamps.size))
        if most > 0:
            hunting.drain(hunt, np.inf, enough)
    return hunt, steps


def _bar(name: str, value: float, limit: float) -> tuple[float, float]:
    """Limit and least margin that only a better value than `value` reaches."""
    if np.isnan(value):
        return limit, -1.0 + FINE  # any value at all
    if value > 0.0 or name in margins.DECIBELS:
        return value, FINE
    return limit * FINE, FINE
