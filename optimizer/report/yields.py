"""Yields in words: of how many receivers drawn at random the targets hold, and how sure that is."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.report.words import count, percent, share

BELOW = "!"
"""Marks a row that does not reach the yield that the request asks for."""


def is_below(row: Mapping[str, Any]) -> bool:
    """Whether a yield is asked for and `row` does not reach it, or may not for all that is known."""
    return row.get("yield", {}).get("meets") is False


def is_unknown(row: Mapping[str, Any]) -> bool:
    """Whether the yield of `row` is unknown for a blank in the catalogs."""
    return bool(row.get("yield", {}).get("unknown"))


def yield_cell(row: Mapping[str, Any]) -> str:
    """The yield of `row` for a table."""
    found = row.get("yield")
    if found is None:
        return "-"
    return "unknown" if found["unknown"] else share(found["yield"])


def interval(found: Mapping[str, Any]) -> str:
    """The ends of the interval: '99.04 % to 99.38 %'."""
    return f"{share(found['low'])} to {share(found['high'])}"


def yield_words(row: Mapping[str, Any], request: Mapping[str, Any]) -> list[str]:
    """What the draws of `row` came to, in up to three sentences without a full stop; none without draws."""
    found = row.get("yield")
    if found is None:
        return []
    if found["unknown"]:
        return [f"unknown: {blanks(found)}"]
    counted = f"{count(found['passed'])} of {count(found['draws'])} receivers drawn at random"
    said = f"{counted} meet the request: {share(found['yield'])}, 95 % interval {interval(found)} (Wilson)"
    return [said, *_verdict(found, request), *_failures(found)]


def blanks(found: Mapping[str, Any]) -> str:
    """'resistor.tolerance is blank', for what leaves a yield unknown."""
    names = [clean(name) for name in found["unknown"]]
    return f"{' and '.join(names)} {'is' if len(names) == 1 else 'are'} blank"


def _verdict(found: Mapping[str, Any], request: Mapping[str, Any]) -> list[str]:
    wanted = request.get("tolerance", {}).get("yield")
    if wanted is None:
        return []
    if found["meets"]:
        return [f"reaches the {share(wanted)} asked for, by the interval's lower end"]
    if found["passed"] == found["draws"]:
        return [f"{count(found['draws'])} draws cannot show the {share(wanted)} asked for: state more draws"]
    return [f"does not reach the {share(wanted)} asked for, by the interval's lower end"]


def _failures(found: Mapping[str, Any]) -> list[str]:
    """Which target or check fails in which share of the draws, the most frequent first."""
    failures = sorted(found["failures"].items(), key=lambda item: (-item[1], item[0]))
    if not failures:
        return []
    said = (f"{clean(name)} in {percent(number / found['draws'])}" for name, number in failures)
    return [f"fails: {', '.join(said)} of them"]
