"""A request as far as its file can be read, with every problem that stands in its way."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from optimizer.errors import InputError, Problem, did_you_mean
from optimizer.input_file import read_input
from optimizer.request import rules
from optimizer.request.build import build
from optimizer.request.tables import read_tables
from optimizer.request.types import Request
from optimizer.toml.lines import key_lines
from optimizer.toml.place import Place
from optimizer.toml.text import decode, parse


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
        InputError: the file cannot be opened, is not UTF-8 or not TOML.
    """
    where = Path(path)
    source = read_input(where, str(where), expected="a request file", hint=_other_requests)
    text = decode(source.data, source.file)
    tables = parse(text, source.file)
    place = Place(source.file, key_lines(text))
    reading = read_tables(tables, place)
    rules.check(reading)
    return Draft(
        request=build(reading, where),
        problems=tuple(sorted(reading.problems, key=_by_line)),
        place=place,
        sha256=source.sha256,
        catalogs_known=not any(key[0] == "catalogs" for key in reading.wrong),
    )


def _by_line(problem: Problem) -> int:
    """Order problems as the file reads; those without a line (missing tables) come first."""
    return problem.row or 0


def _other_requests(folder: Path, wanted: str) -> str:
    """Return a remedy out of the requests in the folder."""
    try:
        names = sorted(entry.name for entry in folder.glob("*.toml") if entry.name != "source.toml")
    except (OSError, ValueError):
        return ""
    near = did_you_mean(wanted, names)
    if near or not names:
        return near or "`luxsift start` writes a request to begin from"
    return "in that folder: " + ", ".join(names[:5])
