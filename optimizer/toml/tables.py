"""Reads the tables of a TOML file by a schema, keeping every problem beside what could be read."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import did_you_mean, nearest
from optimizer.toml.place import Place
from optimizer.toml.reading import Reading
from optimizer.toml.schema import Name, Refused, Schema, as_written


def read_tables(data: Mapping[str, Any], schema: Schema, place: Place) -> Reading:
    """Return all that the tables of a file hold, and every key that is unknown, wrong or missing."""
    reading = Reading(schema, place)
    _fill(reading, data)
    return reading


def _fill(reading: Reading, data: Mapping[str, Any]) -> None:
    _read_table((), data, reading)
    _refuse_missing(data, reading)


def _read_table(table: Name, data: Mapping[str, Any], reading: Reading) -> None:
    schema = reading.schema
    reading.tables.add(table)
    for name, value in data.items():
        path = (*table, name)
        if path in schema.keys:
            _read_key(path, value, reading)
        elif path in schema.lists:
            _read_list(path, value, reading)
        elif path not in schema.tables:
            _refuse_unknown(path, value, reading)
        elif not isinstance(value, dict):
            _refuse_no_table(path, value, reading)
        elif path in schema.free:
            schema.free[path](value, reading)
        else:
            _read_table(path, value, reading)


def _read_key(path: Name, value: Any, reading: Reading) -> None:
    reading.cells[path] = as_written(value)
    try:
        reading.values[path] = reading.schema.keys[path].read(value)
    except Refused as refused:
        reading.refuse_faults(path, refused.faults)


def _read_list(path: Name, value: Any, reading: Reading) -> None:
    heading = reading.schema.heading(path)
    items = reading.items.setdefault(path, [])
    if not isinstance(value, list):
        remedy = f"write {heading} in double brackets, once for each, and the keys of each below it"
        reading.refuse(path, as_written(value), "expected a list of tables", remedy)
        return
    for number, entry in enumerate(value):
        place = reading.place.within((*path, number))
        item = Reading(reading.schema.lists[path], place, problems=reading.problems)
        if isinstance(entry, dict):
            _fill(item, entry)
            items.append(item)
        else:
            reading.wrong.add(path)
            item.refuse((), as_written(entry), "expected a table", f"write {heading} and its keys below it")


def _refuse_no_table(path: Name, value: Any, reading: Reading) -> None:
    heading = reading.schema.heading(path)
    remedy = f"write {heading} on a line of its own and the keys below it"
    if isinstance(value, list):
        remedy = f"write {heading} in single brackets, once"
    reading.refuse(path, as_written(value), "expected a table", remedy)


def _refuse_unknown(path: Name, value: Any, reading: Reading) -> None:
    """Refuse an unknown key, and count the key that was meant as met, so that it is not missed too."""
    schema, table, name = reading.schema, path[:-1], path[-1]
    known, elsewhere = schema.names_in(table), schema.tables_with(name)
    near = nearest(name, known)
    stands = schema.stands(name) if table in schema.tables else ""
    remedy = schema.hints.get(path) or stands or did_you_mean(name, known)
    what = "table" if isinstance(value, dict) or _is_list_of_tables(value) else "key"
    reading.refuse(path, None, f"there is no such {what}", remedy or "known here: " + ", ".join(known))
    if len(elsewhere) == 1:
        reading.wrong.add((*elsewhere[0], name))
    elif near:
        reading.wrong.add((*table, near))


def _is_list_of_tables(value: Any) -> bool:
    return isinstance(value, list) and bool(value) and all(isinstance(item, dict) for item in value)


def _refuse_missing(data: Mapping[str, Any], reading: Reading) -> None:
    schema = reading.schema
    for table in dict.fromkeys(key[:-1] for key in schema.required):
        missing = [
            key
            for key in schema.required
            if key[:-1] == table and key not in reading.values and not reading.is_wrong(key)
        ]
        if missing and table and table[0] not in data:
            examples = ", ".join(f"{key[-1]} = {schema.keys[key].example}" for key in missing)
            remedy = f"state {schema.heading(table)} with {examples}"
            reading.refuse(table, None, "this table is missing", remedy)
            continue
        for key in missing:
            remedy = f"state {key[-1]} = {schema.keys[key].example}, or what yours is"
            reading.refuse(key, None, "this key is missing", remedy)
