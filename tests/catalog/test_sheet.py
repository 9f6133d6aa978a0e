"""An .xlsx workbook is read as a CSV file is, where its reader is installed."""

from __future__ import annotations

import builtins
from collections.abc import Sequence
from typing import Any

import pytest
from openpyxl import Workbook

from optimizer.errors import MissingExtraError
from tests.catalog.made import GOOD, Folder, named, says

BOOK = {"opamps": ["opamps.xlsx"]}


def _save(folder: Folder, *rows: Sequence[object]) -> None:
    book = Workbook()
    sheet = book.worksheets[0]
    for row in rows:
        sheet.append(list(row))
    book.create_sheet("notes").append(["not read"])
    book.save(folder.path / "opamps.xlsx")


def _numbers(row: dict[str, str]) -> list[object]:
    """The cells of a good row, with numbers where a spreadsheet has numbers."""
    part, maker, *_ = row.values()
    return [part, maker, 1.85, 2.7, 5.5, 0.001, 10_000_000, 8e-9, 2e-12, "500 µV"]


def test_numbers_and_text_are_read(folder: Folder) -> None:
    header = list(GOOD["opamps"])
    _save(
        folder, header, _numbers(named("opamps", 1)), [None] * 10, _numbers(named("opamps", 2)), [None, "  "]
    )
    catalogs = folder.read(files=BOOK)
    parts = catalogs.opamps
    assert parts.text["part"].tolist() == ["ZQ1001", "ZQ1002"]
    assert parts.points["price"][0] == ((1.0, 1.85),)
    assert parts.number["gbw"].tolist() == [10e6, 10e6]
    assert parts.number["voltage_noise"].tolist() == [8e-9, 8e-9]
    assert catalogs.sources[0].rows == 2


def test_part_numbers_that_are_numbers(folder: Folder) -> None:
    row = _numbers(named("opamps", 1))
    _save(folder, list(GOOD["opamps"]), [4711, *row[1:]], [4711.5, *row[1:]])
    assert folder.read(files=BOOK).opamps.text["part"].tolist() == ["4711", "4711.5"]


def test_problems_name_the_row_of_the_sheet(folder: Folder) -> None:
    header = list(GOOD["opamps"])
    good = _numbers(named("opamps", 1))
    bad = [*_numbers(named("opamps", 2))[:6], "#N/A", *good[7:]]
    flag = [*_numbers(named("opamps", 3))[:6], True, *good[7:]]
    surplus = [*_numbers(named("opamps", 4)), "surplus"]
    _save(folder, header, good, [], bad, flag, surplus)
    first, second, third = sorted(folder.problems(files=BOOK), key=lambda problem: problem.row or 0)
    assert (first.row, first.column, first.cell) == (4, "gbw", "#N/A")
    assert (second.row, second.column, second.cell) == (5, "gbw", "True")
    assert third.row == 6
    says(third, "11 cells, the header has 10")


def test_empty_sheet(folder: Folder) -> None:
    _save(folder)
    says(folder.problem(files=BOOK), "first sheet is empty")


@pytest.mark.parametrize("content", [b"", b"PK\x03\x04 damaged", b"part,maker\n"])
def test_damaged_workbook(folder: Folder, content: bytes) -> None:
    folder.write("opamps.xlsx", content)
    says(folder.problem(files=BOOK), "no .xlsx workbook", "save it again")


def test_without_the_reader_says_what_to_install(folder: Folder, monkeypatch: pytest.MonkeyPatch) -> None:
    real = builtins.__import__

    def missing(name: str, *args: Any, **kwargs: Any) -> Any:
        if name == "openpyxl":
            raise ImportError(name)
        return real(name, *args, **kwargs)

    folder.write("opamps.xlsx", b"")
    monkeypatch.setattr(builtins, "__import__", missing)
    with pytest.raises(MissingExtraError, match=r'opamps\.xlsx.*pip install "luxsift\[report\]"'):
        folder.read(files=BOOK)
