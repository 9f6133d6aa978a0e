"""Readers of single values: each takes what TOML gave and returns the value in SI, or refuses it."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

from optimizer.errors import did_you_mean
from optimizer.quantities import KINDS, QuantityError, read_price, read_quantity, show
from optimizer.quantities.currencies import CURRENCIES, currency_code
from optimizer.toml.schema import Fault, Reader, Refused, as_written

CATALOG_CURRENCY = "catalog currency"
MOST = 10**12  # whole numbers above it are slips, and floats still hold them exactly


@dataclass(frozen=True, slots=True)
class Money:
    """An amount of money, and the ISO 4217 code that was written with it (None: none was)."""

    amount: float
    code: str | None


@dataclass(frozen=True, slots=True)
class Level:
    """A level of light: `kind` is power, irradiance, or '' for a bare 0, which is both."""

    value: float
    kind: str


def quantity(
    kind: str,
    *,
    above: float | None = None,
    least: float | None = None,
    below: float | None = None,
    most: float | None = None,
) -> Reader:
    """Return a reader of one quantity of `kind`, within the bounds that are given, in SI."""

    def read(value: Any) -> float:
        found = _number(value, kind)
        bounds = (
            (above is None or found > above, "more than", above),
            (least is None or found >= least, "at least", least),
            (below is None or found < below, "less than", below),
            (most is None or found <= most, "at most", most),
        )
        for holds, words, bound in bounds:
            if not holds:
                raise Refused(Fault(as_written(value), f"expected {words} {show(bound, kind, 6)}"))
        return found

    return read


def _number(value: Any, kind: str) -> float:
    """Return any value as a quantity of `kind` in SI."""
    try:
        return read_quantity(value, kind)
    except QuantityError as error:
        raise Refused(Fault(as_written(value), str(error), error.remedy)) from None


def whole(least: int, most: int = MOST) -> Reader:
    """Return a reader of one whole number from `least` to `most`."""
    number = quantity("count", least=least, most=most)
    return lambda value: int(number(value))


def share(value: Any) -> float:
    """Return a fraction above 0 and up to 1; a bare number above 1 is no slip of a percent sign here."""
    kind = "ratio" if _reads(value, "ratio") else "fraction"
    return float(quantity(kind, above=0.0, most=1.0)(value))


def price(value: Any) -> Money:
    """Return a price above 0, with the currency where it is written with one."""
    try:
        amount, code = read_price(value)
    except QuantityError as error:
        raise Refused(Fault(as_written(value), str(error), error.remedy)) from None
    if amount <= 0:
        raise Refused(Fault(as_written(value), "expected more than 0"))
    return Money(amount, code)


def light(*, above_zero: bool) -> Reader:
    """Return a reader of a level of light, in power or irradiance; a bare number is power."""
    bounds = {"above": 0.0} if above_zero else {"least": 0.0}

    def read(value: Any) -> Level:
        if not isinstance(value, str) and value == 0 and not isinstance(value, bool):
            return Level(quantity("power", **bounds)(value), "")
        for kind in ("power", "irradiance"):
            if _reads(value, kind):
                return Level(quantity(kind, **bounds)(value), kind)
        rule = f"expected a power such as {KINDS['power'].example!r} or an irradiance such as '0.4 uW/cm2'"
        raise Refused(Fault(as_written(value), rule))

    return read


def _reads(value: Any, kind: str) -> bool:
    try:
        _number(value, kind)
    except Refused:
        return False
    return True


def either(word: str, result: Any, reader: Reader) -> Reader:
    """Return a reader that takes `word` for `result`, and all else as `reader` does."""

    def read(value: Any) -> Any:
        if isinstance(value, str) and value.strip().lower() == word:
            return result
        try:
            return reader(value)
        except Refused as refused:
            raise Refused(*(_or(word, fault) for fault in refused.faults)) from None

    return read


def _or(word: str, fault: Fault) -> Fault:
    return Fault(fault.cell, f"{fault.rule}, or {word!r}", fault.remedy, fault.item)


def text(value: Any) -> str:
    """Return one line of text."""
    if not isinstance(value, str) or not value.strip() or not value.isprintable():
        raise Refused(Fault(as_written(value), "expected one line of text in quotes"))
    return value.strip()


def flag(value: Any) -> bool:
    """Return true or false."""
    if not isinstance(value, bool):
        raise Refused(Fault(as_written(value), "expected true or false, without quotes"))
    return value


def currency(value: Any) -> str:
    """Return an ISO 4217 code, or the words that stand for the catalogs' own currency."""
    if value == CATALOG_CURRENCY or (isinstance(value, str) and value in CURRENCIES):
        return str(value)
    code = currency_code(value) if isinstance(value, str) else None
    remedy = f"write {code!r}" if code else ""
    raise Refused(Fault(as_written(value), "expected an ISO 4217 code such as 'EUR'", remedy))


def word(known: Sequence[str]) -> Reader:
    """Return a reader of one of the known words."""

    def read(value: Any) -> str:
        if isinstance(value, str) and value in known:
            return value
        remedy = did_you_mean(value, known) if isinstance(value, str) else ""
        raise Refused(Fault(as_written(value), "expected " + listed(known), remedy))

    return read


def listed(words: Sequence[str]) -> str:
    """Return words as 'one', 'one or two', 'one, two or three'."""
    *most, last = map(repr, words)
    return f"{', '.join(most)} or {last}" if most else last


def many(reader: Reader, *, least: int = 0) -> Reader:
    """Return a reader of a list, each item as `reader` does."""

    def read(value: Any) -> tuple[Any, ...]:
        if not isinstance(value, list):
            raise Refused(
                Fault(as_written(value), "expected a list", f"write [{json.dumps(value, default=str)}]")
            )
        if len(value) < least:
            raise Refused(Fault("[]", "expected at least one item: nothing would be left to choose"))
        faults: list[Fault] = []
        items: list[Any] = []
        for place, item in enumerate(value):
            try:
                items.append(reader(item))
            except Refused as refused:
                faults += [replace(fault, item=place) for fault in refused.faults]
        if faults:
            raise Refused(*faults)
        return tuple(items)

    return read


def distinct(reader: Reader) -> Reader:
    """Return a reader of a list in which what stands twice counts once."""
    return lambda value: tuple(dict.fromkeys(reader(value)))
