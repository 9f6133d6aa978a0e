"""The near misses: what each misses and by how much, and what dropping one target would do."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.report.corner import at_corner, graded_value
from optimizer.report.paragraphs import paragraph, styled
from optimizer.report.pinned import pinned
from optimizer.report.table import ranked_table
from optimizer.report.words import margin_words, side, told_apart

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
    words = [missed_words(target, request) for target in worst_first(row)] + too_few_sources(row, request)
    return paragraph("; ".join(words), width) + paragraph(pinned(row, request), width)


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
    return styled(blocking, width) + styled(_nearest(worst_first(misses[0])), width) + at_ends


def _blocking(names: Sequence[str]) -> str:
    if not names:
        return "No single target, if dropped, would let something through."
    which = "this one target" if len(names) == 1 else "any one of these targets"
    return f"Dropping {which} would let something through: {', '.join(names)}."


def _nearest(missed: Sequence[Mapping[str, Any]]) -> str:
    names = [target["name"] for target in missed]
    if not names:
        return "The nearest miss meets every target, but not with op-amps of as many makers as asked for."
    if len(names) == 1:
        return f"The nearest miss misses {names[0]} alone."
    return (
        f"The nearest miss misses {', '.join(names[:-1])} and {names[-1]}: it is the setting whose worst "
        "miss is smallest, which tends to spread the miss over several targets."
    )


def worst_first(row: Mapping[str, Any]) -> list[Mapping[str, Any]]:
    """The targets that `row` misses, the worst miss first."""
    return sorted((t for t in row["targets"] if t["margin"] < 0), key=lambda t: float(t["margin"]))


def too_few_sources(row: Mapping[str, Any], request: Mapping[str, Any]) -> list[str]:
    """What a row lacks that meets every target, but not with op-amps of as many makers as asked for."""
    if "opamp_sources" not in row.get("missed", ()):
        return []
    makers = {row["opamp_maker"], *(other["opamp_maker"] for other in row.get("alternates", ()))}
    asked = request["resilience"]["opamp_sources"]
    return [f"op-amps of {len(makers)} of {asked} makers serve, in this package and pinout"]


def missed_words(target: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    """One missed target with value, limit and by how much; where corners are graded, at the worst one."""
    name, corner = target["name"], at_corner(target)
    worst = graded_value(target)
    (value, nominal), limit = told_apart(name, (worst, target["value"]), target["limit"], request)
    if worst is None:
        return f"{name} does not exist {corner or 'here'} (needs {limit})"
    values = f"{value} there, {nominal} at nominal" if corner else value
    missed = " ".join(filter(None, (margin_words(target["margin"]), corner)))
    return f"{name} {missed} ({values}, {SIDES[side(name)]} {limit})"
