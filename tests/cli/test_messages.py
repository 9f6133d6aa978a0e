"""Errors as lines for a person."""

from __future__ import annotations

from optimizer.cli.messages import ALIKE, LONGEST_CELL, LONGEST_WORDS, MOST, error_lines
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
