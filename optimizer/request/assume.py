"""Reads [assume.<role>] of a request: the values that fill the blanks of a catalog's columns."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import did_you_mean
from optimizer.quantities import QuantityError
from optimizer.request.values import either, listed, quantity
from optimizer.toml.place import dotted
from optimizer.toml.reading import Reading
from optimizer.toml.schema import Fault, Reader, Refused, as_written
from optimizer.vocabulary import COLUMNS, ROLES, Column
from optimizer.vocabulary.allowed import NO_EFFECT, refuse_impossible, single_kind


def read_assume(data: Mapping[str, Any], reading: Reading) -> None:
    """Read [assume.<role>], the values that fill blanks of one column; refuse what names no such column."""
    for role, columns in data.items():
        path = ("assume", role)
        if role not in ROLES:
            remedy = did_you_mean(role, ROLES)
            reading.refuse(path, None, "expected a role: " + listed(ROLES), remedy)
        elif not isinstance(columns, dict):
            remedy = f'write [{dotted(path)}] on a line of its own and below it, say, output_low = "50 mV"'
            reading.refuse(path, as_written(columns), "expected a table", remedy)
        else:
            for name, value in columns.items():
                _read_column(role, name, value, reading)


def _read_column(role: str, name: str, value: Any, reading: Reading) -> None:
    path = ("assume", role, name)
    known = [other.name for other in COLUMNS[role].values() if single_kind(other)]
    column = COLUMNS[role].get(name)
    kind = single_kind(column) if column else None
    if column is None or kind is None:
        rule = f"there is no such column in {role} catalogs"
        if column:
            rule = "a single value cannot fill this column"
        remedy = did_you_mean(name, known) or "those that can: " + ", ".join(known)
        reading.refuse(path, None, rule, remedy)
        return
    try:
        reading.values[path] = _reader(column, kind)(value)
    except Refused as refused:
        reading.refuse_faults(path, refused.faults)


def _reader(column: Column, kind: str) -> Reader:
    number = quantity(kind)

    def read(value: Any) -> float:
        found: float = number(value)
        try:
            refuse_impossible(column.name, found)
        except QuantityError as error:
            raise Refused(Fault(as_written(value), str(error))) from None
        return found

    return either("none", NO_EFFECT[column.name], read) if column.none_allowed else read
