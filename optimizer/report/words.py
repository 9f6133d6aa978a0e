"""How the report says numbers: margins, large counts, values beside their limits."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.quantities import show
from optimizer.vocabulary import VOCABULARY, figure_kind

SCALES = (
    (10**18, "million million million"),
    (10**15, "thousand million million"),
    (10**12, "million million"),
    (10**9, "thousand million"),
    (10**6, "million"),
)


def count(number: int) -> str:
    """A count with thousands separated: '59,990'."""
    return f"{number:,}"


def several(number: int, what: str) -> str:
    """A count of things: '1 row', '1,234 rows'."""
    return f"{count(number)} {what}" if number == 1 else f"{count(number)} {what}s"


def spoken(number: int) -> str:
    """A large count in words that mean the same everywhere: '12.3 million million'."""
    for scale, words in SCALES:
        if number >= scale:
            return f"{number / scale:.3g} {words}" if number < 1000 * scale else f"{number:.3g}"
    return count(number)


def percent(fraction: float) -> str:
    """A positive fraction in whole percent, to one digit below 1 %; never rounded to nothing."""
    if fraction < 1e-4:
        return "under 0.01 %"
    if fraction < 0.0095:
        return f"{100 * fraction:.1g} %"
    return f"{100 * fraction:,.0f} %"


def share(fraction: float) -> str:
    """A share of all in percent, told apart from none and from all: '99.23 %', '99.996 %', '100 %'."""
    for digits in range(4, 10):
        said = show(fraction, "fraction", digits)
        if said != "100 %" or fraction == 1.0:
            break
    return said


def margin_words(margin: float) -> str:
    """A margin in words: '3 % to spare', 'misses by 4 %', 'exactly met'."""
    if margin == 0:
        return "exactly met"
    if margin < 0:
        return f"misses by {percent(-margin)}"
    return f"{margin:.0f}-fold to spare" if margin >= 10 else f"{percent(margin)} to spare"


def light_kind(request: Mapping[str, Any]) -> str:
    """In which kind of light the request speaks: 'power' or 'irradiance' (written as text)."""
    return "irradiance" if isinstance(request["light"]["strongest"], str) else "power"


def figure(name: str, value: float | None, request: Mapping[str, Any], digits: int = 3) -> str:
    """One figure with its unit; '-' where it does not exist."""
    if value is None:
        return "-"
    return show(value, figure_kind(name, light_kind(request)), digits)


def beside(name: str, value: float | None, limit: float, request: Mapping[str, Any]) -> tuple[str, str]:
    """A value and its limit with as many digits as it takes to tell the two apart."""
    (said,), bound = told_apart(name, (value,), limit, request)
    return said, bound


def told_apart(
    name: str, values: Sequence[float | None], limit: float, request: Mapping[str, Any]
) -> tuple[tuple[str, ...], str]:
    """Values and their limit with as many digits as it takes to tell each of them from the limit."""
    for digits in range(3, 10):
        bound = figure(name, limit, request, digits)
        said = tuple(figure(name, value, request, digits) for value in values)
        if all(text != bound or value == limit for text, value in zip(said, values, strict=True)):
            break
    return said, bound


def side(name: str) -> str:
    """On which side of its limit a target must be: 'at least' or 'at most'."""
    return "at least" if VOCABULARY[name].better == "higher" else "at most"


def ranges(numbers: Sequence[int]) -> list[str]:
    """Rising numbers one by one, with runs of three or more written '2-8'."""
    runs: list[list[int]] = []
    for number in numbers:
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    return [text for run in runs for text in ([f"{run[0]}-{run[-1]}"] if len(run) > 2 else map(str, run))]
