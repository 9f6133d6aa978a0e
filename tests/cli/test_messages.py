"""Errors as lines for a person."""

from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.cli import main
from optimizer.cli.messages import ALIKE, LONGEST_CELL, LONGEST_WORDS, MOST, StudyError, error_lines
from optimizer.errors import InputError, OutputError, Problem


def test_one_line_a_problem() -> None:
    problems = [Problem("a.csv", 3, "gbw", "x\ny\x1b[31m", "expected a frequency", "write '1 MHz'")]
    lines = error_lines(InputError(problems))
    assert lines[0] == "luxsift: 1 problem"
    assert lines[1].startswith("  a.csv, line 3, gbw: found ")
    assert lines[1].endswith("expected a frequency (write '1 MHz')")
    assert all(line.isprintable() for line in lines)


def test_a_long_run_of_like_problems_is_shortened_and_counted() -> None:
    many = [Problem("a.csv", row, "gbw", "x", "expected a frequency") for row in range(5000)]
    other = Problem("a.csv", 9, "price", "y", "expected a price")
    lines = error_lines(InputError([*many, other]))
    assert len(lines) == ALIKE + 3
    assert f"... and {5000 - ALIKE:,} more like these in a.csv, gbw" in lines[ALIKE + 1]
    assert "price" in lines[-1]


def test_problems_of_many_kinds_are_capped_and_counted() -> None:
    many = [Problem("a.csv", row, f"column{row}", "x", "expected y") for row in range(1000)]
    lines = error_lines(InputError(many))
    assert len(lines) == MOST + 2
    assert lines[-1].strip() == f"... and {1000 - MOST} more"


def heading(file: str, request: str) -> str:
    return error_lines(StudyError([Problem(file, 3, "gbw", "x", "expected a frequency")], request))[0]


def test_the_folder_that_catalogs_are_named_from_stands_above_where_it_is_another(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "receiver").mkdir()
    monkeypatch.chdir(tmp_path)
    said = "luxsift: 1 problem; catalogs are named as seen from the folder receiver"
    assert heading("opamps.csv", "receiver/request.toml") == said
    assert heading("../catalogs/opamps.csv", "receiver/request.toml") == said
    for file, request in (
        ("opamps.csv", "request.toml"),
        ("opamps.csv", str(tmp_path / "request.toml")),
        ("opamps.csv", "receiver/../request.toml"),
        ("receiver/request.toml", "receiver/request.toml"),
        ("command line", "receiver/request.toml"),
        (str(tmp_path / "opamps.csv"), "receiver/request.toml"),
    ):
        assert heading(file, request) == "luxsift: 1 problem"


def test_a_problem_in_a_catalog_of_another_folder_is_told_with_that_folder(
    request_file: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    opamps = request_file.parent / "opamps.csv"
    opamps.write_text(opamps.read_text().replace("350 kHz", "fast", 1))
    monkeypatch.chdir(request_file.parent.parent)
    assert main(["shortlist", f"{request_file.parent.name}/request.toml"]) == 2
    first, second = capsys.readouterr().err.splitlines()
    assert first.endswith(f"catalogs are named as seen from the folder {request_file.parent.name}")
    assert second.startswith("  opamps.csv, line 2, gbw: found 'fast'")
    monkeypatch.chdir(request_file.parent)
    assert main(["shortlist", "request.toml"]) == 2
    assert capsys.readouterr().err.splitlines()[0] == "luxsift: 1 problem"


def test_other_errors_are_one_line() -> None:
    assert error_lines(OutputError("x: cannot\nbe written")) == ["luxsift: x: cannot be written"]


def test_long_texts_are_cut_where_they_are_printed_and_whole_in_the_error() -> None:
    cell, rule = "9" * 100_000, "expected " + "a frequency " * 1000
    error = InputError([Problem("a.csv", row, "gbw", cell, rule, f"write '{cell}'") for row in range(9)])
    lines = error_lines(error)
    assert len(lines) == ALIKE + 2
    assert all(len(line) < LONGEST_CELL + 2 * LONGEST_WORDS + 60 for line in lines)
    assert "9" * (LONGEST_CELL - 3) + "...'" in lines[1]
    assert error.problems[0].cell == cell
    assert cell in str(error)
