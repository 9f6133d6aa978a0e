"""Reads one cell of each kind of column into SI; what cannot be read raises QuantityError."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache

from optimizer.catalog.checks import refuse_unordered
from optimizer.catalog.parts import Points
from optimizer.catalog.ranges import read_range_end
from optimizer.catalog.source_map import tidy
from optimizer.errors import did_you_mean
from optimizer.quantities import QuantityError, read_price, read_quantity
from optimizer.series import SERIES
from optimizer.vocabulary import Column
from optimizer.vocabulary.allowed import NO_EFFECT, STATUSES, refuse_impossible

Price = tuple[Points, tuple[str, str] | None]
UNKNOWN = frozenset({"", "-", "N/A", "n/a"})
# fmt: off
_LIKE_UNKNOWN = frozenset({
    "na", "n.a.", "nan", "null", "none", "nil", "tbd", "tba", "?", "--", "---", "–", "—", "unknown",
    "#n/a", "#value!", "#ref!",
})
# fmt: on
_BLANK_REMEDY = "where the value is unknown leave the cell blank, or write '-' or 'N/A'"


@dataclass(frozen=True, slots=True)
class Style:
    """How one file writes the cells of one column: decimal sign, unit of bare numbers, which end of
    a range ('low', 'high'; '' for no range), and the supplier's words for a status.
    """

    decimal_comma: bool = False
    unit: str | None = None
    part: str = ""
    status: Mapping[str, str] = field(default_factory=dict)


def number_reader(column: Column, style: Style) -> Callable[[str], float]:
    """Return the reader of a column of single quantities; unknown cells read as NaN."""

    name, kind, comma, unit = column.name, column.kind, style.decimal_comma, style.unit

    def read(cell: str) -> float:
        if cell in UNKNOWN:
            return math.nan
        if cell == "none" and column.none_allowed:
            return NO_EFFECT[name]
        if style.part:
            value = read_range_end(cell, kind, style.part, decimal_comma=comma, unit=unit)
        else:
            try:
                value = read_quantity(cell, kind, decimal_comma=comma, unit=unit)
            except QuantityError as error:
                raise _explained(error, cell, column.none_allowed) from None
        if value <= 0:  # what cannot be is never above zero; half a million cells pass here
            refuse_impossible(name, value)
        return value

    return read


def points_reader(column: Column, style: Style) -> Callable[[str], Points]:
    """Return the reader of a column of pairs ('points:X:Y') or of a list ('list:X'); unknown: ()."""
    what, *kinds = column.kind.split(":")

    def read(cell: str) -> Points:
        if cell in UNKNOWN:
            return ()
        if what == "list":
            return _list(column.name, cell, kinds[0], style)
        return _pairs(column.name, cell, (kinds[0], kinds[1]), style)

    return read


def price_reader(style: Style) -> Callable[[str], Price]:
    """Return the reader of a price cell: its breaks, and (currency code, text) where it names one."""

    def read(cell: str) -> Price:
        if cell in UNKNOWN:
            return (), None
        entries = [_price_break(piece, style) for piece in _pieces(cell)]
        if len(entries) > 1 and ":" not in _pieces(cell)[0]:
            raise QuantityError("expected one price, or breaks such as '1:1.85; 100:1.21'")
        points = tuple((quantity, price) for quantity, price, _ in entries)
        refuse_unordered("price", points)
        marks = {mark[0]: mark for _, _, mark in entries if mark}
        if len(marks) > 1:
            raise QuantityError("two currencies in one price")
        return points, next(iter(marks.values()), None)

    return read


def status_reader(style: Style) -> Callable[[str], str]:
    """Return the reader of a status, in the supplier's own words or the contract's; unknown: ''."""
    known = {status: status for status in STATUSES} | dict(style.status)

    def read(cell: str) -> str:
        if cell in known:
            return known[cell]
        if cell in UNKNOWN:
            return ""
        plain = cell.casefold().replace(" ", "-").replace("_", "-")
        if plain in STATUSES:
            return plain
        remedy = did_you_mean(plain, STATUSES) or f'in source.toml: status = {{ "{cell[:40]}" = "active" }}'
        raise QuantityError("expected a status: " + ", ".join(STATUSES), remedy)

    return read


def read_series(cell: str) -> str:
    """Return the name of an IEC 60063 series, or 'list'; unknown: ''."""
    if cell in UNKNOWN:
        return ""
    plain = "".join(cell.split())
    for name in (plain.upper(), plain.lower()):
        if name in SERIES or name == "list":
            return name
    names = [*SERIES, "list"]
    raise QuantityError("expected one of " + ", ".join(names), did_you_mean(plain, names))


def read_text(cell: str) -> str:
    """Return the text; unknown: ''."""
    return "" if cell in UNKNOWN else cell


def _explained(error: QuantityError, cell: str, none_allowed: bool) -> QuantityError:
    """Return the error with how to write an unknown value, where the cell seems to mean that."""
    if cell.casefold() not in _LIKE_UNKNOWN:
        return error
    remedy = _BLANK_REMEDY + ("; 'none', in small letters, states no such effect" if none_allowed else "")
    return QuantityError(str(error), remedy)


def _quantity(cell: str, kind: str, style: Style) -> float:
    try:
        return read_quantity(cell, kind, decimal_comma=style.decimal_comma, unit=style.unit)
    except QuantityError as error:
        raise _explained(error, cell, none_allowed=False) from None


@lru_cache(maxsize=1024)
def _pieces_bought(text: str) -> float:
    """Return the quantity that a price break begins at; a catalog has few different ones."""
    quantity = read_quantity(text, "count")
    if quantity < 1:
        raise QuantityError("a price break begins at 1 piece or more")
    return quantity


def _pieces(cell: str) -> list[str]:
    """Cut at semicolons; one behind the last piece is passed over."""
    return [piece.strip() for piece in cell.removesuffix(";").split(";")]


def _list(column: str, cell: str, kind: str, style: Style) -> Points:
    values = {_quantity(piece, kind, style) for piece in _pieces(cell)}
    for value in values:
        refuse_impossible(column, value)
    return tuple((value, 0.0) for value in sorted(values))


def _pairs(column: str, cell: str, kinds: tuple[str, str], style: Style) -> Points:
    pieces = _pieces(cell)
    if column == "capacitance" and len(pieces) == 1 and ":" not in cell:
        pieces = [f"0:{cell}"]
    points = tuple(_pair(column, piece, kinds, style) for piece in pieces)
    refuse_unordered(column, points)
    return points


def _pair(column: str, piece: str, kinds: tuple[str, str], style: Style) -> tuple[float, float]:
    left, colon, right = piece.partition(":")
    if not colon or ":" in right:
        raise QuantityError("expected pairs written 'x:y; x:y', x rising")
    x = _quantity(left.strip(), kinds[0], Style(style.decimal_comma))
    y = _quantity(right.strip(), kinds[1], style)
    if x < 0 or (x == 0 and kinds[0] == "length"):
        raise QuantityError(
            "the first of a pair is too low: a wavelength is above zero, a reverse bias not negative"
        )
    refuse_impossible(column, y)
    return x, y


def _price_break(piece: str, style: Style) -> tuple[float, float, tuple[str, str] | None]:
    """Return quantity, unit price, and (currency code, text) where the piece names one."""
    left, colon, right = piece.rpartition(":")
    quantity = _pieces_bought(left.strip()) if colon else 1.0
    price, code = read_price(right.strip(), decimal_comma=style.decimal_comma)
    if price <= 0:
        refuse_impossible("price", price)
    return quantity, price, (code, tidy(right)) if code else None
