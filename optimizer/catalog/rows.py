"""The rows of one catalog file, or of several, as columns in SI, each row with where it came from."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import chain, compress
from typing import NamedTuple

import numpy as np

from optimizer.catalog.parts import Floats, Points
from optimizer.vocabulary import COLUMNS, Column

_TEXTS = ("text", "status", "series")


class Origin(NamedTuple):
    """Where a row stands: the file's place in reading order, its name, and the line."""

    place: int
    file: str
    line: int


@dataclass(slots=True)
class Rows:
    """Columns of one role, defaults not yet filled in: '' / NaN / () where a cell is unknown."""

    role: str
    origin: list[Origin]
    text: dict[str, list[str]] = field(default_factory=dict)
    number: dict[str, Floats] = field(default_factory=dict)
    points: dict[str, list[Points]] = field(default_factory=dict)

    def keep(self, wanted: Sequence[bool]) -> Rows:
        """Return the rows that are wanted."""
        chosen = np.asarray(wanted, dtype=bool)
        return Rows(
            self.role,
            list(compress(self.origin, wanted)),
            {name: list(compress(cells, wanted)) for name, cells in self.text.items()},
            {name: values[chosen] for name, values in self.number.items()},
            {name: list(compress(cells, wanted)) for name, cells in self.points.items()},
        )

    def known(self, name: str) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
        """Tell for each row whether its cell in this column is known."""
        if name in self.number:
            return ~np.isnan(self.number[name])
        cells = self.text[name] if name in self.text else self.points[name]
        return np.fromiter(map(bool, cells), dtype=bool, count=len(cells))


def is_text(column: Column) -> bool:
    """Tell whether the column is kept as text."""
    return column.kind in _TEXTS


def is_points(column: Column) -> bool:
    """Tell whether the column is kept as pairs: pairs themselves, price breaks and lists of values."""
    return column.kind == "price" or ":" in column.kind


def merge(role: str, files: Sequence[Rows]) -> Rows:
    """Return the rows of all files of one role, in the order read."""
    whole = Rows(role, list(chain.from_iterable(rows.origin for rows in files)))
    for name, column in COLUMNS[role].items():
        if is_text(column):
            whole.text[name] = list(chain.from_iterable(rows.text[name] for rows in files))
        elif is_points(column):
            whole.points[name] = list(chain.from_iterable(rows.points[name] for rows in files))
        else:
            whole.number[name] = np.concatenate([np.empty(0), *(rows.number[name] for rows in files)])
    return whole
