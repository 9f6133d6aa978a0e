"""Edits of catalog files, as they happen between one look at a record and the next."""

from __future__ import annotations

import csv
from collections.abc import Callable
from pathlib import Path

Row = dict[str, str]


def rewritten(path: Path, change: Callable[[list[Row]], list[Row]]) -> None:
    """Write the rows of a catalog as `change` gives them back."""
    with path.open(newline="", encoding="utf-8-sig") as file:
        reader = csv.DictReader(file)
        rows, names = list(reader), list(reader.fieldnames or ())
    changed = change(rows)
    names += [name for row in changed for name in row if name not in names]
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, list(dict.fromkeys(names)), restval="", lineterminator="\n")
        writer.writeheader()
        writer.writerows(changed)


def with_cells(path: Path, part: str, /, **cells: str) -> None:
    """Change cells of one part (or family)."""
    rewritten(path, lambda rows: [row | cells if _is(row, part) else row for row in rows])


def without(path: Path, part: str) -> None:
    """Drop one part (or family)."""
    rewritten(path, lambda rows: [row for row in rows if not _is(row, part)])


def with_copy(path: Path, part: str, /, **cells: str) -> None:
    """Add a copy of one part (or family) with other cells, the name among them."""
    rewritten(path, lambda rows: [*rows, *(row | cells for row in rows if _is(row, part))])


def _is(row: Row, part: str) -> bool:
    return part in (row.get("part"), row.get("family")) and (row.get("part") or row.get("family")) == part
