"""Parts that were asked about by name: what stops each, what it reaches, where it comes closest."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.report.answer import answer
from optimizer.report.chosen import parts_list
from optimizer.report.page.blocks import Block, Cell, Part, Table, Words, cells
from optimizer.report.page.terms import in_terms, merged, term
from optimizer.report.reached import proof, reach_columns
from optimizer.report.whynot import check_rows
from optimizer.review.findings import Compared
from optimizer.search.inquiry.eligibility import NOT_CHECKED, PASSED, Check
from optimizer.search.inquiry.finding import Finding


def compared_parts(found: Sequence[Compared], request: Mapping[str, Any]) -> Iterator[Part]:
    """One part of a section for each part that was named for comparison."""
    for one in found:
        yield Part(f"Why not {clean(one.name)}", tuple(_blocks(one, request)))


def _blocks(one: Compared, request: Mapping[str, Any]) -> Iterator[Block]:
    finding, name = one.finding, clean(one.name)
    if finding.impossible:
        yield Words(f"No part could meet the request: {'; '.join(map(clean, finding.impossible))}.")
        return
    yield Words(in_terms(" ".join(answer(finding, one.data))))
    failed = [check for check in _checks(finding) if check.verdict not in (PASSED, NOT_CHECKED)]
    if failed:
        rows = tuple(cells(*row) for row in check_rows(failed))
        yield Table(f"Checks that {name} fails, or passes in part", ("check", "verdict", "numbers"), rows)
    if finding.reaches and finding.largest is not None:
        yield _reached(finding, name, request)
        yield Words(in_terms(_sentences(proof(finding, request))), "note")
        setting = parts_list(one.data["near_misses"][0], request)
        caption = f"The setting of largest margin with {name}"
        yield Table(caption, ("position", "part"), tuple(cells(*pair) for pair in merged(setting)))


def _sentences(texts: Iterable[str]) -> str:
    return " ".join(text if text.endswith(".") else f"{text}." for text in texts)


def _checks(finding: Finding) -> Iterator[Check]:
    for subject in finding.subjects:
        yield from subject.checks
    yield from finding.settings


def _reached(finding: Finding, name: str, request: Mapping[str, Any]) -> Table:
    columns = reach_columns(finding, request)
    rows = tuple(
        (
            *cells(term(reach.name), *(column.cells[index] for column in columns[1:-1])),
            Cell(columns[-1].cells[index], tone="" if reach.margin >= 0.0 else "bad"),
        )
        for index, reach in enumerate(finding.reaches)
    )
    headings = tuple(column.heading.replace("\n", " ") for column in columns)
    numbers = frozenset(index for index, column in enumerate(columns) if column.right)
    return Table(f"What {name} reaches of each target", headings, rows, numbers)
