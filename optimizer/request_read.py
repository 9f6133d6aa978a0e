"""Reads the tables of a request by the schema, keeping every problem beside what could be read."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import did_you_mean, nearest
from optimizer.request_assume import read_assume
from optimizer.request_reading import Place, Reading, dotted
from optimizer.request_schema import KEYS, REQUIRED, TABLES, Name, names_in, tables_with
from optimizer.request_values import Refused, as_written


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
            read_assume(value, reading)
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
