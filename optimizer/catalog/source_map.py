"""What a source.toml beside the catalogs says: how a supplier's own export is to be read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from optimizer.catalog.text import Bytes
from optimizer.errors import Problem

KeyPath = tuple[str | int, ...]


@dataclass(frozen=True, slots=True)
class ColumnMap:
    """Where one column comes from: a header (None: its own name), with the unit of bare numbers and
    the part of a range ('low', 'high', or '' for the whole cell); or a constant `value`.
    """

    header: str | None = None
    unit: str | None = None
    value: str | None = None
    part: str = ""


@dataclass(frozen=True, slots=True)
class FileMap:
    """What source.toml says about one file."""

    cheapest: bool = False
    leave_out: bool = False
    ignore: tuple[str, ...] = ()
    status: Mapping[str, str] = field(default_factory=dict)
    columns: Mapping[str, ColumnMap] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class SourceMap:
    """One source.toml, or the defaults where there is none (`source` is None).

    `lines` holds the line of each key, as far as it is known.
    """

    file: str
    lines: Mapping[KeyPath, int] = field(default_factory=dict)
    source: Bytes | None = None
    currency: str | None = None
    encoding: str = "utf-8"
    files: Mapping[str, FileMap] = field(default_factory=dict)
    problems: tuple[Problem, ...] = ()

    def of(self, name: str) -> FileMap:
        """Return what is said about the catalog file of this name."""
        return self.files.get(name, FileMap())

    def complaint(self, path: KeyPath, value: object, rule: str, remedy: str = "") -> Problem:
        """Return the problem of the key at this path; `value` is what was found (None: not shown)."""
        cell = None if value is None else str(value)
        return Problem(self.file, line_of(path, self.lines), dotted(path), cell, rule, remedy)


def line_of(path: KeyPath, lines: Mapping[KeyPath, int]) -> int | None:
    """Return the line of a key, or of the nearest table around it; None where nothing is known."""
    known = (lines[path[:end]] for end in range(len(path), 0, -1) if path[:end] in lines)
    return next(known, None)


def dotted(path: KeyPath) -> str:
    """Write a key path as TOML does.

    >>> dotted(("file", "opamps.csv", "ignore"))
    'file."opamps.csv".ignore'
    """
    return ".".join(str(key) if str(key).replace("_", "").isalnum() else f'"{key}"' for key in path)


def tidy(text: str) -> str:
    """Return text with stray, non-breaking and repeated spaces made single ones."""
    return " ".join(text.split())
