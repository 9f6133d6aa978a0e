"""Reads the tables of a request by the schema, keeping every problem beside what could be read."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import did_you_mean, nearest
from optimizer.quantities import QuantityError
from optimizer.request.reading import Reading
from optimizer.request.schema import KEYS, REQUIRED, TABLES, Name, names_in, tables_with
from optimizer.request.values import Fault, Reader, Refused, as_written, either, listed, quantity
from optimizer.toml.place import Place, dotted
from optimizer.vocabulary import COLUMNS, ROLES, Column
from optimizer.vocabulary.allowed import NO_EFFECT, refuse_impossible, single_kind


def read_tables(data: Mapping[str, Any], place: Place) -> Reading:
    """Return all that the tables of a request hold, and every key that is unknown, wrong or missing."""
    reading = Reading(place)
    _read_table((), data, reading)
    _refuse_missing(data, reading)
    return reading


def _read_table(table: Name, data: Mapping[str, Any], reading: Reading) -> None:
    reading.tables.add(table)
    for name, value in data.items():
        path = (*table, name)
        if path in KEYS:
            _read_key(path, value, reading)
        elif path not in TABLES:
            _refuse_unknown(path, value, reading)
        elif not isinstance(value, dict):
            _refuse_no_table(path, value, reading)
        elif path == ("assume",):
            _read_assume(value, reading)
        else:
            _read_table(path, value, reading)


def _read_key(path: Name, value: Any, reading: Reading) -> None:
    reading.cells[path] = as_written(value)
    try:
        reading.values[path] = KEYS[path].read(value)
    except Refused as refused:
        reading.refuse_faults(path, refused.faults)


def _refuse_no_table(path: Name, value: Any, reading: Reading) -> None:
    name = dotted(path)
    remedy = f"write [{name}] on a line of its own and the keys below it"
    if isinstance(value, list):
        remedy = f"write [{name}] in single brackets, once"
    reading.refuse(path, as_written(value), "expected a table", remedy)


def _refuse_unknown(path: Name, value: Any, reading: Reading) -> None:
    """Refuse an unknown key, and count the key that was meant as met, so that it is not missed too."""
    table, name = path[:-1], path[-1]
    known, elsewhere = names_in(table), tables_with(name)
    near = nearest(name, known)
    remedy = _belongs(path) or did_you_mean(name, known) or "known here: " + ", ".join(known)
    what = "table" if isinstance(value, dict) else "key"
    reading.refuse(path, None, f"there is no such {what}", remedy)
    if len(elsewhere) == 1:
        reading.wrong.add((*elsewhere[0], name))
    elif near:
        reading.wrong.add((*table, near))


def _belongs(path: Name) -> str:
    """Return in which other table a key of this name stands."""
    if path == ("targets", "full_scale"):
        return "full_scale is always graded, its limit is light.strongest"
    tables = tables_with(path[-1])
    if not tables or path[:-1] not in TABLES:
        return ""
    if tables == ((),):
        return f"{path[-1]} stands at the top, above the first [table]"
    return f"{path[-1]} stands in " + " or ".join(f"[{dotted(table)}]" for table in tables if table)


def _refuse_missing(data: Mapping[str, Any], reading: Reading) -> None:
    for table in dict.fromkeys(key[:-1] for key in REQUIRED):
        missing = [
            key
            for key in REQUIRED
            if key[:-1] == table and key not in reading.values and not reading.is_wrong(key)
        ]
        if missing and table[0] not in data:
            examples = ", ".join(f"{key[-1]} = {KEYS[key].example}" for key in missing)
            reading.refuse(table, None, "this table is missing", f"state [{dotted(table)}] with {examples}")
            continue
        for key in missing:
            remedy = f"state {key[-1]} = {KEYS[key].example}, or what yours is"
            reading.refuse(key, None, "this key is missing", remedy)


def _read_assume(data: Mapping[str, Any], reading: Reading) -> None:
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
        reading.assume[role, name] = _reader(column, kind)(value)
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
