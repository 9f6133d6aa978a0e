"""Reads a request file into a frozen request, or into every problem that stands in its way."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from pathlib import Path

from optimizer import request_rules, request_text
from optimizer.errors import InputError, Problem
from optimizer.request_build import build
from optimizer.request_lines import key_lines
from optimizer.request_read import read_tables
from optimizer.request_reading import Place
from optimizer.request_types import Request

__all__ = ["Draft", "examine", "read_request"]


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


def read_request(path: str | Path) -> Request:
    """Read a request file; keys that it leaves out take their defaults.

    Args:
        path: the TOML file, UTF-8.

    Returns:
        The request, in SI (temperatures in C, angles in deg, gains in dB).

    Raises:
        InputError: with every problem of the file: what cannot be read as TOML, unknown, missing and
            impossible keys, each with its line.
    """
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
    data = request_text.read_bytes(where)
    text = request_text.decode(data, str(where))
    tables = request_text.parse(text, str(where))
    place = Place(str(where), key_lines(text))
    reading = read_tables(tables, place)
    request_rules.check(reading)
    return Draft(
        request=build(reading, where),
        problems=tuple(sorted(reading.problems, key=_by_line)),
        place=place,
        sha256=hashlib.sha256(data).hexdigest(),
        catalogs_known=not any(key[0] == "catalogs" for key in reading.wrong),
    )


def _by_line(problem: Problem) -> int:
    """Order problems as the file reads; those without a line (missing tables) come first."""
    return problem.row or 0
