"""A request as far as its file can be read, with every problem that stands in its way."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from optimizer.errors import InputError, Problem, did_you_mean
from optimizer.input_file import read_input
from optimizer.request import rules
from optimizer.request.build import build
from optimizer.request.schema import SCHEMA
from optimizer.request.types import Request
from optimizer.toml.document import Document, read_document
from optimizer.toml.place import Place
from optimizer.toml.reading import by_line
from optimizer.toml.tables import read_tables


@dataclass(frozen=True, slots=True)
class Draft:
    """A request as far as it could be read, beside its problems.

    `request` may be run only without problems; with them its `catalogs` still tell which files are
    meant, unless `catalogs_known` is False. `place` finds the line of a key.
    """

    request: Request
    problems: tuple[Problem, ...]
    place: Place
    sha256: str
    catalogs_known: bool


def read(path: str | Path) -> Request:
    """Return the request of a file; raises InputError with every problem in it."""
    draft = examine(path)
    if draft.problems:
        raise InputError(draft.problems)
    return draft.request


def examine(path: str | Path) -> Draft:
    """Read a request file as far as it can be read, with the problems met.

    Raises:
        InputError: the file cannot be opened, is not UTF-8 or not TOML, or is a board file.
    """
    where = Path(path)
    source = read_input(where, str(where), expected="a request file", hint=other_requests)
    document = read_document(source)
    if is_board(document.tables):
        rule, remedy = "this is a board file, expected a request", "`luxsift board` plans it"
        raise InputError([Problem(source.file, None, None, None, rule, remedy)])
    return drafted(document, where)


def is_board(tables: Mapping[str, Any]) -> bool:
    """Tell whether the tables of a file are those of a board rather than of a request."""
    return "channels" in tables and "light" not in tables


def drafted(document: Document, path: Path) -> Draft:
    """Return the request that a TOML file at `path` holds, with the problems met."""
    reading = read_tables(document.tables, SCHEMA, document.place)
    rules.check(reading)
    return Draft(
        request=build(reading, path),
        problems=tuple(sorted(reading.problems, key=by_line)),
        place=document.place,
        sha256=document.sha256,
        catalogs_known=not any(key[0] == "catalogs" for key in reading.wrong),
    )


def other_requests(folder: Path, wanted: str, *, besides: str = "source.toml") -> str:
    """Return a remedy out of the requests in the folder, but no source.toml and not `besides`."""
    known_others = {"source.toml", besides}
    try:
        names = sorted(entry.name for entry in folder.glob("*.toml") if entry.name not in known_others)
    except (OSError, ValueError):
        return ""
    near = did_you_mean(wanted, names)
    if near or not names:
        return near or "`luxsift start` writes a request to begin from"
    return "in that folder: " + ", ".join(names[:5])
