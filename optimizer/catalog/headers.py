"""Which header of a file gives which column, and what its cells are then written in."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from difflib import SequenceMatcher

from optimizer.catalog.cells import Style
from optimizer.catalog.ledger import Stated
from optimizer.catalog.source_map import ColumnMap, FileMap, SourceMap
from optimizer.catalog.table import Table
from optimizer.errors import Problem, did_you_mean
from optimizer.quantities import KINDS, QuantityError, read_quantity
from optimizer.quantities.currencies import currency_code
from optimizer.vocabulary import COLUMNS, Column
from optimizer.vocabulary.allowed import value_kind

_WITH_UNIT = re.compile(r"([^(\[]*[^(\[ ]) ?[(\[] ?([^()\[\]]*[^()\[\] ]) ?[)\]]")
_NEAR = 0.8


@dataclass(frozen=True, slots=True)
class Binding:
    """Where one column of one file comes from: cell `index` of each row, or the constant `value`."""

    column: Column
    header: str
    index: int | None
    style: Style
    value: str | None = None


@dataclass(slots=True)
class Bound:
    """What a header line turned out to hold."""

    bindings: dict[str, Binding] = field(default_factory=dict)
    unused: list[str] = field(default_factory=list)
    problems: list[Problem] = field(default_factory=list)
    stated: list[Stated] = field(default_factory=list)


def split_unit(header: str) -> tuple[str, str | None]:
    """Split 'gbw (MHz)' or 'gbw [MHz]' into name and unit; the unit is None where there is none."""
    match = _WITH_UNIT.fullmatch(header)
    return (match[1], match[2]) if match else (header, None)


def known_names(roles: Sequence[str], file_map: FileMap) -> frozenset[str]:
    """Return every header that means something in a file of one of these roles."""
    names = {name for role in roles for name in COLUMNS[role]}
    mapped = {spec.header for spec in file_map.columns.values() if spec.header}
    return frozenset(names | mapped | set(file_map.ignore))


def bind(table: Table, role: str, source_map: SourceMap) -> Bound:
    """Bind the columns of `role` to the headers of the table; what is wrong is in `problems`."""
    binder = _Binder(table, role, source_map, source_map.of(table.name))
    for name in COLUMNS[role]:
        binder.column(name)
    binder.strangers()
    binder.leftovers()
    binder.repeated()
    return binder.bound


@dataclass(slots=True)
class _Binder:
    table: Table
    role: str
    source_map: SourceMap
    file_map: FileMap
    bound: Bound = field(default_factory=Bound)
    used: set[int] = field(default_factory=set)

    def column(self, name: str) -> None:
        spec = self.file_map.columns.get(name)
        if spec is not None and spec.value is not None:
            self._bind(COLUMNS[self.role][name], None, spec, spec.unit)
        elif spec is not None and spec.header is not None:
            self._mapped(COLUMNS[self.role][name], spec, spec.header)
        else:
            self._named(COLUMNS[self.role][name], spec or ColumnMap())

    def _mapped(self, column: Column, spec: ColumnMap, header: str) -> None:
        if header not in self.table.header:
            remedy = did_you_mean(header, filter(None, self.table.header))
            self._source_problem(
                column.name, "header", header, f"no such header in {self.table.file}", remedy
            )
            return
        if header in self.file_map.ignore:
            self._source_problem(
                column.name, "header", header, "this header is ignored and mapped, which is it?"
            )
        unit = spec.unit
        if unit is None:
            unit = split_unit(header)[1]
            unit = unit if unit and self._fits(column, unit) is None else None
        self._bind(column, self.table.header.index(header), spec, unit)

    def _named(self, column: Column, spec: ColumnMap) -> None:
        ignored = self.file_map.ignore
        places = [
            place
            for place, header in enumerate(self.table.header)
            if header not in ignored and split_unit(header)[0] == column.name
        ]
        if not places:
            self._absent(column)
            return
        self._bind(column, places[0], spec, spec.unit or split_unit(self.table.header[places[0]])[1])
        for place in places[1:]:
            self.used.add(place)
            if self.table.header[place] != self.table.header[places[0]]:
                rule = f"a second column for {column.name}, beside {self.table.header[places[0]]!r}"
                self._header_problem(
                    self.table.header[place], rule, "rename one, or ignore it in source.toml"
                )

    def _absent(self, column: Column) -> None:
        if not column.required:
            if column.name in self.file_map.columns:
                rule = f"no such header in {self.table.file}"
                self._source_problem(column.name, "", None, rule, 'name it: header = "..."')
            return
        strangers = (header for header in self.table.header if header and header not in COLUMNS[self.role])
        near = did_you_mean(column.name, strangers)
        remedy = near or f'a supplier\'s header is named in source.toml: {column.name} = {{ header = "..." }}'
        self._header_problem(None, f"the required column {column.name!r} is missing", remedy, column.name)

    def _bind(self, column: Column, place: int | None, spec: ColumnMap, unit: str | None) -> None:
        header = column.name if place is None else self.table.header[place]
        if place is not None:
            self.used.add(place)
        fault = self._fits(column, unit) if unit else None
        if fault and spec.unit:
            self._source_problem(column.name, "unit", unit, str(fault), fault.remedy)
        elif fault:
            self._header_problem(header, f"{unit!r} does not fit: {fault}", fault.remedy)
        if spec.part and (column.kind not in KINDS):
            self._source_problem(
                column.name, "part", spec.part, "only a column of single quantities has ranges"
            )
        if column.kind == "price" and unit and not fault:
            where = (self.source_map.file, None) if spec.unit else (self.table.file, self.table.header_line)
            self.bound.stated.append(Stated(where[0], currency_code(unit) or "", unit, where[1], header))
        known_unit = None if fault or column.kind == "price" else unit
        # a constant is written in TOML, where no decimal comma is known
        comma = self.table.decimal_comma and spec.value is None
        style = Style(comma, known_unit, spec.part if column.kind in KINDS else "", self.file_map.status)
        self.bound.bindings[column.name] = Binding(column, header, place, style, spec.value)

    def _fits(self, column: Column, unit: str) -> QuantityError | None:
        """Return what is wrong with this unit for this column, None where nothing is."""
        if column.kind == "price":
            return None if currency_code(unit) else QuantityError("expected an ISO 4217 code such as 'EUR'")
        kind = value_kind(column)
        if kind is None:
            return QuantityError(f"the column {column.name} has no unit")
        try:
            read_quantity(1, kind, unit=unit)
        except QuantityError as error:
            return error
        return None

    def strangers(self) -> None:
        """Report columns of source.toml that this role does not have."""
        for name in self.file_map.columns:
            if name not in COLUMNS[self.role]:
                rule = f"{self.role} have no such column"
                self._source_problem(name, "", None, rule, did_you_mean(name, COLUMNS[self.role]))

    def leftovers(self) -> None:
        """Sort out the headers that no column took."""
        for place, header in enumerate(self.table.header):
            if place in self.used or header in self.file_map.ignore:
                continue
            if not header:
                self._nameless(place)
                continue
            near = _nearest(header, COLUMNS[self.role])
            if near is None:
                self.bound.unused.append(header)
            else:
                remedy = f"rename it to {near!r}, or name it in `ignore` in source.toml"
                self._header_problem(header, f"an unknown column whose name is nearly {near!r}", remedy)

    def _nameless(self, place: int) -> None:
        for line, row in zip(self.table.lines, self.table.rows, strict=True):
            if row[place]:
                rule = f"column {place + 1} has cells and no header"
                self.bound.problems.append(
                    Problem(self.table.file, line, None, row[place], rule, "name the column")
                )
                return

    def repeated(self) -> None:
        """Report headers that stand twice."""
        for header, count in Counter(filter(None, self.table.header)).items():
            if count > 1 and header not in self.file_map.ignore:
                self._header_problem(
                    header, f"the header stands {count} times", "keep one, or rename the others"
                )

    def _header_problem(
        self, header: str | None, rule: str, remedy: str = "", column: str | None = None
    ) -> None:
        place = Problem(self.table.file, self.table.header_line, header or column, header, rule, remedy)
        self.bound.problems.append(place)

    def _source_problem(self, column: str, key: str, cell: str | None, rule: str, remedy: str = "") -> None:
        path = ("file", self.table.name, "columns", column) + ((key,) if key else ())
        self.bound.problems.append(self.source_map.complaint(path, cell, rule, remedy))


def _nearest(header: str, known: Mapping[str, Column]) -> str | None:
    """Return the column that this header nearly spells, None where it spells none."""
    plain = re.sub(r"[\W_]+", "_", split_unit(header)[0].casefold()).strip("_")
    scores = {name: _likeness(plain, name) for name in known}
    best = max(scores, key=lambda name: scores[name])
    return best if scores[best] >= _NEAR else None


def _likeness(header: str, name: str) -> float:
    if header == name:
        return 1.0
    if min(len(header), len(name)) < 3:
        return 0.0
    if sorted(header) == sorted(name):  # two letters swapped, which difflib underrates in short names
        return 0.99
    matcher = SequenceMatcher(None, header, name, autojunk=False)
    return matcher.ratio() if matcher.real_quick_ratio() >= _NEAR else 0.0
