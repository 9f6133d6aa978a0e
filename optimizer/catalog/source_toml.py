"""Reads the optional source.toml beside the catalogs, and says what is wrong in it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path, PurePath
from typing import Any

from optimizer.catalog.files import read_catalog_file
from optimizer.catalog.source_map import ColumnMap, FileMap, SourceMap, tidy
from optimizer.catalog.text import is_text_encoding
from optimizer.errors import Problem, did_you_mean
from optimizer.input_file import InputFile
from optimizer.quantities.currencies import CURRENCIES
from optimizer.toml.document import read_document
from optimizer.toml.lines import KeyPath
from optimizer.toml.place import Place
from optimizer.vocabulary import COLUMNS
from optimizer.vocabulary.allowed import STATUSES

NAME = "source.toml"


def read_source_map(path: Path, written: str) -> SourceMap:
    """Read the source.toml beside the catalog at `path`, which the request writes as `written`.

    What is wrong in it is in `problems`; raises InputError where it cannot be read at all.
    """
    beside = path.parent / NAME
    file = PurePath(written).with_name(NAME).as_posix()
    if not beside.exists():
        return SourceMap(Place(file))
    source = read_catalog_file(beside, file)
    document = read_document(source)
    return _Walker(SourceMap(document.place), beside.parent).whole(document.tables, source)


@dataclass(slots=True)
class _Walker:
    """Walks the tables of one source.toml and collects what is wrong."""

    blank: SourceMap
    folder: Path
    problems: list[Problem] = field(default_factory=list)

    def whole(self, data: Mapping[str, Any], source: InputFile) -> SourceMap:
        self._known((), data, ("currency", "encoding", "file"))
        currency = self._text(("currency",), data.get("currency"))
        if currency is not None and currency not in CURRENCIES:
            self._wrong(
                ("currency",),
                currency,
                "expected an ISO 4217 code such as 'EUR'",
                _near(currency, CURRENCIES),
            )
            currency = None
        encoding = self._text(("encoding",), data.get("encoding")) or "utf-8"
        if not is_text_encoding(encoding):
            rule = "expected the name of a text encoding such as 'utf-8', 'cp1252' or 'utf-16'"
            self._wrong(("encoding",), encoding, rule)
            encoding = "utf-8"
        tables = self._table(("file",), data.get("file"))
        files = {name: self._one_file(("file", name), table) for name, table in tables.items()}
        return replace(
            self.blank,
            source=source,
            currency=currency,
            encoding=encoding,
            files=files,
            problems=tuple(self.problems),
        )

    def _one_file(self, path: KeyPath, value: object) -> FileMap:
        table = self._table(path, value)
        name = str(path[-1])
        if name not in _names(self.folder):
            rule = "no such file stands beside source.toml"
            self._wrong(path, None, rule, did_you_mean(name, _names(self.folder)))
        self._known(path, table, ("duplicates", "bad_rows", "ignore", "status", "columns"))
        return FileMap(
            cheapest=self._word(path, table, "duplicates", ("error", "cheapest")) == "cheapest",
            leave_out=self._word(path, table, "bad_rows", ("error", "leave out")) == "leave out",
            ignore=self._ignored((*path, "ignore"), table.get("ignore", [])),
            status=self._statuses((*path, "status"), table.get("status")),
            columns=self._columns((*path, "columns"), table.get("columns")),
        )

    def _ignored(self, path: KeyPath, value: object) -> tuple[str, ...]:
        if not isinstance(value, list):
            self._wrong(path, value, 'expected a list of headers such as ["Image"]')
            return ()
        texts = (self._text((*path, place), item) for place, item in enumerate(value))
        return tuple(text for text in texts if text is not None)

    def _statuses(self, path: KeyPath, value: object) -> dict[str, str]:
        table = self._table(path, value)
        for word in table:
            self._word(path, table, word, STATUSES)
        return {tidy(word): status for word, status in table.items() if status in STATUSES}

    def _columns(self, path: KeyPath, value: object) -> dict[str, ColumnMap]:
        table = self._table(path, value)
        known = {name for columns in COLUMNS.values() for name in columns}
        self._known(path, table, known)
        return {name: self._column((*path, name), entry) for name, entry in table.items() if name in known}

    def _column(self, path: KeyPath, value: object) -> ColumnMap:
        if not isinstance(value, dict):
            self._table(path, value)
            return ColumnMap()
        table = value
        self._known(path, table, ("header", "unit", "value", "part"))
        constant = table.get("value")
        if constant is not None and ("header" in table or "part" in table):
            self._wrong(path, None, "a constant value has no header and no part")
        if not table:
            self._wrong(path, None, "expected header, unit, value or part")
        return ColumnMap(
            header=self._text((*path, "header"), table.get("header")),
            unit=self._text((*path, "unit"), table.get("unit")),
            value=None if constant is None else self._constant((*path, "value"), constant) or "",
            part=self._word(path, table, "part", ("low", "high")) or "",
        )

    def _constant(self, path: KeyPath, value: object) -> str | None:
        if isinstance(value, int | float) and not isinstance(value, bool):
            return repr(value)
        return self._text(path, value)

    def _text(self, path: KeyPath, value: object) -> str | None:
        if value is None or isinstance(value, str):
            return None if value is None else tidy(value)
        self._wrong(path, value, "expected text in quotes")
        return None

    def _word(self, path: KeyPath, table: Mapping[str, Any], key: str, known: tuple[str, ...]) -> str | None:
        value = table.get(key)
        if value is None or (isinstance(value, str) and value in known):
            return value
        rule = "expected " + " or ".join(repr(word) for word in known)
        self._wrong((*path, key), value, rule, _near(value, known))
        return None

    def _table(self, path: KeyPath, value: object) -> Mapping[str, Any]:
        if value is None or isinstance(value, dict):
            return value or {}
        self._wrong(
            path, value, "expected a table: " + _TABLE_EXAMPLES.get(str(path[-1]), '{ header = "..." }')
        )
        return {}

    def _known(self, path: KeyPath, table: Mapping[str, Any], known: Iterable[str]) -> None:
        names = sorted(known)
        for key in table:
            if key not in names:
                rule = "unknown key" if path[-1:] != ("columns",) else "unknown column"
                self._wrong((*path, key), None, rule, did_you_mean(key, names) or _listed(names))

    def _wrong(self, path: KeyPath, value: object, rule: str, remedy: str = "") -> None:
        self.problems.append(self.blank.complaint(path, value, rule, remedy))


_TABLE_EXAMPLES = {
    "file": '[file."opamps.csv"]',
    "status": '{ "In Production" = "active" }',
    "columns": 'gbw = { header = "Gain Bandwidth", unit = "MHz" }',
}


def _near(word: object, known: Iterable[str]) -> str:
    return did_you_mean(word, known) if isinstance(word, str) else ""


def _listed(names: list[str]) -> str:
    return "known here: " + ", ".join(names) if len(names) < 10 else ""


def _names(folder: Path) -> list[str]:
    return sorted(entry.name for entry in folder.iterdir() if entry.is_file() and entry.name != NAME)
