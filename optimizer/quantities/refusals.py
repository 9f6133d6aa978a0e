"""What is wrong with a text that is no quantity of its kind, and what was most likely meant."""

from __future__ import annotations

import re
from difflib import SequenceMatcher

from optimizer.errors import nearest
from optimizer.quantities.kinds import KINDS, scale
from optimizer.quantities.units import PREFIXES, Kind, Names, QuantityError

# 1,000  1 000  1'000  1.000.000: digits in threes behind marks
_GROUPED = re.compile(r"[+-]?[1-9][0-9]{0,2}(?:[,.' _\u2019][0-9]{3})+(?![0-9])").match
_SEPARATED_NUMBER = re.compile(r"[+-]?[0-9]+(?:[.,' _\u2019][0-9]+)*").search
_COMMA = re.compile(r"[+-]?[0-9]*,[0-9]").match
_LONGEST = 40
_NEAR = 0.5  # half of the letters: units are short
_GOES_ON = re.compile(r"[,.' _\u2019][0-9]").match


def expected(kind: Kind) -> QuantityError:
    """Refusal that says what a quantity of this kind looks like."""
    return QuantityError(f"expected {kind.title} such as '{kind.example}'")


def out_of_range(kind: Kind) -> QuantityError:
    """Refusal of a number that no float holds."""
    return QuantityError(str(expected(kind)), "the number is out of range")


def unknown_unit(kind: Kind) -> QuantityError:
    """Refusal of a unit stated for the bare numbers of a column."""
    return QuantityError(f"expected a unit of {_name(kind)}, as in '{kind.example}'")


def separated(text: str, mark: str) -> QuantityError:
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


def not_a_quantity(text: str, rest: str, kind: Kind) -> QuantityError:
    """Refusal of `text`; `rest` is what stands behind its number ('' where it has none)."""
    if _GOES_ON(rest) and _GROUPED(text):
        return separated(text, ".")
    if _COMMA(text):
        return QuantityError(
            "a decimal comma is read only in a semicolon-separated file", f"write '{text.replace(',', '.')}'"
        )
    return QuantityError(str(expected(kind)), _unit_hint(rest.strip()[:_LONGEST], kind))


def _unit_hint(unit: str, kind: Kind) -> str:
    """What the unit may have been meant to be: another kind's, or a near spelling of this one's."""
    if not unit:
        return ""
    for other in KINDS.values():
        if unit not in PREFIXES and scale(unit, other.name) is not None:
            return f"'{unit}' is a unit of {_name(other)}"
    if kind.over is not None and unit in kind.over.prefixes and kind.over.is_name(unit):
        proper = kind.over.spellings[0]
        return f"'{unit}' may be a prefix or the unit: write '{unit}{proper}' or '{proper}'"
    meant = _meant(unit, kind)
    if meant is None:
        return ""
    case = "prefixes keep their case: " if meant.casefold() == unit.casefold() else ""
    return f"{case}did you mean '{meant}'?"


def _meant(unit: str, kind: Kind) -> str | None:
    """The near spelling of a unit of this kind that has the prefixes typed; None where there is none."""
    top, slash, bottom = unit.partition("/")
    if kind.over is not None and bool(slash) == (kind.under is not None):
        over = _meant_side(top, kind.over)
        under = _meant_side(bottom, kind.under) if kind.under else ""
        if over is not None and under is not None:
            return over + slash + under
    # of spellings that differ in scale none is safe to suggest
    alike = kind.over is None and len(set(kind.fixed.values())) == 1
    return nearest(unit, (*kind.fixed, kind.symbol)) if alike else None


def _meant_side(text: str, names: Names) -> str | None:
    """One side of a unit, respelled without another magnitude than that of the prefix typed."""
    if not text or names.exponent(text) is not None:
        return text or names.spellings[0]
    if names.is_name(text):  # a prefix as well: nobody can tell which was meant
        return None
    proper = names.spellings[0]
    first, rest = text[0], text[1:]
    may_be_name = proper.lower().startswith(first.lower())
    readings = {}
    if first in names.prefixes:
        readings[first + proper] = _likeness(rest, names)
    elif first.swapcase() in names.prefixes and names.is_name(rest) and not may_be_name:
        return first.swapcase() + proper
    if first not in names.prefixes or may_be_name:
        readings[proper] = _likeness(text, names)
    best = max(readings.values(), default=0.0)
    meant = [reading for reading, likeness in readings.items() if likeness == best]
    return meant[0] if best >= _NEAR and len(meant) == 1 else None


def _likeness(text: str, names: Names) -> float:
    """How near `text` is to the nearest spelling, from 0 to 1."""
    return max(SequenceMatcher(None, text.lower(), name.lower()).ratio() for name in names.spellings)


def _name(kind: Kind) -> str:
    return kind.title.split(" ", 1)[1]
