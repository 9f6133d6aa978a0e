"""Shows engineering quantities: a few digits, the prefix that fits, the unit."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

from optimizer.quantities.kinds import KINDS
from optimizer.quantities.units import PREFIXES

_SHOWN_PREFIXES = {exponent: prefix for prefix, exponent in PREFIXES.items() if prefix != "K"} | {
    0: "",
    -6: "\u00b5",
}


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
