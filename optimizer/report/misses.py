"""The near misses: what each misses and by how much, and what dropping one target would do."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.report.paragraphs import paragraph, styled
from optimizer.report.pinned import pinned
from optimizer.report.table import ranked_table
from optimizer.report.words import beside, margin_words, side

SIDES = {"at least": "needs", "at most": "at most"}


def near_miss_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """A heading and the table of near misses, each with what it misses; empty without any."""
    rows = record["near_misses"]
    if not rows:
        return []
    nearest = "" if record["candidates"] else ", the nearest miss first"
    plural = "pairs that miss" if len(rows) > 1 else "pair that misses"
    title = f"Near misses: {len(rows)} eligible {plural} a target{nearest}"
    request = record["request"]
    table = ranked_table(rows, request, width, note=lambda row, room: missed_notes(row, request, room))
    return [*styled(title, width, "bold"), *table]


def missed_notes(row: Mapping[str, Any], request: Mapping[str, Any], width: int) -> list[str]:
    """Every missed target of one near miss with value, limit and by how much, then which passive stands
    at an end of its range, folded to `width`.
    """
    missed = paragraph("; ".join(_missed(target, request) for target in _worst_first(row)), width)
    return missed + paragraph(pinned(row, request), width)


def blocking_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """What stands in the way where nothing meets: the single targets that, if dropped, would let something
    through, the targets that the nearest miss misses, and which passive of it stands at an end of its range.
    """
    if record["candidates"] or record["search"].get("impossible"):
        return []
    misses = record["near_misses"]
    if not misses:
        text = "No pair is eligible, so no target stands in the way: see below why they dropped out."
        return styled(text, width)
    blocking = _blocking(record["search"].get("blocking", ()))
    ends = pinned(misses[0], record["request"])
    at_ends = styled(f"In the nearest miss, {ends}." if ends else "", width)
    return styled(blocking, width) + styled(_nearest(_worst_first(misses[0])), width) + at_ends


def _blocking(names: Sequence[str]) -> str:
    if not names:
        return "No single target, if dropped, would let something through."
    which = "this one target" if len(names) == 1 else "any one of these targets"
    return f"Dropping {which} would let something through: {', '.join(names)}."


def _nearest(missed: Sequence[Mapping[str, Any]]) -> str:
    names = [target["name"] for target in missed]
    if len(names) == 1:
        return f"The nearest miss misses {names[0]} alone."
    return (
        f"The nearest miss misses {', '.join(names[:-1])} and {names[-1]}: it is the setting whose worst "
        "miss is smallest, which tends to spread the miss over several targets."
    )


def _worst_first(row: Mapping[str, Any]) -> list[Mapping[str, Any]]:
    """The targets that `row` misses."""
    return sorted((t for t in row["targets"] if t["margin"] < 0), key=lambda t: float(t["margin"]))


def _missed(target: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    name = target["name"]
    value, limit = beside(name, target["value"], target["limit"], request)
    if target["value"] is None:
        return f"{name} does not exist here (needs {limit})"
    return f"{name} {margin_words(target['margin'])} ({value}, {SIDES[side(name)]} {limit})"
