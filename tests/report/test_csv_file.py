"""CSV: every candidate and near miss, and no cell that a spreadsheet would run."""

from __future__ import annotations

import csv
from dataclasses import replace
from io import StringIO
from pathlib import Path

import pytest

from optimizer.errors import OutputError
from optimizer.record import write_text
from optimizer.report.csv_file import csv_text, neutral
from tests.made_up import CANDIDATE, MISS, outcome, record


def rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(StringIO(text, newline="")))


def test_candidates_come_before_near_misses() -> None:
    table = rows(csv_text(record(outcome((CANDIDATE, CANDIDATE), (MISS,)))))
    assert [(row["meets"], row["rank"]) for row in table] == [("yes", "1"), ("yes", "2"), ("no", "3")]
    assert float(table[0]["bandwidth"]) == 24123.4567
    assert table[2]["dynamic_range"] == ""
    assert table[2]["missed"] == "snr; dynamic_range; cost"
    assert float(table[2]["margin"]) == -1.0


# Source: OWASP, "CSV Injection": a cell beginning with = + - @, tab or carriage return is run as a formula,
# and the field separator must not let a new cell begin so. (from memory)
@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t=", "\r=", " =", "\uff1d"])
def test_cells_that_would_run_are_neutralised(start: str) -> None:
    cell = f'{start}HYPERLINK("x")'
    table = rows(csv_text(record(outcome((replace(CANDIDATE, opamp=cell, photodiode=f"a;{cell}"),)))))
    assert table[0]["opamp"].startswith("'")
    assert ";'" in table[0]["photodiode"]


@pytest.mark.parametrize("name", ["YZD-21", "a+b", "3-4", "part, no. 2", 'the "best"'])
def test_harmless_names_stay_as_they_are(name: str) -> None:
    assert neutral(name) == name
    assert rows(csv_text(record(outcome((replace(CANDIDATE, opamp=name),)))))[0]["opamp"] == name


def test_a_csv_that_cannot_be_written_leaves_the_old_file(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="there is no folder"):
        write_text(tmp_path / "nowhere" / "x.csv", csv_text(record()))
    write_text(tmp_path / "x.csv", csv_text(record()))
    assert len(rows((tmp_path / "x.csv").read_text(encoding="utf-8"))) == 1
