"""Dividers whose parts come from other families than the cheapest of all.

A shortlist buys a divider's resistors and bypass from the cheapest families that offer them. On a board
they are placed already: what is not withdrawn stays, and what must fit comes from families that fit.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.search import values
from optimizer.search.change.positions import Board, Plan, board_of, fits
from optimizer.search.locate import referred
from optimizer.search.space import Space

Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Shops:
    """Families (masks over catalog rows) that divider resistors and bypass are bought from.

    Of the first mask with a family that offers what is wanted, the cheapest family is taken.
    """

    resistors: Sequence[Bools]
    capacitors: Sequence[Bools]


def recorded(space: Space, catalogs: Catalogs, candidate: Mapping[str, Any]) -> Space:
    """`space` with the divider of a record's `candidate` from the families that the record names."""
    board = board_of(space, catalogs, candidate)
    resistors = [_own(catalogs.resistors, board, "divider"), np.ones(catalogs.resistors.size, dtype=bool)]
    capacitors = [_own(catalogs.capacitors, board, "bypass"), np.ones(catalogs.capacitors.size, dtype=bool)]
    return bought(space, catalogs, Shops(resistors, capacitors), _level(space, board))


def left(space: Space, catalogs: Catalogs, plan: Plan) -> Space:
    """`space` with every divider from the cheapest families that are not out; what can stay stays."""
    had, stays = _had(catalogs, plan), _stays(space, plan)
    space = bought(space, catalogs, Shops(had.resistors, had.capacitors), stays)
    return bought(space, catalogs, Shops(had.resistors[1:], had.capacitors), space.contexts.divided & ~stays)


def fitting(space: Space, catalogs: Catalogs, plan: Plan) -> Space:
    """`space` as `left` makes it, but what is bought anew comes from families that fit the board."""
    if "divider" not in plan.board.parts:
        return left(space, catalogs, plan)
    return _refitted(space, catalogs, plan, _fitting(catalogs, plan))


def from_family(space: Space, catalogs: Catalogs, plan: Plan, use: str, row: int) -> Space:
    """`space` as `fitting` makes it, but what is bought anew for `use` (divider, bypass) from one family."""
    fit, parts = _fitting(catalogs, plan), catalogs.resistors if use == "divider" else catalogs.capacitors
    only = [np.arange(parts.size) == row]
    shops = replace(fit, resistors=only) if use == "divider" else replace(fit, capacitors=only)
    return _refitted(space, catalogs, plan, shops)


def _fitting(catalogs: Catalogs, plan: Plan) -> Shops:
    """Where the parts of a divider come from that must fit the board; a bypass that can stay stays."""
    had = _had(catalogs, plan)
    resistors = [had.resistors[1] & _fit(catalogs.resistors, plan, "divider")]
    if "bypass" not in plan.withdrawn:
        return Shops(resistors, had.capacitors)
    return Shops(resistors, [had.capacitors[1] & _fit(catalogs.capacitors, plan, "bypass")])


def _refitted(space: Space, catalogs: Catalogs, plan: Plan, shops: Shops) -> Space:
    had, stays = _had(catalogs, plan), _stays(space, plan)
    space = bought(space, catalogs, Shops(had.resistors, shops.capacitors), stays)
    return bought(space, catalogs, shops, space.contexts.divided & ~stays)


def bought(space: Space, catalogs: Catalogs, shops: Shops, contexts: Bools) -> Space:
    """`space` with the dividers of `contexts` bought from `shops`; cost NaN where none offers one."""
    request, x = space.request, space.contexts
    rows = np.flatnonzero(contexts)
    if not rows.size:
        return space
    pieces = values.divider_offers(catalogs.resistors, request)
    bypasses = values.offers(catalogs.capacitors, request)
    bypass_price, bypass = _first(bypasses, shops.capacitors, {request.space.divider.bypass})
    ends = [(float(x.top[row]), float(x.bottom[row])) for row in rows]
    taken = {pair: _first(pieces, shops.resistors, set(pair)) for pair in set(ends)}
    cost, spread = x.cost.copy(), x.spread.copy()
    resistors, bypassed = x.resistors.copy(), x.bypass.copy()
    cost[rows] = [2.0 * taken[pair][0] + bypass_price for pair in ends]
    resistors[rows] = [taken[pair][1] for pair in ends]
    bypassed[rows] = bypass
    spread[rows] = np.r_[values.spreads(catalogs.resistors, request), np.nan][resistors[rows]]
    contexts_now = replace(x, cost=cost, resistors=resistors, bypass=bypassed, spread=spread)
    return replace(space, contexts=contexts_now)


def _first(offers: Sequence[values.Offer], masks: Sequence[Bools], wanted: set[float]) -> tuple[float, int]:
    for mask in masks:
        price, row = values.cheapest_offer([offer for offer in offers if mask[offer[1]]], wanted)
        if row >= 0:
            break
    return price, row


def _had(catalogs: Catalogs, plan: Plan) -> Shops:
    """The board's own families where they can be had, then all that can."""
    resistors, capacitors = ~plan.out.resistors, ~plan.out.capacitors
    return Shops(
        [resistors & _own(catalogs.resistors, plan.board, "divider"), resistors],
        [capacitors & _own(catalogs.capacitors, plan.board, "bypass"), capacitors],
    )


def _stays(space: Space, plan: Plan) -> Bools:
    """The contexts whose divider resistors are on the board, and not withdrawn."""
    return _level(space, plan.board) & ("divider" not in plan.withdrawn)


def _level(space: Space, board: Board) -> Bools:
    return referred(space, board.candidate["reference"]) & space.contexts.divided


def _own(parts: Parts, board: Board, use: str) -> Bools:
    old = board.parts.get(use)
    return np.zeros(parts.size, dtype=bool) if old is None else old.rows(parts, "family")


def _fit(parts: Parts, plan: Plan, use: str) -> Bools:
    return fits(parts, np.arange(parts.size), plan.board.parts.get(use))
