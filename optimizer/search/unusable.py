"""Families of passives that the request admits, yet that take no part because the catalog leaves a blank."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from optimizer.catalog import unit_price
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.request.types import Request
from optimizer.search.result import Unusable
from optimizer.search.values import admitted, corners, family_values
from optimizer.series import values as series_values
from optimizer.vocabulary import NAMES


def unusable(request: Request, catalogs: Catalogs) -> tuple[Unusable, ...]:
    """The admitted families that could offer a value that is asked for, were something not blank.

    Sorted: resistors first, each by name, then maker.
    """
    resistors = [_of(catalogs.resistors, row, blank) for row, blank in _resistors(request, catalogs)]
    capacitors = [_of(catalogs.capacitors, row, blank) for row, blank in _capacitors(request, catalogs)]
    by_name = sorted(capacitors, key=lambda one: (one.family, one.maker))
    return (*sorted(resistors, key=lambda one: (one.family, one.maker)), *by_name)


def _of(parts: Parts, row: int, blank: tuple[str, ...]) -> Unusable:
    name, maker = str(parts.text[NAMES[parts.role]][row]), str(parts.text["maker"][row])
    return Unusable(parts.role.removesuffix("s"), name, maker, blank)


def _resistors(request: Request, catalogs: Catalogs) -> Iterator[tuple[int, tuple[str, ...]]]:
    """Rows of resistor families with what is blank."""
    parts, divider = catalogs.resistors, request.space.divider
    spread: tuple[str, ...] = ()
    if corners(request):
        spread = ("tolerance", "tempco") if request.ambient.distance else ("tolerance",)
    levels: set[float] = set()
    if "divider" in request.space.references:
        levels = set(series_values(divider.series, divider.low, divider.high).tolist())
    for row in admitted(parts, request.space):
        blank = [*_offer_blanks(parts, row, request), *_blanks(parts, row, spread)]
        if blank and _may_offer(parts, row, request.space.resistance, levels):
            yield row, tuple(blank)


def _capacitors(request: Request, catalogs: Catalogs) -> Iterator[tuple[int, tuple[str, ...]]]:
    """Rows of capacitor families with what is blank; a bypass needs no tolerance."""
    parts = catalogs.capacitors
    bypass = {request.space.divider.bypass} if "divider" in request.space.references else set()
    for row in admitted(parts, request.space):
        blank = _offer_blanks(parts, row, request)
        spread = _blanks(parts, row, ("tolerance",)) if corners(request) else []
        if spread and _may_offer(parts, row, request.space.capacitance, set()):
            yield row, (*blank, *spread)
        elif blank and _may_offer(parts, row, request.space.capacitance, bypass):
            yield row, tuple(blank)


def _offer_blanks(parts: Parts, row: int, request: Request) -> list[str]:
    """The blank columns without which it is unknown what a family offers, and at what price."""
    price = unit_price((parts.points["price"][row],), request.quantity)
    priced = [] if np.isfinite(price[0]) else ["price"]
    series = str(parts.text["series"][row])
    if not series:
        return ["series", *priced]
    if series == "list":
        return [*([] if parts.points["values"][row] else ["values"]), *priced]
    return [*_blanks(parts, row, ("from", "to")), *priced]


def _blanks(parts: Parts, row: int, columns: tuple[str, ...]) -> list[str]:
    return [name for name in columns if not np.isfinite(parts.number[name][row])]


def _may_offer(parts: Parts, row: int, span: tuple[float, float], others: set[float]) -> bool:
    """Whether family `row` offers a value inside `span` or one of `others`; maybe, where that is unknown."""
    known = family_values(parts, row)
    inside = (known >= span[0]) & (known <= span[1])
    return not known.size or bool(inside.any()) or not others.isdisjoint(known.tolist())
