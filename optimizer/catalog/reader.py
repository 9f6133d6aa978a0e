"""Reads the catalogs of one run: every file, every problem, one frozen result."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from optimizer.catalog.columns import Reading, read_columns
from optimizer.catalog.defaults import finish
from optimizer.catalog.duplicates import sort_out
from optimizer.catalog.files import cut, read_catalog_file
from optimizer.catalog.headers import Bound, bind
from optimizer.catalog.ledger import Stated, settle
from optimizer.catalog.parts import Catalogs, LeftOut, Parts, Source
from optimizer.catalog.rows import Rows, merge
from optimizer.catalog.source_map import FileMap, SourceMap
from optimizer.catalog.source_toml import read_source_map
from optimizer.catalog.table import Table
from optimizer.errors import InputError, Problem
from optimizer.vocabulary import ROLES


@dataclass(frozen=True, slots=True)
class ReadOptions:
    """What the request says about reading: `assume` maps (role, column) to the SI value of blanks,
    `quantity` is the build quantity, `currency` that of the limits (None: unstated); file names are
    relative to `folder`.
    """

    assume: Mapping[tuple[str, str], float] = field(default_factory=dict)
    quantity: int = 1
    currency: str | None = None
    folder: Path = Path(".")


@dataclass(frozen=True, slots=True)
class FileResult:
    """One catalog file, read: its good rows, and all that is to be said about the others."""

    rows: Rows
    source: Source
    file_map: FileMap
    unused: tuple[str, ...]
    left_out: tuple[LeftOut, ...]
    problems: tuple[Problem, ...]


def read_catalogs(paths: Mapping[str, Sequence[str]], options: ReadOptions) -> Catalogs:
    """Read the catalog files of all roles.

    Args:
        paths: role -> file names as the request writes them.
        options: see ReadOptions.

    Returns:
        All parts in SI, blanks filled as the contract says, and what was left out on the user's word.

    Raises:
        InputError: with every problem of every file, in reading order.
        MissingExtraError: an .xlsx file, and its reader is not installed.
    """
    run = Run(options)
    parts = {role: run.role(role, paths.get(role, ())) for role in ROLES}
    currency, clashes = settle(run.stated, options.currency)
    run.problems += clashes
    if run.problems:
        raise InputError(dict.fromkeys(run.problems))
    sources = (*run.sources, *run.map_sources())
    return Catalogs(**parts, sources=sources, left_out=tuple(run.left_out), currency=currency)


@dataclass(slots=True)
class Run:
    """Collects over the files of one run."""

    options: ReadOptions
    problems: list[Problem] = field(default_factory=list)
    sources: list[Source] = field(default_factory=list)
    left_out: list[LeftOut] = field(default_factory=list)
    stated: list[Stated] = field(default_factory=list)
    maps: dict[Path, SourceMap | None] = field(default_factory=dict)

    def role(self, role: str, names: Sequence[str]) -> Parts:
        """Read all files of a role into one."""
        if not names:
            self.problems.append(
                Problem("the request", None, f"catalogs.{role}", None, "no catalog file is named")
            )
        for name in dict.fromkeys(name for name in names if names.count(name) > 1):
            self.problems.append(Problem(name, None, None, None, "this file is listed twice", "list it once"))
        results = [result for name in dict.fromkeys(names) if (result := self.file(role, name))]
        rows = merge(role, [result.rows for result in results])
        cheapest = [result.file_map.cheapest for result in results for _ in result.rows.origin]
        sorted_out = sort_out(rows, cheapest, self.options.quantity)
        parts, wrong = finish(rows.keep(sorted_out.wanted), self.options.assume)
        self.left_out += [*(row for result in results for row in result.left_out), *sorted_out.left_out]
        self.problems += [*sorted_out.problems, *wrong]
        return parts

    def file(self, role: str, written: str) -> FileResult | None:
        """Read one file; None where nothing of it can be read."""
        try:
            result = self._file(role, written)
        except InputError as error:
            self.problems += error.problems
            return None
        if result is not None:
            self.sources.append(result.source)
            self.problems += result.problems
        return result

    def _file(self, role: str, written: str) -> FileResult | None:
        path = self.options.folder / written
        source = read_catalog_file(path, written)
        source_map = self._map(path, written)
        if source_map is None:
            return None
        table = cut(source, (role,), source_map)
        bound = bind(table, role, source_map)
        reading = read_columns(table, role, bound, place=len(self.sources), source_map=source_map)
        self.stated += [*bound.stated, *reading.stated]
        return _settled(
            table, reading, bound, Source(written, source.sha256, table.data_rows), source_map.of(table.name)
        )

    def _map(self, path: Path, written: str) -> SourceMap | None:
        """Return the source.toml of the file's folder, read once a run; None where it is unreadable."""
        if path.parent not in self.maps:
            self.maps[path.parent] = None  # stays so where reading raises, so that it is said once
            source_map = read_source_map(path, written)
            self.problems += source_map.problems
            if source_map.currency:
                self.stated.append(
                    Stated(source_map.file, source_map.currency, source_map.currency, None, "currency")
                )
            self.maps[path.parent] = source_map
        return self.maps[path.parent]

    def map_sources(self) -> list[Source]:
        """Return every source.toml that was read."""
        found = (source_map.source for source_map in self.maps.values() if source_map)
        return [Source(source.file, source.sha256, 0) for source in found if source]


def _settled(table: Table, reading: Reading, bound: Bound, source: Source, file_map: FileMap) -> FileResult:
    """Leave out the bad rows, or report them, as the user's word has it."""
    bad = [*table.broken, *(problem for problems in reading.bad.values() for problem in problems)]
    bad.sort(key=lambda problem: problem.row or 0)
    problems = [*bound.problems, *reading.problems]
    left_out: list[LeftOut] = []
    rows = reading.rows
    if not file_map.leave_out:
        problems += bad
    else:
        left_out = _left_out(bad)
        rows = rows.keep([not flawed for flawed in reading.flawed()])
        if not rows.origin:
            problems.append(
                Problem(source.file, None, None, None, "every row is bad and left out", left_out[0].reason)
            )
    return FileResult(rows, source, file_map, tuple(bound.unused), tuple(left_out), tuple(problems))


def _left_out(bad: Sequence[Problem]) -> list[LeftOut]:
    """Return one entry for each bad row, with all that is wrong with it."""
    reasons: dict[tuple[str, int], list[str]] = {}
    for problem in bad:
        column = f"{problem.column}: " if problem.column else ""
        cell = f"found {problem.cell!r}, " if problem.cell is not None else ""
        reasons.setdefault((problem.file, problem.row or 0), []).append(column + cell + problem.rule)
    return [LeftOut(file, row, "; ".join(texts)) for (file, row), texts in reasons.items()]
