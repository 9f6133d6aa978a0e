"""What every part costs each kind of channel at the prices of a bound: in the pools and beyond them.

The bound of `board.bound` gives prices to what the pools use. Here everything else gets a price too, so low
that the bound stays one: a part that no option of the pools takes asks its least cost a piece; a new use of
one that they take asks the most that keeps what it loses in all. At these prices a search over a whole
request finds what its cheapest candidate costs, so that

    cost of any plan  >=  sum over kinds of (count x cheapest)  +  what the supplies lose  -  allowance

and a candidate that costs its kind more than the cheapest, by over the gap to the best plan, is in no better
one. A divider pays as a new use, and so does a buffer; of a level that could be shared each copy on the
board is asked an equal share.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.board.bound import Layout, allowance
from optimizer.board.problem import Board, Family
from optimizer.board.supplies import PLAIN, Weights, family_table, part_table
from optimizer.planning.columns import Assembled, Field, costs_of
from optimizer.planning.kinds import NONE
from optimizer.planning.reach import Reach
from optimizer.search.query import Query
from optimizer.search.view import lay_out

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

EASED = 1e-6
"""Cents by which a new use asks less than it might: rounding must not lift the bound."""


UNUSABLE = 1e12
"""Cents for a part that the board may not use."""


@dataclass(frozen=True, slots=True)
class Tariff:
    """Prices in cents a build. By kind (row) and part of the shelf: `parts`; by kind and group: `amplifiers`.

    `divider` by part, `buffer` by group: what new uses cost; `current`: a price on each ampere besides the
    packages. `lost`: what the supplies lose, the worth of the limits taken off.
    """

    parts: Floats
    amplifiers: Floats
    divider: Floats
    buffer: Floats
    current: float
    lost: float


@dataclass(frozen=True, slots=True)
class Known:
    """Prices of a bound over pools: of the assembled board, as laid out, with their weights."""

    made: Assembled
    seen: Layout
    prices: Floats


class Universe:
    """The costs of every part and group by number, under some weights on the limits.

    `reach`: by kind, what a better plan may use at all; what few copies can use is shared by few.
    """

    def __init__(self, field: Field, reach: Sequence[Reach], weights: Weights = PLAIN) -> None:
        self.field, self.reach, self.weights = field, tuple(reach), weights
        amplifiers, outline = field.amplifiers, field.outline
        families = tuple(map(Family, amplifiers.names, amplifiers.packages))
        line_item, placement = costs_of(outline)
        self.board = Board(
            boards=outline.quantity,
            parts=field.shelf.entries(),
            families=families,
            references=(),
            channels=(),
            line_item=line_item,
            placement=placement,
        )
        self.own = np.array([reach.own for reach in self.reach]).T * self._counts()
        self.divider = np.array([reach.divider for reach in self.reach]).T @ self._counts()
        self.receiver = np.array([reach.groups for reach in self.reach]).T * self._counts()
        self.buffer = np.array([reach.buffers for reach in self.reach]).T @ self._counts()
        self.known: dict[object, Floats] = {}

    def _counts(self) -> Ints:
        return np.array([kind.count for kind in self.field.kinds], dtype=np.int64)

    def table(self, part: int) -> Floats:
        """The cost of at least 0, 1, ... pieces of a part; one table for all values of a family."""
        entry, most = self.board.parts[part], int(self.own[part].sum() + self.divider[part])
        alike = (entry.breaks, entry.stock, entry.area, entry.amplifiers, entry.current, most)
        if alike not in self.known:
            self.known[alike] = _monotone(part_table(self.board, part, most, self.weights))
        return self.known[alike]

    def group_table(self, group: int) -> Floats:
        """The cost of at least 0, 1, ... amplifiers of a group."""
        most = int(self.receiver[group].sum() + self.buffer[group])
        return _monotone(family_table(self.board, group, most, self.weights))

    def first(self) -> Tariff:
        """Every part at its least cost a piece: nothing is lost."""
        parts = np.array([self._first(part) for part in range(len(self.board.parts))])
        groups = np.array([_least(self.group_table(g)) for g in range(len(self.board.families))])
        kinds = len(self.field.kinds)
        return Tariff(
            np.tile(parts, (kinds, 1)), np.tile(groups, (kinds, 1)), parts, groups, self.weights.current, 0.0
        )

    def _first(self, part: int) -> float:
        """The least cost a piece; far too dear without an area where the board's is limited."""
        limited = self.field.outline.limits.area is not None
        if limited and self.board.parts[part].area is None:
            return UNUSABLE
        return _least(self.table(part))

    def tariff(self, known: Known) -> Tariff:
        """The prices of `known`, and what else there is at prices that keep its bound."""
        given = self.first()
        lost = -allowance(known.made.board, self.weights)
        for supply, offers in _offers(known.seen, known.prices).items():
            family = supply - len(known.made.parts)
            place = known.made.parts[supply] if family < 0 else known.made.groups[family]
            if family < 0:
                sold = _Supply(self.table(place), offers, self.own[place], int(self.divider[place]))
                own, new = given.parts, given.divider
            else:
                sold = _Supply(self.group_table(place), offers, self.receiver[place], int(self.buffer[place]))
                own, new = given.amplifiers, given.buffer
            own[:, place] = sold.own
            new[place] = sold.asked
            lost += sold.lost
        return replace(given, lost=lost)


