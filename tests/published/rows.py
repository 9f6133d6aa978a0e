"""The published check values: one row a value or list, with its source and the source's tolerance."""

from __future__ import annotations

import csv
import json
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

FILE = Path(__file__).parent / "published.csv"


@dataclass(frozen=True)
class Row:
    """One published value. `computed` is what the collection found from the stated inputs."""

    id: str
    topic: str
    quantity: str
    use: str
    inputs: dict[str, Any]
    expected: tuple[float, ...]
    computed: tuple[float, ...]
    tol_type: str
    tol: float
    read_status: str
    source: str
    note: str

    @property
    def label(self) -> str:
        """For the test's name: which row, how it is used, and whether its source was read."""
        return f"{self.id}, {self.use}, {self.read_status.split('(')[0].split(';')[0].strip()}"

    def allowed(self, value: float) -> float:
        """The absolute tolerance around one published value."""
        return self.tol if self.tol_type == "abs" else self.tol * abs(value)


def _numbers(text: str) -> tuple[float, ...]:
    value = json.loads(text)
    return tuple(map(float, value)) if isinstance(value, list) else (float(value),)


def _row(cells: dict[str, str]) -> Row:
    source = ", ".join(
        cells[name]
        for name in ("source_title", "source_by", "source_year", "section_page", "address")
        if cells[name] not in ("", "-")
    )
    return Row(
        id=cells["id"],
        topic=cells["topic"],
        quantity=cells["quantity"],
        use=cells["use"],
        inputs=json.loads(cells["inputs_json"]),
        expected=_numbers(cells["expected"]),
        computed=_numbers(cells["computed"]),
        tol_type=cells["tol_type"],
        tol=float(cells["tol"]),
        read_status=cells["read_status"],
        source=source,
        note=cells["note"],
    )


@cache
def rows() -> dict[str, Row]:
    """All rows of the file by id."""
    with FILE.open(encoding="utf-8", newline="") as lines:
        found = [_row(cells) for cells in csv.DictReader(lines)]
    named = {row.id: row for row in found}
    if len(named) != len(found):
        raise ValueError("two rows of published.csv share an id")
    return named
