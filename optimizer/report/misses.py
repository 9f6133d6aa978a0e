"""The near misses: what each misses and by how much, and what dropping one target would do."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.report.paragraphs import paragraph
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
    table = ranked_table(rows, request, width, note=lambda row: missed_notes(row, request, width - 6))
    return [Text(title, "bold"), *table]


def missed_notes(row: Mapping[str, Any], request: Mapping[str, Any], width: int) -> list[str]:
    """Every missed target of one near miss with value, limit and by how much, folded to `width`."""
    missed = sorted((t for t in row["targets"] if t["margin"] < 0), key=lambda t: float(t["margin"]))
    parts = [_missed(target, request) for target in missed]
    return paragraph("; ".join(parts), width)


def blocking_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """Which single target, if dropped, would let something through; only where nothing meets."""
    if record["candidates"] or record["search"].get("impossible"):
        return []
    names: Sequence[str] = record["search"].get("blocking", ())
    if names:
        text = f"Dropping this one target would let something through: {names[0]}."
        if len(names) > 1:
            text = f"Dropping any one of these targets would let something through: {', '.join(names)}."
    elif record["near_misses"]:
        text = "No single target, if dropped, would let something through: at least two must give."
    else:
        text = "No pair is eligible, so no target stands in the way: see below why they dropped out."
    return [Text(line) for line in paragraph(text, width)]


def _missed(target: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    name = target["name"]
    value, limit = beside(name, target["value"], target["limit"], request)
    if target["value"] is None:
        return f"{name} does not exist here (needs {limit})"
    return f"{name} {margin_words(target['margin'])} ({value}, {SIDES[side(name)]} {limit})"
