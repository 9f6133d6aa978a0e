"""Readers of values that only a board file states: money in the catalogs' currency, its area, seconds."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import Any

from optimizer.quantities import KINDS, QuantityError, read_price
from optimizer.request.values import MOST, quantity
from optimizer.toml.schema import Fault, Reader, Refused, as_written

LARGEST_BOARD = 1.0  # m2; a bare number above it was meant in mm2
_LONG_TIME = re.compile(
    r"\s*([0-9]{1,9}(?:\.[0-9]{0,9})?)\s*(min|mins|minutes?|m|h|hr|hrs|hours?)\s*"
).fullmatch
_AREA = quantity("area", above=0.0)
_TIME = quantity("time", above=0.0)
_TIME_EXAMPLE = "60 s"


def amount(*, zero: bool) -> Reader:
    """Return a reader of an amount of money without a currency: above 0, or 0 too where `zero` holds."""

    def read(value: Any) -> float:
        found, code = _money(value)
        if found < 0 or (found == 0 and not zero):
            raise Refused(Fault(as_written(value), f"expected {'at least' if zero else 'more than'} 0"))
        if found > MOST:
            raise Refused(Fault(as_written(value), f"expected at most {MOST}"))
        if code is not None:
            rule = "expected an amount without a currency: it is that of the catalogs"
            raise Refused(Fault(as_written(value), rule, f"write {found:.12g}"))
        return found

    return read


def _money(value: Any) -> tuple[float, str | None]:
    try:
        return read_price(value)
    except QuantityError as error:
        raise Refused(Fault(as_written(value), str(error), error.remedy)) from None


def area(value: Any) -> float:
    """Return an area above 0 [m2]; a bare number above 1 is refused, as mm2 were meant."""
    found = float(_AREA(value))
    if not isinstance(value, str) and found > LARGEST_BOARD:
        rule = "an area without a unit is in m2, and this is far too large"
        raise Refused(Fault(as_written(value), rule, f"write '{value:.12g} mm2'"))
    return found


def seconds(value: Any) -> float:
    """Return a time above 0 [s]; a bare number is seconds, minutes and hours are refused with the seconds."""
    long = _LONG_TIME(value) if isinstance(value, str) else None
    if long is not None:
        each = 3600 if long[2].startswith("h") else 60
        rule = f"expected a time in seconds such as '{_TIME_EXAMPLE}'"
        raise Refused(Fault(as_written(value), rule, f"write '{float(long[1]) * each:.12g} s'"))
    try:
        return float(_TIME(value))
    except Refused as refused:
        raise Refused(*map(_of_a_minute, refused.faults)) from None


def _of_a_minute(fault: Fault) -> Fault:
    """The fault with an example of the length that a board takes."""
    return replace(fault, rule=fault.rule.replace(KINDS["time"].example, _TIME_EXAMPLE))
