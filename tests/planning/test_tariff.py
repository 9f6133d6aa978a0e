"""Prices for all that the pools do not hold: at them no plan there is pays more than it costs."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from itertools import combinations_with_replacement, product
from math import comb

import numpy as np
import pytest

from optimizer.board.bound import Pace, climb, layout
from optimizer.board.problem import Board
from optimizer.board.supplies import PLAIN
from optimizer.planning.amplifiers import amplifiers_of
from optimizer.planning.columns import Field, Key, Pool, assembled, without_limits
from optimizer.planning.fit import usable
from optimizer.planning.kinds import asked_of, kinds_of
from optimizer.planning.reach import everything
from optimizer.planning.shelf import Shelf
from optimizer.planning.tariff import Known, Tariff, Universe, priced
from optimizer.search.collect import collect
from optimizer.search.query import Query
from tests.board import brute
from tests.planning.brute import Brute
from tests.planning.test_rules import SHARED, amplifier, asked
from tests.planning.tiny import drawn, outline_of
from tests.search.made import capacitor, catalogs, diode, listed, resistor

PACE = Pace(200, 20, 0.75)
SEEDS = tuple(range(1000, 1060))
MOST = 3000
"""Plans of a board, packages aside, that are tried; larger boards are left out."""


@dataclass(frozen=True)
class Whole:
    """A board with everything that meets in its pools."""

    field: Field
    asked: tuple[Query, ...]
    pools: tuple[Pool, ...]

    @property
    def plans(self) -> int:
        """In how many ways the copies can be built."""
        return int(np.prod([comb(len(p.held) + p.kind.count - 1, p.kind.count) for p in self.pools]))


@cache
def whole(seed: int) -> Whole | None:
    """The board of a seed; None where something is hopeless, or all plans are too many."""
    outline, shelf = drawn(seed), Shelf()
    kinds = kinds_of(outline, shelf)
    field = Field(outline, kinds, shelf, amplifiers_of(kinds, shelf, ("supply_current", "area")))
    queries = [one for one in map(asked_of, kinds) if one is not None]
    if len(queries) < len(kinds) or not all(rows.size for rows in field.amplifiers.rows):
        return None
    pools = []
    for i, query in enumerate(queries):
        _, diodes = query.eligible
        rows = field.amplifiers.rows[i]
        pairs = np.repeat(rows, diodes.size), np.tile(diodes, rows.size)
        found = collect(query, pairs, np.inf, 10**9)
        pools.append(Pool(kinds[i], field.amplifiers.group[i]))
        fit = usable(field, i, found.choice)
        pools[-1].add(found.choice.take(fit), found.margin[fit])
    made = Whole(field, tuple(queries), tuple(pools))
    return made if 0 < made.plans <= MOST else None


def thinned(pools: tuple[Pool, ...], rng: np.random.Generator) -> list[Pool]:
    """A few candidates of each pool."""
    few = []
    for pool in pools:
        keys = sorted(pool.held)
        size = min(len(keys), int(rng.integers(1, 4)))
        kept = [keys[k] for k in rng.choice(len(keys), size, replace=False)]
        few.append(Pool(pool.kind, pool.group, {key: pool.held[key] for key in kept}))
    return few


def paying(made: Whole, tariff: Tariff) -> list[dict[Key, float]]:
    """By kind, what each candidate costs one copy at the prices of `tariff`."""
    found = []
    for i, query in enumerate(made.asked):
        pool = made.pools[i]
        keys = sorted(pool.held)
        space = priced(query, made.field, i, tariff).space
        opamp, diode, context, resistor, capacitor, _ = pool.choice(keys).columns()
        buffered = space.contexts.buffered[context]
        cost = np.where(buffered, space.opamps.double[opamp], space.opamps.single[opamp])
        cost = cost + space.diodes.price[diode] + space.contexts.cost[context]
        cost = cost + space.resistors.price[resistor] + space.capacitors.price[capacitor]
        found.append(dict(zip(keys, cost.tolist(), strict=True)))
    return found


def plans(
    made: Whole, board: Board, keys: tuple[tuple[Key, ...], ...]
) -> Iterator[tuple[list[list[Key]], int]]:
    """Every plan, as the keys of all copies by kind, with the least that it costs."""
    each = [
        combinations_with_replacement(range(len(own)), pool.kind.count)
        for own, pool in zip(keys, made.pools, strict=True)
    ]
    for chosen in product(*each):
        taken = [board.channels[i].options[j] for i, js in enumerate(chosen) for j in js]
        cost = min((tried.cost for tried in brute.bought(board, taken)), default=None)
        if cost is not None:
            yield [[keys[i][j] for j in js] for i, js in enumerate(chosen)], cost


TRIED: Counter[str] = Counter()


@pytest.mark.parametrize("part", range(5))
def test_no_plan_pays_more_than_it_costs(part: int) -> None:
    for seed in SEEDS[part::5]:
        made = whole(seed)
        if made is None:
            continue
        rng = np.random.default_rng(seed)
        full = without_limits(assembled(made.field, made.pools))
        every = list(plans(made, full.board, full.keys))
        pairs = [
            np.ones((q.space.opamps.gbw.size, q.space.diodes.price.size), dtype=bool) for q in made.asked
        ]
        reach = [everything(made.field, i, one) for i, one in enumerate(pairs)]
        universe = Universe(made.field, reach)
        for _ in range(4):
            known = without_limits(assembled(made.field, thinned(made.pools, rng)))
            seen = layout(known.board, PLAIN)
            best = climb(seen, float(every[0][1]), PACE).prices
            prices = best * rng.choice([0.0, 0.5, 1.0, 1.0, 1.3], best.size)
            for tariff in (universe.tariff(Known(known, seen, p)) for p in (best, prices)):
                costs = paying(made, tariff)
                for taken, cost in every:
                    paid = sum(costs[i][key] for i, own in enumerate(taken) for key in own) + tariff.lost
                    assert paid <= cost + 1e-6, (seed, taken, cost)
                    TRIED["near"] += paid > 0.8 * cost
                TRIED["tariffs"] += 1


def test_the_prices_are_worth_testing() -> None:
    assert TRIED["tariffs"] >= 100, TRIED
    assert TRIED["near"] >= 1000, TRIED


def test_copies_on_one_level_pay_its_divider_once_between_them() -> None:
    """The bypass is all that is dear, and three copies share it: prices are tight here."""
    held = catalogs(
        [amplifier("YZA-1", 0.01)],
        [diode(price=[(1.0, 0.01)], board_area=1e-6)],
        [resistor(price=[(1.0, 0.01)], **listed(10e3, 220e3))],
        [
            capacitor(price=[(1.0, 0.01)], **listed(2.2e-12)),
            capacitor(family="YZC-2", price=[(1.0, 9.0)], **listed(100e-9)),
        ],
    )
    outline = outline_of([("one", 3, asked(space=SHARED), held)])
    shelf = Shelf()
    kinds = kinds_of(outline, shelf)
    field = Field(outline, kinds, shelf, amplifiers_of(kinds, shelf))
    query = asked_of(kinds[0])
    assert query is not None
    pairs = np.ones((1, 1), dtype=bool)
    tariff = Universe(field, [everything(field, 0, pairs)]).first()
    one = np.zeros(1, dtype=np.int64)
    found = collect(priced(query, field, 0, tariff), (one, one), np.inf, 10**6)
    whole_board = Brute(outline).cost
    assert whole_board is not None
    assert 0.95 * whole_board <= 3 * found.cost.min() <= whole_board
