"""How units are spelled and what they do to a number; the table of them is that of the kinds."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import NamedTuple

from optimizer.errors import LuxsiftError

# SI prefixes as powers of ten. Peta and exa are left out on purpose: no part needs them, and an
# upper-cased "4.7 PF" must be refused, not read as 4.7e15.
PREFIXES: Mapping[str, int] = MappingProxyType(
    {
        "a": -18,
        "f": -15,
        "p": -12,
        "n": -9,
        "u": -6,
        "m": -3,
        "k": 3,
        "K": 3,
        "M": 6,
        "G": 9,
        "T": 12,
    }
)

_SPACES = "\u00a0\u1680\u2000\u2001\u2002\u2003\u2004\u2005\u2006\u2007\u2008\u2009\u200a\u202f\u205f\u3000"
_NOTHING = "\u200b\u200c\u200d\u2060\ufeff"
_MINUSES = "\u2212\u2012\u2013\ufe63\uff0d"
_SIGNS = str.maketrans(
    dict.fromkeys(_SPACES, " ")
    | dict.fromkeys(_NOTHING, "")
    | dict.fromkeys(_MINUSES, "-")
    | {"\u00b5": "u", "\u03bc": "u", "\u03a9": "ohm", "\u2126": "ohm"}
    | {"\u00b0": "deg", "\u00ba": "deg", "\u2103": "degC", "\u221a": "sqrt", "\u00b2": "2", "\u2044": "/"}
)
_ROOT_HZ = re.compile(r"(?:sqrt|root|rt)\(?hz\)?|hz\^\(?(?:0\.5|1/2)\)?", re.IGNORECASE)


class QuantityError(LuxsiftError, ValueError):
    """A text is not the quantity asked for; `str` is the rule, `remedy` what to write (may be '')."""

    def __init__(self, rule: str, remedy: str = "") -> None:
        self.remedy = remedy
        super().__init__(rule)


class Scale(NamedTuple):
    """What a unit does to a number: times 10 ** `shift`, then `convert` (None: nothing more)."""

    shift: int
    convert: Callable[[float], float] | None = None


AS_IT_IS = Scale(0)


@dataclass(frozen=True, slots=True)
class Names:
    """One side of a unit: spellings (the first is the proper one), and the prefixes it takes.

    `power` is what a prefix counts for: 2 in mm2.
    """

    spellings: tuple[str, ...]
    prefixes: Mapping[str, int] = field(default_factory=lambda: PREFIXES)
    power: int = 1

    def exponent(self, text: str) -> int | None:
        """Power of ten of `text` on this side, or None where it is no spelling of this unit."""
        if self.is_name(text):
            # "5 f" could be farad or femto: only the proper case of a name that is also a prefix counts
            return 0 if text not in self.prefixes or text in self.spellings else None
        prefix = self.prefixes.get(text[:1])
        return prefix * self.power if prefix is not None and self.is_name(text[1:]) else None

    def is_name(self, text: str) -> bool:
        """Whether `text`, in any case, is a spelling of this side."""
        return text.lower() in {spelling.lower() for spelling in self.spellings}


@dataclass(frozen=True, slots=True)
class Kind:
    """One kind of quantity.

    `title` and `example` serve messages, `symbol` is the unit of the value in memory, `shown` the
    unit that `show` writes with `shown_shift` its power of ten, `engineering` whether it takes
    prefixes there. `over` / `under` are the two sides of the unit, `fixed` further spellings in
    lower case; `bare` is what a number without a unit does, `prefix_alone` whether "10k" is a number
    too. `letters` are the IEC 60062 codes. `signed_pair`: a leading plus-minus sign means nothing more.
    """

    name: str
    title: str
    example: str
    symbol: str
    over: Names | None = None
    under: Names | None = None
    fixed: Mapping[str, Scale] = field(default_factory=dict)
    bare: Scale = AS_IT_IS
    prefix_alone: bool = True
    letters: Mapping[str, int] = field(default_factory=dict)
    shown: str = ""
    shown_shift: int = 0
    engineering: bool = True
    signed_pair: bool = False


def tidy(text: str) -> str:
    """`text` with every sign that has an ASCII spelling in that spelling, spaces trimmed."""
    return (text if text.isascii() else text.translate(_SIGNS)).strip()


def read_unit(unit: str, kind: Kind) -> Scale | None:
    """What `unit` (as written; '' = none) does to a number of `kind`; None where it does not fit."""
    text = "".join(tidy(unit).split())
    text = _ROOT_HZ.sub("rtHz", text).replace("^2", "2")
    if not text:
        return kind.bare
    return kind.fixed.get(text.lower()) or _composed(text, kind)


def _composed(text: str, kind: Kind) -> Scale | None:
    if kind.over is None:
        return None
    if kind.prefix_alone and text in kind.over.prefixes and not kind.over.is_name(text):
        return Scale(kind.over.prefixes[text])
    top, slash, bottom = text.partition("/")
    over = kind.over.exponent(top)
    if kind.under is None:
        return None if over is None or slash else Scale(over)
    under = kind.under.exponent(bottom)
    return None if over is None or under is None else Scale(over - under)
