"""Series and letter codes held to published lists and examples.

Source: the rows of published.csv with topics e_series (lists of IEC 60063) and rkm (examples of
IEC 60062 codes); each row names its source, where in it, and whether it was read or is from memory.
"""

from __future__ import annotations

import csv
import json
from pathlib import Path

import pytest

from optimizer.quantities import read_quantity
from optimizer.series import SERIES, values

with (Path(__file__).parent / "published.csv").open(encoding="utf-8", newline="") as _file:
    ROWS = {row["id"]: row for row in csv.DictReader(_file) if row["topic"] in ("e_series", "rkm")}

LISTS = {identity: row for identity, row in ROWS.items() if row["quantity"] in SERIES}
CODES = {identity: row for identity, row in ROWS.items() if row["topic"] == "rkm"}

pytestmark = pytest.mark.published


def test_no_row_is_left_out() -> None:
    used = {*LISTS, *CODES, "SER-07", "SER-08"}
    assert used == set(ROWS)
    assert {row["quantity"] for row in LISTS.values()} == set(SERIES)


@pytest.mark.parametrize("identity", LISTS)
def test_every_member_of_a_series(identity: str) -> None:
    row = LISTS[identity]
    expected = json.loads(row["expected"])
    assert list(SERIES[row["quantity"]]) == expected  # tolerance 0: a list
    top = expected[-1]
    assert values(row["quantity"], expected[0], top).tolist() == expected


def test_members_in_a_decade() -> None:
    order = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")
    assert [len(SERIES[name]) for name in order] == json.loads(ROWS["SER-07"]["expected"])


def test_usual_tolerance_of_each_series_spans_the_gaps() -> None:
    # SER-08, rule of thumb: neighbours' tolerance bands about meet, so the half gap is near the tolerance.
    order = ("E3", "E6", "E12", "E24", "E48", "E96", "E192")
    for name, percent in zip(order, json.loads(ROWS["SER-08"]["expected"]), strict=True):
        half_gap = (10 ** (1 / len(SERIES[name])) - 1) / 2
        assert 0.5 < half_gap / (percent / 100) < 1.5


@pytest.mark.parametrize("identity", CODES)
def test_letter_codes(identity: str) -> None:
    row = CODES[identity]
    kind = {"ohm": "resistance", "F": "capacitance"}[row["unit"]]
    found = [read_quantity(code, kind) for code in json.loads(row["inputs_json"])["code"]]
    assert found == pytest.approx(json.loads(row["expected"]), rel=float(row["tol"]))
    # ours is tighter than the source asks: the float nearest to the decimal text
    assert found == json.loads(row["expected"])
