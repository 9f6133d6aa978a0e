"""Reads catalog files as bytes, and those bytes into a Table, CSV or spreadsheet."""

from __future__ import annotations

from pathlib import Path, PurePath

from optimizer.catalog.headers import known_names, split_unit
from optimizer.catalog.sheet import read_sheet
from optimizer.catalog.source_map import SourceMap
from optimizer.catalog.table import Table, read_table
from optimizer.catalog.text import decode
from optimizer.errors import did_you_mean
from optimizer.input_file import InputFile, read_input


def read_catalog_file(path: Path, file: str) -> InputFile:
    """Read a file of the catalogs' folder; raises InputError where it cannot be read."""
    return read_input(path, file, expected="a catalog file", hint=_neighbour)


def cut(source: InputFile, roles: tuple[str, ...], source_map: SourceMap) -> Table:
    """Cut a catalog file for one of these roles into a Table; raises InputError, MissingExtraError."""
    name = PurePath(source.file).name
    if name.lower().endswith(".xlsx"):
        return read_sheet(source)
    known = known_names(roles, source_map.of(name))
    text = decode(source, source_map.encoding)
    return read_table(text, source.file, lambda header: header in known or split_unit(header)[0] in known)


def _neighbour(folder: Path, wanted: str) -> str:
    try:
        names = sorted(entry.name for entry in folder.iterdir() if entry.is_file())
    except (OSError, ValueError):
        return "its folder does not exist either"
    return did_you_mean(wanted, names)
