"""From the text of a catalog file to its header and rows, each with the line that it starts on."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import PurePath

from optimizer.errors import InputError, Problem

_DELIMITERS = (",", ";", "\t")
_BLANK = ' "\r\n'
_DECIMAL_COMMA = re.compile(r"[0-9],[0-9]|^[+-]?,[0-9]").search
_DELIMITER_NAMES = {",": "comma", ";": "semicolon", "\t": "tab"}


@dataclass(frozen=True, slots=True)
class Table:
    """One catalog file, cut into cells.

    `rows` hold a cell for each header, spaces tidied; `lines` the line (1 = first) that each row
    starts on. `broken` are the rows that could not be cut so, one Problem each. `decimal_comma`: the
    file is cut at semicolons, and some cell has a comma between digits.
    """

    file: str
    header: tuple[str, ...]
    header_line: int
    rows: tuple[tuple[str, ...], ...]
    lines: tuple[int, ...]
    broken: tuple[Problem, ...]
    decimal_comma: bool

    @property
    def name(self) -> str:
        """The file's name without its folder."""
        return PurePath(self.file).name

    @property
    def data_rows(self) -> int:
        """How many rows of data the file has, those that cannot be used among them."""
        return len(self.rows) + len(self.broken)


@dataclass(frozen=True, slots=True)
class _Record:
    """What the csv reader made of one row: its lines, and its cells or why there are none."""

    line: int
    last_line: int
    cells: tuple[str, ...]
    fault: str | None = None


def read_table(text: str, file: str, is_known: Callable[[str], bool]) -> Table:
    """Cut CSV text into a Table.

    `is_known` tells whether a header names a known column; the delimiter (comma, semicolon, tab)
    is the one under which most headers do. Raises InputError for what concerns the whole file.
    """
    delimiter = _delimiter(text, is_known)
    records = _records(text, delimiter)
    header = next((record for record in records if _filled(record)), None)
    if header is None or not text.strip("".join(_DELIMITERS) + _BLANK):
        raise InputError([no_rows(file, "the file is empty")])
    if header.fault is not None:
        raise InputError([Problem(file, header.line, None, None, header.fault)])
    data = [record for record in records if _filled(record)]
    return build_table(file, header.line, header.cells, data, delimiter=delimiter)


def build_table(
    file: str, header_line: int, header: tuple[str, ...], records: Sequence[_Record], *, delimiter: str
) -> Table:
    """Sort the records into rows and broken ones; raises InputError where no row is left to read."""
    faults = [(record, _fault(record, len(header), delimiter)) for record in records]
    broken = [Problem(file, record.line, None, None, *fault) for record, fault in faults if fault]
    _refuse_swallowed(file, [record for record, fault in faults if fault])
    if not records:
        raise InputError([no_rows(file, "there is a header and no row of data")])
    good = [record for record, fault in faults if not fault]
    rows = tuple(record.cells for record in good)
    lines = tuple(record.line for record in good)
    comma = delimiter == ";" and any(_DECIMAL_COMMA(cell) for cells in rows for cell in cells if "," in cell)
    return Table(file, header, header_line, rows, lines, tuple(broken), decimal_comma=comma)


def sheet_record(line: int, cells: tuple[str, ...]) -> _Record:
    """Return a row of a spreadsheet as a record of one line."""
    return _Record(line, line, cells)


def no_rows(file: str, rule: str) -> Problem:
    """Say that a file holds nothing to read."""
    return Problem(file, None, None, None, rule, "expected a header line and one row for each part")


def _delimiter(text: str, is_known: Callable[[str], bool]) -> str:
    """Return the delimiter that gives the most known headers, then the most cells."""

    def score(delimiter: str) -> tuple[int, int]:
        record = next((record for record in _records(text, delimiter) if _filled(record)), None)
        cells = record.cells if record else ()
        return sum(map(is_known, cells)), len(cells)

    return max(_DELIMITERS, key=score)


def _records(text: str, delimiter: str) -> Iterator[_Record]:
    # newline="" leaves line ends inside quotes alone, so that the reader counts physical lines
    stream = io.StringIO(text, newline="")
    reader = csv.reader(stream, delimiter=delimiter, strict=True, skipinitialspace=True)
    while True:
        line = reader.line_num + 1
        try:
            cells = next(reader)
        except StopIteration:
            return
        except csv.Error as error:
            yield _Record(line, reader.line_num, (), _csv_fault(str(error)))
        else:
            yield _Record(line, reader.line_num, tuple([" ".join(cell.split()) for cell in cells]))


def _csv_fault(message: str) -> str:
    if message.startswith("unexpected end"):
        return "a quote is opened here and never closed"
    if "field limit" in message:
        return "a cell of more than 100,000 characters: most likely a quote that is never closed"
    return f"a closing quote must end its cell; {message}"


def _filled(record: _Record) -> bool:
    return record.fault is not None or any(record.cells)


def _fault(record: _Record, width: int, delimiter: str) -> tuple[str, str] | None:
    """Return rule and remedy for a record that is no row of this width."""
    if record.fault is not None:
        return record.fault, 'write a quote inside a quoted cell twice: "3.3"" disc"'
    if len(record.cells) == width:
        return None
    name = _DELIMITER_NAMES[delimiter]
    rule = f"the row has {len(record.cells)} cells, the header has {width}"
    return rule, f"put a cell that holds a {name} or a line break in double quotes"


def _refuse_swallowed(file: str, faulty: Sequence[_Record]) -> None:
    """Refuse a faulty row that runs over several lines: nobody can tell how many rows it ate."""
    problems = [
        Problem(
            file,
            record.line,
            None,
            None,
            (record.fault or "the row has a wrong number of cells")
            + f"; it runs on to line {record.last_line}",
            "close the quote that begins here",
        )
        for record in faulty
        if record.last_line > record.line
    ]
    if problems:
        raise InputError(problems)
