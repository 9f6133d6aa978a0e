"""Reads one end of a range that stands in one cell, such as '1.8 V ~ 5.5 V' or '-40 to 125 °C'."""

from __future__ import annotations

import re

from optimizer.quantities import QuantityError, read_quantity

_END = r"[-+\u2212]?\s*[0-9][0-9.,]*(?:[eE][-+]?[0-9]+)?\s*(?:[^\W\d_]|[%°º/℃Ω])*"
_BETWEEN = r"\s*(?:~|\u223c|\uff5e|\.{2,3}|\u2026|\bto\b|-|\u2212|\u2013|\u2014)\s*"
_RANGE = re.compile(f"({_END}?){_BETWEEN}({_END})", re.IGNORECASE)
_AMBIENT = re.compile(r"\s*\(\s*T\s*_?A(?:MB)?\s*\)\s*$", re.IGNORECASE)
_JUNCTION = re.compile(r"\(\s*T\s*_?(?:J|C|CASE|CH)\s*\)", re.IGNORECASE)
_BARE = re.compile(r"[-+\u2212]?\s*[0-9.,]+(?:[eE][-+]?[0-9]+)?")

_LONGEST = 80


def read_range_end(
    cell: str, kind: str, part: str, *, decimal_comma: bool = False, unit: str | None = None
) -> float:
    """Return the 'low' or 'high' end (`part`) of the range in `cell`, in SI.

    An end without a unit takes the other end's, and `unit` where neither has one. A remark '(TA)'
    behind an ambient temperature range is passed over; '(TJ)' is another quantity and refused, as is
    whatever else is not exactly one range. Raises QuantityError.
    """
    if kind == "temperature" and _JUNCTION.search(cell):
        raise QuantityError(
            "a junction or case temperature says nothing about the ambient", "leave the cell blank"
        )
    ends = _ends(_AMBIENT.sub("", cell) if kind == "temperature" else cell)
    low, high = (read_quantity(end, kind, decimal_comma=decimal_comma, unit=unit) for end in ends)
    if low > high:
        raise QuantityError("the low end of the range is above its high end")
    return low if part == "low" else high


def _ends(cell: str) -> tuple[str, str]:
    """Return both ends as text, each with its unit."""
    # no range needs so long a text, and the pattern would try every way to cut it
    match = _RANGE.fullmatch(cell.strip()) if len(cell) <= _LONGEST else None
    if match is None:
        raise QuantityError("expected one range such as '1.8 V ~ 5.5 V' or '-40 to 125 °C'")
    low, high = match[1].strip(), match[2].strip()
    return _with_unit_of(low, high), _with_unit_of(high, low)


def _with_unit_of(end: str, other: str) -> str:
    """Return `end` with the unit of `other` where it has none of its own."""
    if not _BARE.fullmatch(end):
        return end
    bare = _BARE.match(other)
    return end + (other[bare.end() :] if bare else "")
