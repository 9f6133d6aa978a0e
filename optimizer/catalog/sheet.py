"""Reads the first sheet of an .xlsx workbook into a Table, where its optional reader is installed."""

from __future__ import annotations

import io
import warnings
from collections.abc import Iterable
from itertools import islice

from optimizer.catalog.table import Table, build_table, no_rows, sheet_record
from optimizer.errors import InputError, MissingExtraError, Problem
from optimizer.input_file import InputFile

_MOST_ROWS = 1_048_576  # of one sheet, by the file format


def read_sheet(source: InputFile) -> Table:
    """Cut the first sheet into a Table; lines are its row numbers, and decimals have a point.

    Raises InputError where it is no workbook or has no rows, MissingExtraError without openpyxl.
    """
    cells = [(line, row) for line, row in _rows(source) if row]
    if not cells:
        raise InputError([no_rows(source.file, "the first sheet is empty")])
    header_line, header = cells[0]
    records = [sheet_record(line, row + ("",) * (len(header) - len(row))) for line, row in cells[1:]]
    return build_table(source.file, header_line, header, records, delimiter=",")


def _rows(source: InputFile) -> list[tuple[int, tuple[str, ...]]]:
    try:
        from openpyxl import load_workbook
    except ImportError:
        message = (
            f'{source.file}: reading .xlsx needs openpyxl: pip install "luxsift[report]", or save it as CSV'
        )
        raise MissingExtraError(message) from None
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # openpyxl warns about styles and extensions that hold no data
            workbook = load_workbook(io.BytesIO(source.data), read_only=True, data_only=True)
            sheet = workbook.worksheets[0]
            sheet.reset_dimensions()  # what the file claims of its size need not be true
            rows = islice(sheet.iter_rows(values_only=True), _MOST_ROWS)
            return [(line, _texts(row)) for line, row in enumerate(rows, start=1) if any(row)]
    except Exception as error:  # a damaged archive makes zipfile, the XML parser and openpyxl raise anything
        rule = f"this is no .xlsx workbook that can be read: {type(error).__name__}"
        raise InputError([Problem(source.file, None, None, None, rule, "save it again, or as CSV")]) from None


def _texts(row: Iterable[object]) -> tuple[str, ...]:
    texts = [_text(value) for value in row]
    while texts and not texts[-1]:
        texts.pop()
    return tuple(texts)


def _text(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, float):
        return repr(int(value)) if value.is_integer() and abs(value) < 1e15 else repr(value)
    return " ".join(str(value).split())