class _Supply:
    """One supply that the pools use: its prices by kind, what a new use is asked, what it loses (<= 0)."""

    def __init__(self, costs: Floats, offers: Sequence[tuple[int, float]], able: Ints, others: int) -> None:
        paying = [(kind, price) for kind, price in offers if able[kind]]
        takings = np.r_[0.0, np.cumsum(sorted((price for _, price in paying), reverse=True))]
        number = np.arange(min(takings.size, costs.size))
        self.lost = float((costs[number] - takings[number]).min())
        known = {kind for kind, _ in paying}
        more = others + sum(int(n) for kind, n in enumerate(able) if kind not in known)
        least = np.inf
        for n in number:
            gap = costs[n + 1 : n + 1 + more] - takings[n] - self.lost
            least = min(least, float((gap / np.arange(1, gap.size + 1)).min(initial=np.inf)))
        self.asked = max(0.0, least - EASED) if np.isfinite(least) else 0.0
        self.own = np.full(able.size, self.asked)
        for kind, price in paying:
            self.own[kind] = price


def _monotone(costs: Floats) -> Floats:
    return np.asarray(np.minimum.accumulate(costs[::-1])[::-1])


def _least(costs: Floats) -> float:
    """The least cost a piece; a part that cannot be had at all costs nothing, and is not used."""
    each = (costs[1:] / np.arange(1, costs.size)).min(initial=np.inf)
    return float(each) if np.isfinite(each) else 0.0


def _offers(seen: Layout, prices: Floats) -> dict[int, list[tuple[int, float]]]:
    """By supply, what each unit of each kind would pay: (kind, price)."""
    kinds = {place: key[1] for key, place in seen.keys.items() if key[0] == 0}
    offers: dict[int, list[tuple[int, float]]] = {}
    for group in seen.groups:
        for supply, units in zip(group.supplies.tolist(), group.units.tolist(), strict=True):
            offers[supply] = [(kinds[unit], float(prices[unit])) for unit in units if unit in kinds]
    return offers


def priced(asked: Query, field: Field, kind: int, tariff: Tariff) -> Query:
    """`asked` of a kind with the prices of `tariff` in place of its own."""
    space, of = asked.space, field.kinds[kind]
    parts, contexts = tariff.parts[kind], space.contexts
    group = field.amplifiers.group[kind]
    # an op-amp of no group, -1, takes the last price
    amplifier = np.append(tariff.amplifiers[kind], UNUSABLE)[group]
    buffer = np.append(tariff.buffer, UNUSABLE)[group] / field.copies
    pieces = np.where(of.divider != NONE, tariff.divider[of.divider], 0.0)
    # two resistors of one value are counted as one: more of a part never costs less
    pieces[:, 1] *= of.divider[:, 0] != of.divider[:, 1]
    divider = pieces.sum(axis=1)
    divider = divider + tariff.current * contexts.current
    space = replace(
        space,
        diodes=replace(space.diodes, price=parts[of.diode_part]),
        opamps=replace(space.opamps, single=amplifier, double=amplifier + buffer),
        resistors=replace(space.resistors, price=parts[of.resistor_part]),
        capacitors=replace(
            space.capacitors, price=np.where(of.capacitor_part == NONE, 0.0, parts[of.capacitor_part])
        ),
        contexts=replace(contexts, cost=np.where(contexts.buffered, divider / field.copies, divider)),
    )
    return Query(space, lay_out(space))
