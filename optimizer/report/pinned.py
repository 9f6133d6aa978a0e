"""Which passives of a row stand at an end of the range that the request allows."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

NEAR = 0.05  # of the end: about as far as the nearest E24 value may lie from it
PASSIVES = (
    ("Rf", "feedback_resistance", "resistance"),
    ("Cf", "feedback_capacitance", "capacitance"),
)


def pinned(row: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    """'Rf is at the low end of space.resistance', and the same of a placed Cf; '' where neither is."""
    said = []
    for name, key, allowed in PASSIVES:
        ends = _ends(row[key], request["space"][allowed])
        if ends:
            said.append(f"{name} is at {ends} of space.{allowed}")
    return "; ".join(said)


def _ends(value: float | None, allowed: Mapping[str, Any]) -> str:
    if not value:  # no capacitor is placed
        return ""
    low, high = (_near(value, allowed[end]) for end in ("from", "to"))
    if low and high:
        return "both ends"
    return "the low end" if low else "the high end" if high else ""


def _near(value: float, end: float | None) -> bool:
    return end is not None and abs(value - end) <= NEAR * end
