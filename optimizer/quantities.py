"""Reads and shows engineering quantities: SI prefixes, units, IEC 60062 letter codes, prices.

The vocabulary's tables are offered from here too: this module is the face of the room.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping

from optimizer.currencies import currency_code
from optimizer.errors import did_you_mean
from optimizer.kinds import KINDS, scale
from optimizer.units import PREFIXES, Kind, QuantityError, tidy
from optimizer.vocabulary import COLUMNS, TARGETS, VOCABULARY, Column, Figure, figure_kind

__all__ = [
    "COLUMNS",
    "KINDS",
    "TARGETS",
    "VOCABULARY",
    "Column",
    "Figure",
    "Kind",
    "QuantityError",
    "figure_kind",
    "read_price",
    "read_quantity",
    "show",
]

_DIGITS = r"(?:[0-9]+\.?[0-9]*|\.[0-9]+)"
_NUMBER = re.compile(rf"([+-]?{_DIGITS})(?:[eE]([+-]?[0-9]{{1,4}}))?(.*)", re.DOTALL).fullmatch
_LETTER_CODE = re.compile(r"([0-9]*)([A-Za-z])([0-9]+)\s*(.*)", re.DOTALL).fullmatch
# 1,000  1 000  1'000  1.000.000: digits in threes behind marks
_GROUPED = re.compile(r"[+-]?[1-9][0-9]{0,2}(?:[,.' _\u2019][0-9]{3})+(?![0-9])").match
_SEPARATED_NUMBER = re.compile(r"[+-]?[0-9]+(?:[.,' _\u2019][0-9]+)*").search
_COMMA = re.compile(r"[+-]?[0-9]*,[0-9]").match
_POINT_THOUSANDS = re.compile(r"[^0-9.]*[1-9][0-9]{0,2}\.[0-9]{3}(?![0-9eE])").match
_GOES_ON = re.compile(r"[,.' _\u2019][0-9]").match
_MONEY = re.compile(r"([^0-9+.,-]*)(.*?)([^0-9.,]*)", re.DOTALL).fullmatch
_SHOWN_PREFIXES = {exponent: prefix for prefix, exponent in PREFIXES.items() if prefix != "K"} | {
    0: "",
    -6: "\u00b5",
}


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
                raise QuantityError(_expected(KINDS[kind]), "the number is out of range")
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


def show(value: float | None, kind: str, digits: int = 3) -> str:
    """Write `value` [SI, as read] in engineering notation with `digits` significant digits.

    None and NaN give '-', infinity 'infinite'.

    >>> show(4.7e-12, "capacitance"), show(0.03, "fraction"), show(20e3, "frequency")
    ('4.7 pF', '3 %', '20 kHz')
    """
    if value is None or math.isnan(value):
        return "-"
    if math.isinf(value):
        return "infinite" if value > 0 else "-infinite"
    known = KINDS[kind]
    if kind in _OWN_WAY:
        return _OWN_WAY[kind](value, digits)
    unit = known.shown or known.symbol
    if known.engineering:
        return _engineering(value, unit, digits)
    return f"{_plain(value, -known.shown_shift, digits)} {unit}".rstrip()


def _written(number: object, kind: str) -> str:
    if isinstance(number, bool) or not isinstance(number, int | float):
        raise QuantityError(_expected(KINDS[kind]))
    try:
        return repr(float(number))
    except OverflowError:
        raise QuantityError(_expected(KINDS[kind]), "the number is out of range") from None


def _with_point(text: str) -> str:
    """`text` of a file with decimal commas, written with a point."""
    plain = tidy(text)
    if _POINT_THOUSANDS(plain) or ("," in plain and plain.count(",") + plain.count(".") > 1):
        raise _separated(plain, ",")
    return plain.replace(",", ".")


def _known_unit(unit: str, kind: str) -> str:
    if scale(unit, kind) is None:
        raise QuantityError(f"expected a unit of {_name(KINDS[kind])}, as in '{KINDS[kind].example}'")
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
    raise _refusal(plain, known)


def _is_plain_unit(text: str, kind: Kind) -> bool:
    return kind.over is not None and kind.over.exponent(text) == 0


def _expected(kind: Kind) -> str:
    return f"expected {kind.title} such as '{kind.example}'"


def _separated(text: str, mark: str) -> QuantityError:
    """Refusal of a number with separators, with what to write where `mark` is the decimal mark."""
    found = _SEPARATED_NUMBER(text)
    number = found[0] if found else text
    *whole, last = re.split(r"[,.' _\u2019]", number)
    if len(set(re.findall(r"[,.]", number))) > 1:
        choices = [f"{''.join(whole)}{mark}{last}"]
    elif len(whole) == 1 and re.search(r"[,.]", number):
        choices = [whole[0] + last, whole[0] + mark + last]
    else:
        choices = ["".join(whole) + last]
    written = " or ".join(f"'{choice}'" for choice in choices)
    return QuantityError("a separator inside the number may mark thousands or decimals", f"write {written}")


def _refusal(text: str, kind: Kind) -> QuantityError:
    match = _NUMBER(text)
    if match and _GOES_ON(match[3]) and _GROUPED(text):
        return _separated(text, ".")
    if _COMMA(text):
        return QuantityError(
            "a decimal comma is read only in a semicolon-separated file", f"write '{text.replace(',', '.')}'"
        )
    return QuantityError(
        _expected(kind), _unit_hint(match[3].strip(), kind) if match and not _LETTER_CODE(text) else ""
    )


def _unit_hint(unit: str, kind: Kind) -> str:
    """What the unit may have been meant to be: another kind's, or a near spelling of this one's."""
    for other in KINDS.values():
        if unit not in PREFIXES and scale(unit, other.name) is not None:
            return f"'{unit}' is a unit of {_name(other)}"
    prefixes = ["", *PREFIXES] if kind.engineering else [""]
    spellings = [prefix + kind.symbol for prefix in reversed(prefixes)]
    hint = did_you_mean(unit, spellings)
    if hint and unit.casefold() in (spelling.casefold() for spelling in spellings):
        return f"prefixes keep their case: {hint}"
    return hint


def _name(kind: Kind) -> str:
    return kind.title.split(" ", 1)[1]


def _significant(value: float, digits: int) -> tuple[str, str, int]:
    """Sign, `digits` rounded digits without a point, and the power of ten of the first one."""
    mantissa, _, exponent = f"{abs(value):.{digits - 1}e}".partition("e")
    return "-" if value < 0 else "", mantissa.replace(".", ""), int(exponent)


def _placed(figures: str, point: int) -> str:
    """`figures` with the decimal point after the first `point` of them, trailing zeros dropped."""
    if point <= 0:
        return ("0." + "0" * -point + figures).rstrip("0")
    if point >= len(figures):
        return figures + "0" * (point - len(figures))
    return f"{figures[:point]}.{figures[point:]}".rstrip("0").rstrip(".")


def _engineering(value: float, unit: str, digits: int) -> str:
    if value == 0:
        return f"0 {unit}"
    sign, figures, exponent = _significant(value, digits)
    group = 3 * (exponent // 3)
    if group not in _SHOWN_PREFIXES:
        return f"{value:.{digits - 1}e} {unit}"
    return f"{sign}{_placed(figures, exponent - group + 1)} {_SHOWN_PREFIXES[group]}{unit}"


def _plain(value: float, shift: int, digits: int) -> str:
    if value == 0:
        return "0"
    sign, figures, exponent = _significant(value, digits)
    place = exponent + shift
    if not -6 <= place < 15:
        return f"{sign}{_placed(figures, 1)}e{place}"
    return sign + _placed(figures, place + 1)


def _money(value: float, digits: int) -> str:
    """At least two decimals, more where a small price needs them for its `digits`."""
    exponent = _significant(value, digits)[2] if value else 0
    return f"{value:.{max(2, digits - 1 - exponent)}f}"


def _decibels(value: float, digits: int) -> str:
    return f"{_plain(20.0 * math.log10(value), 0, digits)} dB" if value > 0 else f"{value:g} V/V"


def _whole(value: float, _digits: int) -> str:
    return f"{value:.0f}"


_OWN_WAY: Mapping[str, Callable[[float, int], str]] = {"price": _money, "count": _whole, "gain": _decibels}
