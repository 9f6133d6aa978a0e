"""Reads engineering quantities: SI prefixes, units, IEC 60062 letter codes, prices."""

from __future__ import annotations

import math
import re

from optimizer.quantities.currencies import currency_code
from optimizer.quantities.kinds import KINDS, scale
from optimizer.quantities.refusals import expected, not_a_quantity, out_of_range, separated, unknown_unit
from optimizer.quantities.units import Kind, QuantityError, tidy

_DIGITS = r"(?:[0-9]+\.?[0-9]*|\.[0-9]+)"
_NUMBER = re.compile(rf"([+-]?{_DIGITS})(?:[eE]([+-]?[0-9]{{1,4}}))?(.*)", re.DOTALL).fullmatch
_LETTER_CODE = re.compile(r"([0-9]*)([A-Za-z])([0-9]+)\s*(.*)", re.DOTALL).fullmatch
_POINT_THOUSANDS = re.compile(r"[^0-9.]*[1-9][0-9]{0,2}\.[0-9]{3}(?![0-9eE])").match
_MONEY = re.compile(r"([^0-9+.,-]*)(.*?)([^0-9.,]*)", re.DOTALL).fullmatch


def read_quantity(
    text: str | int | float, kind: str, *, decimal_comma: bool = False, unit: str | None = None
) -> float:
    """Read `text` as a quantity of `kind`, exactly: '4.7pF' is the float nearest to 4.7e-12.

    Args:
        text: a number, or a number with an optional SI prefix and unit, as the contract says.
        kind: a key of `KINDS`.
        decimal_comma: the file writes decimals with a comma; '1.250' is then refused as ambiguous.
        unit: the unit of numbers that carry none; None: SI (temperatures C, angles deg, gains dB).

    Returns:
        The value [the kind's `symbol`]; gains as a ratio [V/V], tolerances as a fraction.

    Raises:
        QuantityError: the text is no such quantity; it says what was expected.
        KeyError: unknown kind.

    >>> read_quantity("4k7", "resistance")
    4700.0
    """
    if not isinstance(text, str):
        text = _written(text, kind)
    if decimal_comma:
        text = _with_point(text)
    match = _NUMBER(text.strip())
    if match is not None:
        digits, exponent, rest = match.groups()
        if rest == "" and unit is not None:
            rest = _known_unit(unit, kind)
        found = scale(rest, kind)
        if found is not None:
            shift, convert = found
            value = float(f"{digits}e{shift + int(exponent) if exponent else shift}")
            if math.isinf(value) or (value == 0.0 and digits.strip("+-.0")):
                raise out_of_range(KINDS[kind])
            return value if convert is None else convert(value)
    return _read_carefully(text, kind, unit)


def read_price(text: str | int | float, *, decimal_comma: bool = False) -> tuple[float, str | None]:
    """Read a price and the currency written with it.

    Returns:
        The number, and the ISO 4217 code of its symbol or code (None where it carries none).

    Raises:
        QuantityError: not a price, or two currencies in one.

    >>> read_price("1.85 €")
    (1.85, 'EUR')
    """
    if not isinstance(text, str):
        return read_quantity(text, "price"), None
    match = _MONEY(tidy(text))
    marks = [mark.strip() for mark in (match[1], match[3])] if match else []
    codes = {currency_code(mark) for mark in marks if mark}
    if match is None or None in codes or len(codes) > 1:
        raise QuantityError("expected a price such as '1.85', with one currency at most")
    return read_quantity(match[2], "price", decimal_comma=decimal_comma), codes.pop() if codes else None


def _written(number: object, kind: str) -> str:
    if isinstance(number, bool) or not isinstance(number, int | float):
        raise expected(KINDS[kind])
    try:
        return repr(float(number))
    except OverflowError:
        raise out_of_range(KINDS[kind]) from None


def _with_point(text: str) -> str:
    """`text` of a file with decimal commas, written with a point."""
    plain = tidy(text)
    if _POINT_THOUSANDS(plain) or ("," in plain and plain.count(",") + plain.count(".") > 1):
        raise separated(plain, ",")
    return plain.replace(",", ".")


def _known_unit(unit: str, kind: str) -> str:
    if scale(unit, kind) is None:
        raise unknown_unit(KINDS[kind])
    return unit


def _read_carefully(text: str, kind: str, unit: str | None) -> float:
    """Second look at what the fast path did not take: odd signs, letter codes; else the refusal."""
    known = KINDS[kind]
    plain = tidy(text)
    if known.signed_pair:
        plain = re.sub(r"^(?:±|\+/-|\+-)\s*", "", plain)
    plain = re.sub(r"^([+-])\s+(?=[0-9.])", r"\1", plain)
    if plain != text.strip() and _NUMBER(plain):
        return read_quantity(plain, kind, unit=unit)
    code = _LETTER_CODE(plain)
    if code and code[2] in known.letters and (not code[4] or _is_plain_unit(code[4], known)):
        return float(f"{code[1] or '0'}.{code[3]}e{known.letters[code[2]]}")
    match = None if code else _NUMBER(plain)
    raise not_a_quantity(plain, match[3] if match else "", known)


def _is_plain_unit(text: str, kind: Kind) -> bool:
    return kind.over is not None and kind.over.exponent(text) == 0
