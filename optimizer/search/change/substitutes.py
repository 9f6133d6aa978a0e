"""The best substitutes of each kind of change, exactly: fewest changed positions, then the ranking.

Entry points: `offers`, what may stand in, one `Offer` (a space graded against a board) a change; and over
one of them `ranked`, its best rows; `nearest`, where none meets; `stopped`, where none is even eligible;
`able`, which parts can do at all.

The choices of one change are cut into products of axes (each axis by how many positions it changes and
by its grade), and each product is one query to the search. Together they are everything, so that what is
merged is the same as evaluating every choice.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import product

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs
from optimizer.figures import CHECKS
from optimizer.search import feed, keys, reach
from optimizer.search.change import dividers
from optimizer.search.change.positions import (
    DROP_IN,
    FOOTPRINT,
    REDESIGN,
    VALUES,
    Axis,
    Grades,
    Out,
    Plan,
    graded,
)
from optimizer.search.crew import Found, gathered, nothing
from optimizer.search.hunt import Hunt, Rules
from optimizer.search.locate import POSITIONS
from optimizer.search.query import Masks, Query, query, restricted
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]
Watch = Callable[[Hunt, int], bool]
Product = tuple[Bools, ...]
"""Which choices of each axis, in the order of the columns of a `Choice`."""

AXES = ("opamp", "photodiode", "", "feedback_resistance", "feedback_capacitance", "low_pass")
"""The position of each axis; contexts hold two, wiring and reference."""

CORNER = "corner"
"""What stops settings that are eligible at nominal values only."""

_MISSING = CHECKS.index("missing")
_CHUNK = 4096


@dataclass(frozen=True, slots=True)
class Offer:
    """What may stand in: a space and its grades."""

    space: Space
    grades: Grades


@dataclass(frozen=True, slots=True)
class Ranked:
    """Substitutes in rank order, and how many settings were evaluated for them."""

    choice: Choice
    evaluated: int


def offers(space: Space, catalogs: Catalogs, plan: Plan) -> dict[int, Offer]:
    """What may stand in, by change. Where footprints must stay, dividers come from families that fit."""
    space = barred(space, plan.out)
    cheapest, fitting = dividers.left(space, catalogs, plan), dividers.fitting(space, catalogs, plan)
    free = Offer(cheapest, graded(cheapest, catalogs, plan))
    bound = Offer(fitting, graded(fitting, catalogs, plan))
    return {DROP_IN: bound, VALUES: bound, FOOTPRINT: free, REDESIGN: free}


def barred(space: Space, out: Out) -> Space:
    """`space` with what is out failing a check, so that it serves as no second source either."""
    opamps, diodes = (
        replace(verdicts, code=code, alone=code.max(axis=1, initial=-1).astype(np.int64))
        for verdicts, code in (
            (space.opamp_verdicts, _failed(space.opamp_verdicts.code, out.opamps)),
            (space.diode_verdicts, _failed(space.diode_verdicts.code, out.photodiodes)),
        )
    )
    return replace(space, opamp_verdicts=opamps, diode_verdicts=diodes)


def _failed(code: NDArray[np.int8], out: Bools) -> NDArray[np.int8]:
    failed = np.minimum(code, CHECKS.index("excluded")).astype(np.int8)
    return np.where(out[:, None], failed, code)


def ranked(offer: Offer, change: int, *, by: str, show: int) -> Ranked:
    """The best `show` pairs whose setting amounts to `change` and meets the request."""
    found, total = nothing(len(offer.space.limits)), 0
    for changed in range(_most(offer.grades) + 1) if anything(offer, change) else ():
        short = show - found.cost.size
        if not short:
            break
        rules = Rules(by, short, 0.0)
        every = [
            _asked(offer.space, part, rules, found.choice) for part in products(offer.grades, change, changed)
        ]
        total += sum(one.evaluated for one in every)
        found = _joined([found, _best(offer.space, every, short)])
    return Ranked(found.choice, total)


def nearest(offer: Offer, change: int) -> Ranked:
    """The eligible setting of `change` whose margin is largest, whether it meets or not; none without any.

    Whether op-amps of several makers could serve it is not asked.
    """
    space = replace(offer.space, sources=1)
    found = [_asked(space, part, Rules("margin", 1, -1.0)) for part in products(offer.grades, change)]
    return Ranked(_best(offer.space, found, 1).choice, sum(one.evaluated for one in found))


def anything(offer: Offer, change: int) -> bool:
    """Whether any setting of `change` meets the request."""
    return any(_first(offer.space, part) for part in products(offer.grades, change))


def able(offer: Offer, change: int, axis: int) -> Ints:
    """Which choices of `axis` (a column of a `Choice`) meet the request with some setting of `change`.

    Of the other axes only those are free that `change` leaves free.
    """
    found = [_meeting(offer.space, part) for part in products(offer.grades, change)]
    return np.unique(np.concatenate([np.zeros(0, dtype=np.int64), *(f.columns()[axis] for f in found)]))


def stopped(offer: Offer, change: int) -> str:
    """The check that the setting of `change` that gets furthest fails, `missing` with its column.

    CORNER where some pass every check at nominal values, but none at every corner that is graded; ''
    where there is no such setting at all.
    """
    reached = [_furthest(offer.space, part) for part in products(offer.grades, change)]
    if not reached:
        return ""
    code, column = max(reached)
    return CORNER if code == PASSES else CHECKS[code] + (f":{column}" if column else "")


def lacking(grades: Grades, change: int) -> tuple[str, ...]:
    """The positions for which nothing is to be had within `change`."""
    empty = [not np.any(axis.grade <= change) for axis in grades.axes]
    named = [name or "reference" for name, none in zip(AXES, empty, strict=True) if none]
    return tuple(sorted(named, key=POSITIONS.index))


def products(grades: Grades, change: int, changed: int | None = None) -> Iterator[Product]:
    """Products that together hold each setting of `change` once; with `changed`, those of so many positions.

    A setting's change is the greatest of its axes: some first axis has it, those before have less.
    """
    for pattern in _patterns(grades, changed):
        within = [_within(axis, change, count) for axis, count in zip(grades.axes, pattern, strict=True)]
        exact = [w & (axis.grade == change) for w, axis in zip(within, grades.axes, strict=True)]
        for first, here in enumerate(exact):
            less = [w & ~e for w, e in zip(within[:first], exact[:first], strict=True)]
            masks = (*less, here, *within[first + 1 :])
            if all(mask.any() for mask in masks):
                yield masks


def _patterns(grades: Grades, changed: int | None) -> Iterable[tuple[int | None, ...]]:
    """How many positions each axis changes, in every way that adds up to `changed`."""
    if changed is None:
        return [(None,) * len(grades.axes)]
    counts = [np.unique(axis.changed).tolist() for axis in grades.axes]
    return [pattern for pattern in product(*counts) if sum(pattern) == changed]


def _within(axis: Axis, change: int, count: int | None) -> Bools:
    within = axis.grade <= change
    return np.asarray(within if count is None else within & (axis.changed == count))


def _most(grades: Grades) -> int:
    return sum(int(axis.changed.max(initial=0)) for axis in grades.axes)


def _cut(space: Space, part: Product) -> Space:
    contexts, resistors, capacitors, low_passes = part[2:]
    return restricted(space, Masks(contexts, resistors, capacitors, low_passes))


def laid_out(space: Space, part: Product) -> tuple[Query, Ints, Ints] | None:
    """The query of one product, with its op-amps and photodiodes that pass alone; None without any."""
    cut = _cut(space, part)
    opamps = np.flatnonzero(part[0] & (cut.opamp_verdicts.alone == PASSES))
    diodes = np.flatnonzero(part[1] & (cut.diode_verdicts.alone == PASSES))
    return (query(cut), opamps, diodes) if opamps.size and diodes.size else None


def _asked(space: Space, part: Product, rules: Rules, but: Choice | None = None) -> Found:
    """The best pairs of one product, apart from the pairs of `but`."""
    ready = laid_out(space, part)
    if ready is None:
        return nothing(len(space.limits))
    asked, opamps, diodes = ready
    pairs = feed.pairs_of(asked.index, opamps, diodes, by=rules.by)
    if but is not None:
        known = np.isin(_number(space, pairs.opamp, pairs.diode), _number(space, but.opamp, but.diode))
        pairs = pairs.take(~known)
    return _hunted(asked, pairs, rules, part)


def _first(space: Space, part: Product) -> bool:
    """Whether anything in one product meets: the search ends with the first that does."""
    ready = laid_out(space, part)
    if ready is None:
        return False
    asked, opamps, diodes = ready
    pairs = feed.pairs_of(asked.index, opamps, diodes, by="cost")
    found = _hunted(asked, pairs, Rules("cost", 1, 0.0), part, enough=_has_one)
    return bool(found.choice.opamp.size)


def _meeting(space: Space, part: Product) -> Choice:
    """Some setting of every pair of one product that has one that meets."""
    ready = laid_out(space, part)
    if ready is None:
        return nothing(0).choice
    asked, opamps, diodes = ready
    pairs = feed.pairs_of(asked.index, opamps, diodes, by="cost")
    return _hunted(asked, pairs, Rules("cost", pairs.size, 0.0), part, enough=_any_will_do).choice


def _has_one(hunt: Hunt, _taken: int) -> bool:
    return hunt.incumbents.bar is not None


def _any_will_do(hunt: Hunt, _taken: int) -> bool:
    """Let no setting come before one that is found, so that each pair is done with its first."""
    hunt.incumbents.key[:] = -np.inf
    return False


def _never(_hunt: Hunt, _taken: int) -> bool:
    return False


def _hunted(asked: Query, pairs: feed.Pairs, rules: Rules, part: Product, *, enough: Watch = _never) -> Found:
    """What a hunt through `pairs` finds, by the indices of the whole space."""
    if not pairs.size:
        return nothing(len(asked.space.limits))
    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        found = gathered(feed.run(asked.index, asked.goals, rules, pairs=pairs, watch=enough))
    return replace(found, choice=in_whole(part, found.choice))


def in_whole(part: Product, choice: Choice) -> Choice:
    """A choice of one product by the indices of the whole space."""
    opamp, diode, *rest = choice.columns()
    whole = [np.flatnonzero(mask)[column] for mask, column in zip(part[2:], rest, strict=True)]
    return Choice(opamp, diode, *whole)


def _number(space: Space, opamp: Ints, diode: Ints) -> Ints:
    return opamp * space.diodes.price.size + diode


def _joined(parts: Sequence[Found]) -> Found:
    columns = [np.concatenate(column) for column in zip(*(p.choice.columns() for p in parts), strict=True)]
    return Found(
        choice=Choice(*columns),
        primary=np.concatenate([p.primary for p in parts]),
        cost=np.concatenate([p.cost for p in parts]),
        vector=np.concatenate([p.vector for p in parts]),
        margin_columns=np.concatenate([p.margin_columns for p in parts]),
        evaluated=sum(p.evaluated for p in parts),
    )


def _best(space: Space, parts: Sequence[Found], show: int) -> Found:
    """The best `show` pairs of several products, each with its best setting of all of them."""
    joined = _joined([nothing(len(space.limits)), *parts])
    choice, ranks = joined.choice, (joined.primary, joined.cost, joined.vector)
    pair = _number(space, choice.opamp, choice.diode)
    order = keys.order(np.column_stack([pair, keys.within_pair(space, choice, ranks)]))
    first = order[np.r_[True, np.diff(pair[order]) != 0][: order.size]]
    best = first[keys.order(keys.between_pairs(space, choice, ranks)[first])][:show]
    return replace(
        joined,
        choice=choice.take(best),
        primary=joined.primary[best],
        cost=joined.cost[best],
        vector=joined.vector[best],
        margin_columns=joined.margin_columns[best],
    )


def _furthest(space: Space, part: Product) -> tuple[int, str]:
    """The check that one product gets to, and the blank column where that is `missing`."""
    cut = _cut(space, part)
    opamps, diodes = (np.flatnonzero(mask) for mask in part[:2])
    opamp, diode = np.repeat(opamps, diodes.size), np.tile(diodes, opamps.size)
    # no pair gets further than each of its parts does alone
    ceiling = np.minimum(cut.opamp_verdicts.alone[opamp], cut.diode_verdicts.alone[diode])
    order = np.argsort(-ceiling, kind="stable")
    best, pair = -1, order[:1]
    for begin in range(0, order.size, _CHUNK):
        rows = order[begin : begin + _CHUNK]
        if ceiling[rows[0]] <= best:
            break
        reached = reach.furthest(cut, opamp[rows], diode[rows])
        if int(reached.max()) > best:
            best, pair = int(reached.max()), rows[[int(reached.argmax())]]
    return best, _blank(cut, int(opamp[pair[0]]), int(diode[pair[0]])) if best == _MISSING else ""


def _blank(space: Space, opamp: int, diode: int) -> str:
    """The first unknown column that keeps a pair at `missing`."""
    for own, other in (
        ((space.opamp_verdicts, opamp), (space.diode_verdicts, diode)),
        ((space.diode_verdicts, diode), (space.opamp_verdicts, opamp)),
    ):
        verdicts, row = own
        here = (verdicts.code[row] == _MISSING) & (other[0].code[other[1]] >= _MISSING)
        if here.any():
            return verdicts.columns[int(verdicts.blank[row][here].min())]
    return ""
