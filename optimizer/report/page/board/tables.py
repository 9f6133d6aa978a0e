"""Columns of the terminal's report as tables of a page."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.report.layout import Column
from optimizer.report.page.blocks import Table, cells
from optimizer.report.page.terms import in_terms

TOTALS: Mapping[str, str] = {
    "cost": "cost a board",
    "supply_current": "supply current",
    "area": "area",
    "line_items": "line items",
    "opamp_parts": "op-amp part numbers",
    "packages": "op-amp packages",
    "placements": "placed parts",
}
"""Each total as the page calls it."""


def of_columns(caption: str, columns: Sequence[Column], marked: frozenset[int] = frozenset()) -> Table:
    """A table of `columns`, whose first names each row."""
    rows = range(len(columns[0].cells))
    return Table(
        caption,
        tuple(_line(column.heading) for column in columns),
        tuple(cells(*(_line(column.cells[row]) for column in columns)) for row in rows),
        numbers=frozenset(place for place, column in enumerate(columns) if column.right),
        marked=marked,
    )


def termed(text: str) -> str:
    """`text` with targets and totals called as in a sentence."""
    for name, said in TOTALS.items():
        text = re.sub(rf"(?<![\w-]){name}(?![\w-])", said, text) if "_" in name else text
    return in_terms(text)


def called(name: str) -> str:
    """What the page calls a total."""
    return TOTALS.get(name, clean(name))


def lowered(heading: str) -> str:
    """A heading as it goes on after a colon."""
    return f"{heading[:1].lower()}{heading[1:]}"


def priced(amount: str, data: Mapping[str, Any]) -> str:
    """An amount with the record's currency."""
    return f"{amount} {clean(data['currency'])}" if data.get("currency") else amount


def _line(text: str) -> str:
    return " ".join(text.split())
