"""Cells folded to a width: every character kept, breaks where a name has joints."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len

from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import paragraph


def folded(text: str, width: int) -> list[str]:
    return list(lines((Column("", (text,), gives=True),), [width], 0))


@pytest.mark.parametrize(
    ("text", "width", "expected"),
    [
        ("input_capacitance_differential", 18, ["input_capacitance_", "differential"]),
        ("input_capacitance_differential", 14, ["input_", "capacitance_", "differential"]),
        ("YZA-0674-1B", 9, ["YZA-0674-", "1B"]),
        ("355 % to spare, comfortable", 15, ["355 % to spare,", "comfortable"]),
        ("word exactly-8", 8, ["word", "exactly-", "8"]),
        ("blank: offset_drift 12", 16, ["blank:", "offset_drift 12"]),
        ("a value: price\u00a0136", 14, ["a value:", "price 136"]),
        ("XXXXXXXXXXXX", 5, ["XXXXX", "XXXXX", "XX"]),
        ("between -40 C", 10, ["between", "-40 C"]),
        ("\u4e2d\u4e2d\u4e2d", 4, ["\u4e2d\u4e2d", "\u4e2d"]),
        ("a\nb", 9, ["a", "b"]),
        ("", 9, [""]),
    ],
)
def test_breaks_stand_between_words_and_at_the_joints_of_a_word_too_wide(
    text: str, width: int, expected: list[str]
) -> None:
    assert folded(text, width) == expected


@given(st.text("ab -_9\u4e2d", max_size=40), st.integers(2, 20))
def test_no_line_is_too_wide_and_nothing_is_lost(text: str, width: int) -> None:
    found = folded(text, width)
    assert all(cell_len(line) <= width for line in found)
    assert "".join("".join(found).split()) == "".join(text.split())


def test_columns_that_may_be_folded_share_what_is_lacking() -> None:
    columns = (
        Column("a", ("x" * 30,), gives=True),
        Column("b", ("y" * 12,)),
        Column("c", ("z" * 20,), gives=True),
    )
    assert fit(columns, 66) == [30, 12, 20]
    assert fit(columns, 52) == [18, 12, 18]
    assert fit(columns, 10) == [8, 12, 8]


def test_a_list_of_rows_may_be_parted_and_a_number_keeps_its_unit() -> None:
    assert paragraph("(rows 1, 2, 4, 6, 7, 9, 10)", 20) == ["(rows 1, 2, 4, 6, 7,", "9, 10)"]
    assert paragraph("limit is some 1.5 kHz; or 3 % to spare", 20) == [
        "limit is some",
        "1.5 kHz; or 3 % to",
        "spare",
    ]
