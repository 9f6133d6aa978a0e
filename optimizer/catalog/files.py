"""Reads catalog files as bytes, and those bytes into a Table, CSV or spreadsheet."""

from __future__ import annotations

import hashlib
from pathlib import Path, PurePath

from optimizer.catalog.headers import known_names, split_unit
from optimizer.catalog.sheet import read_sheet
from optimizer.catalog.source_map import SourceMap
from optimizer.catalog.table import Table, read_table
from optimizer.catalog.text import Bytes, decode
from optimizer.errors import InputError, Problem, did_you_mean


def read_bytes(path: Path, file: str) -> Bytes:
    """Return the file's bytes with their SHA-256; raises InputError where it cannot be read."""
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        raise InputError(
            [Problem(file, None, None, None, "there is no such file", _neighbour(path))]
        ) from None
    except IsADirectoryError:
        raise InputError(
            [Problem(file, None, None, None, "this is a folder, expected a catalog file")]
        ) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError([Problem(file, None, None, None, f"the file cannot be read: {reason}")]) from None
    return Bytes(file, data, hashlib.sha256(data).hexdigest())


def cut(source: Bytes, roles: tuple[str, ...], source_map: SourceMap) -> Table:
    """Cut a catalog file for one of these roles into a Table; raises InputError, MissingExtraError."""
    name = PurePath(source.file).name
    if name.lower().endswith(".xlsx"):
        return read_sheet(source)
    known = known_names(roles, source_map.of(name))
    text = decode(source, source_map.encoding)
    return read_table(text, source.file, lambda header: header in known or split_unit(header)[0] in known)


def _neighbour(path: Path) -> str:
    try:
        names = sorted(entry.name for entry in path.parent.iterdir() if entry.is_file())
    except (OSError, ValueError):
        return "its folder does not exist either"
    return did_you_mean(path.name, names)
