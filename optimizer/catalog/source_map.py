"""What a source.toml beside the catalogs says: how a supplier's own export is to be read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from optimizer.errors import Problem
from optimizer.input_file import InputFile
from optimizer.toml.lines import KeyPath
from optimizer.toml.place import Place


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

    `place` finds the line of a key.
    """

    place: Place
    source: InputFile | None = None
    currency: str | None = None
    encoding: str = "utf-8"
    files: Mapping[str, FileMap] = field(default_factory=dict)
    problems: tuple[Problem, ...] = ()

    @property
    def file(self) -> str:
        """The name of the source.toml, beside that of the catalog as the request writes it."""
        return self.place.file

    def of(self, name: str) -> FileMap:
        """Return what is said about the catalog file of this name."""
        return self.files.get(name, FileMap())

    def complaint(self, path: KeyPath, value: object, rule: str, remedy: str = "") -> Problem:
        """Return the problem of the key at this path; `value` is what was found (None: not shown)."""
        return self.place.problem(path, None if value is None else str(value), rule, remedy)


def tidy(text: str) -> str:
    """Return text with stray, non-breaking and repeated spaces made single ones."""
    return " ".join(text.split())
