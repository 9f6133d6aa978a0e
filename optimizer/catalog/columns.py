"""From a table's cells to columns in SI, with every cell that cannot be read as a Problem."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import TypeVar

import numpy as np

from optimizer.catalog.cells import (
    Price,
    number_reader,
    points_reader,
    price_reader,
    read_series,
    read_text,
    status_reader,
)
from optimizer.catalog.checks import crossed
from optimizer.catalog.headers import Binding, Bound
from optimizer.catalog.ledger import Stated
from optimizer.catalog.parts import Points
from optimizer.catalog.rows import Origin, Rows, is_points, is_text
from optimizer.catalog.source_map import SourceMap
from optimizer.catalog.table import Table
from optimizer.errors import Problem
from optimizer.quantities import QuantityError
from optimizer.vocabulary import COLUMNS, NAMES

T = TypeVar("T")


@dataclass(slots=True)
class Reading:
    """What one file holds: all its rows, by row what is wrong with it, and what its prices are in."""

    rows: Rows
    bad: dict[int, list[Problem]] = field(default_factory=lambda: defaultdict(list))
    problems: list[Problem] = field(default_factory=list)
    stated: list[Stated] = field(default_factory=list)

    def flawed(self) -> list[bool]:
        """Tell for each row whether something is wrong with it."""
        return [row in self.bad for row in range(len(self.rows.origin))]


def read_columns(table: Table, role: str, bound: Bound, *, place: int, source_map: SourceMap) -> Reading:
    """Read every column of `role`; `place` is the file's place in reading order.

    A problem of a constant from source.toml names that file, all others the row of the table.
    """
    reader = _Reader(
        table,
        bound,
        source_map,
        Reading(Rows(role, [Origin(place, table.file, line) for line in table.lines])),
    )
    for name, column in COLUMNS[role].items():
        if is_text(column):
            reader.text(name)
        elif is_points(column):
            reader.points(name)
        else:
            reader.number(name)
    reader.nameless(NAMES[role])
    reader.cross()
    return reader.reading


@dataclass(slots=True)
class _Reader:
    table: Table
    bound: Bound
    source_map: SourceMap
    reading: Reading

    def text(self, name: str) -> None:
        binding = self.bound.bindings.get(name)
        if binding is None:
            self.reading.rows.text[name] = [""] * self._size
            return
        readers = {"status": status_reader(binding.style), "series": read_series}
        self.reading.rows.text[name] = self._read(binding, readers.get(binding.column.kind, read_text), "")

    def number(self, name: str) -> None:
        binding = self.bound.bindings.get(name)
        if binding is None:
            self.reading.rows.number[name] = np.full(self._size, np.nan)
            return
        values = self._read(binding, number_reader(binding.column, binding.style), float("nan"))
        self.reading.rows.number[name] = np.array(values, dtype=np.float64)

    def points(self, name: str) -> None:
        binding = self.bound.bindings.get(name)
        blank: Points = ()
        if binding is None:
            self.reading.rows.points[name] = [blank] * self._size
        elif binding.column.kind == "price":
            unpriced: Price = (blank, None)
            prices = self._read(binding, price_reader(binding.style), unpriced)
            self.reading.rows.points[name] = [points for points, _ in prices]
            self._currencies(binding, [mark for _, mark in prices])
        else:
            self.reading.rows.points[name] = self._read(
                binding, points_reader(binding.column, binding.style), blank
            )

    def nameless(self, name: str) -> None:
        """A row that names no part can neither be bought nor told apart."""
        binding = self.bound.bindings.get(name)
        if binding is None:
            return
        for row, text in enumerate(self.reading.rows.text[name]):
            if not text:
                rule, remedy = f"a row needs the name of its {name}", "delete the row, or name it"
                self.reading.bad[row].append(self._problem(row, binding, rule, remedy))

    def cross(self) -> None:
        """What is wrong between the columns of one row."""
        for low, high, rows in crossed(self.reading.rows.number):
            upper = self.bound.bindings[high]
            for row in rows:
                rule = f"{low} is above {high}, which is {self._cell(row, upper)!r}"
                self.reading.bad[row].append(self._problem(row, self.bound.bindings[low], rule))
        for row, (series, values) in enumerate(self._listed()):
            if values and series != "list":
                rule = "values belong to the series 'list'"
                remedy = "write list as the series, or leave the values blank"
                self.reading.bad[row].append(self._problem(row, self.bound.bindings["values"], rule, remedy))

    def _listed(self) -> zip[tuple[str, Points]]:
        rows = self.reading.rows
        return zip(rows.text.get("series", ()), rows.points.get("values", ()), strict=True)

    @property
    def _size(self) -> int:
        return len(self.table.rows)

    def _read(self, binding: Binding, read: Callable[[str], T], blank: T) -> list[T]:
        """Read each different cell once, and report every row of one that cannot be read."""
        if binding.index is None:
            return [self._constant(binding, read, blank)] * self._size
        cells = [row[binding.index] for row in self.table.rows]
        values: dict[str, T] = {}
        faults: dict[str, QuantityError] = {}
        for cell in dict.fromkeys(cells):
            try:
                values[cell] = read(cell)
            except QuantityError as error:
                values[cell] = blank
                faults[cell] = error
        if faults:
            self._report(binding, cells, faults)
        return [values[cell] for cell in cells]

    def _report(self, binding: Binding, cells: Sequence[str], faults: Mapping[str, QuantityError]) -> None:
        for row, cell in enumerate(cells):
            if cell in faults:
                self.reading.bad[row].append(
                    self._problem(row, binding, str(faults[cell]), faults[cell].remedy)
                )

    def _constant(self, binding: Binding, read: Callable[[str], T], blank: T) -> T:
        try:
            return read(binding.value or "")
        except QuantityError as error:
            path = ("file", self.table.name, "columns", binding.column.name, "value")
            complaint = self.source_map.complaint(path, binding.value, str(error), error.remedy)
            self.reading.problems.append(complaint)
            return blank

    def _currencies(self, binding: Binding, marks: Sequence[tuple[str, str] | None]) -> None:
        seen: set[tuple[str, str]] = set()
        for row, mark in enumerate(marks):
            if mark is not None and mark not in seen:
                seen.add(mark)
                line = None if binding.index is None else self.table.lines[row]
                file = self.source_map.file if binding.index is None else self.table.file
                self.reading.stated.append(Stated(file, *mark, line, binding.header))

    def _cell(self, row: int, binding: Binding) -> str:
        return binding.value or "" if binding.index is None else self.table.rows[row][binding.index]

    def _problem(self, row: int, binding: Binding, rule: str, remedy: str = "") -> Problem:
        return Problem(
            self.table.file, self.table.lines[row], binding.header, self._cell(row, binding), rule, remedy
        )
