"""Parts that were asked about by name: what each reaches, what stops it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.report.page.blocks import Cell, Part, Table, cells
from optimizer.report.page.terms import term
from optimizer.report.words import figure, margin_words
from optimizer.review.findings import Compared, Reach


def compared_part(found: Sequence[Compared], request: Mapping[str, Any]) -> Part:
    """The part of a section on the parts that were named for comparison."""
    rows = tuple(cells(*_row(part)) for part in found)
    headings = ("part", "what stops it", "best margin", "closest with", "checks that it fails")
    overview = Table("Parts named for comparison", headings, rows)
    return Part("Why not these", (overview, *(_reached(part, request) for part in found if part.reaches)))


def _row(part: Compared) -> tuple[str, ...]:
    fails = "; ".join(f"{check}: {clean(words)}" for check, words in part.fails)
    return (
        clean(part.part),
        "nothing, it meets the request" if part.stopped_by is None else term(part.stopped_by),
        "-" if part.margin is None else margin_words(part.margin),
        "-" if part.closest is None else clean(part.closest),
        fails or "none",
    )


def _reached(part: Compared, request: Mapping[str, Any]) -> Table:
    headings = ("target", "limit", "best alone", "with the others", "margin there")
    rows = tuple(_reach(reach, request) for reach in part.reaches)
    caption = f"What {clean(part.part)} reaches of each target"
    return Table(caption, headings, rows, numbers=frozenset({1, 2, 3}))


def _reach(reach: Reach, request: Mapping[str, Any]) -> tuple[Cell, ...]:
    numbers = (figure(reach.name, value, request) for value in (reach.limit, reach.alone, reach.together))
    tone = "" if reach.margin >= 0.0 else "bad"
    return (*cells(term(reach.name), *numbers), Cell(margin_words(reach.margin), tone=tone))
