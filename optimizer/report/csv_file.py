"""The shortlist as CSV text: candidates, then near misses, one column a value, SI units."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterable
from io import StringIO
from typing import Any

from optimizer.record import Record
from optimizer.record.rows import columns, flat

# A spreadsheet runs a cell that begins so; a foreign separator inside a cell may begin a new one.
FORMULA = re.compile(r"(^|[;,|\t\r\n])([\s\u200b\ufeff]*[=+\-@\uff1d\uff0b\uff0d\uff20\t\r\n])")


def csv_text(record: Record) -> str:
    """Every candidate and near miss as one row of `meets` and the columns of `Record.table`.

    Numbers are in SI units, empty where a figure does not exist; text that a spreadsheet would run
    as a formula is led by an apostrophe.
    """
    names = columns(record.data["request"])
    groups = (("yes", record.candidates), ("no", record.near_misses))
    rows = ((meets, flat(row)) for meets, group in groups for row in group)
    return table_text(
        ("meets", *names), ((meets, *(values.get(name) for name in names)) for meets, values in rows)
    )


def table_text(names: Iterable[str], rows: Iterable[Iterable[Any]]) -> str:
    """A heading and rows as CSV text; text that a spreadsheet would run as a formula is neutralised."""
    buffer = StringIO(newline="")
    writer = csv.writer(buffer, quoting=csv.QUOTE_NONNUMERIC, lineterminator="\r\n")
    writer.writerow(tuple(names))
    for row in rows:
        writer.writerow(tuple(_cell(value) for value in row))
    return buffer.getvalue()


def neutral(text: str) -> str:
    """`text` with an apostrophe before whatever a spreadsheet would run as a formula."""
    return FORMULA.sub(r"\1'\2", text)


def _cell(value: Any) -> Any:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return neutral(value) if isinstance(value, str) else value
