"""What `exposure` prints and writes: the worst first, in words and not in colour alone."""

from __future__ import annotations

import csv
from dataclasses import replace
from io import StringIO

import pytest
from rich.cells import cell_len

from optimizer.report import to_text
from optimizer.report.exposure import CSV_COLUMNS, exposure_csv, exposure_lines
from optimizer.review.exposure import Exposures, Stale
from optimizer.review.supply import Exposure
from optimizer.review.withdrawal import VANISHED
from tests.review.test_exposure import USUAL

RARE = replace(
    USUAL,
    part="YZD-7",
    uses=("photodiode",),
    status="last-time-buy",
    stock=40.0,
    drop_ins=0,
    values=0,
    fewest=0,
)


def printed(*parts: Exposure, stale: tuple[Stale, ...] = (), width: int = 80) -> str:
    lines = exposure_lines(Exposures(parts, stale), 3, width)
    text = to_text(lines, colour=False)
    assert max(cell_len(line) for line in text.split("\n")) <= width
    return text


def words(*parts: Exposure, stale: tuple[Stale, ...] = ()) -> str:
    return " ".join(printed(*parts, stale=stale).split())


def test_a_part_without_a_substitute_stands_out_in_words() -> None:
    text = words(RARE, USUAL)
    assert "2 parts in 3 records 1 has no substitute in the same footprint." in text
    assert "! YZD-7 last-time-buy 40 100 8 2 0 0" in text
    assert "NO SUBSTITUTE in its footprint; last-time-buy; 60 short" in text
    assert text.count("NO SUBSTITUTE") == 1


def test_a_part_that_is_safe_is_plain() -> None:
    text = words(USUAL)
    assert "Every part has a substitute in its footprint, and none is obsolete." in text
    assert "!" not in text


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"outlined": False}, "NO SUBSTITUTE in its footprint: its package or pinout is not known"),
        ({"fewest": 2}, "NO SUBSTITUTE in its footprint that serves every record, though each has its own"),
        ({"status": VANISHED}, "no longer in the catalogs"),
        ({"status": "obsolete"}, "obsolete"),
    ],
)
def test_what_is_wrong_is_said(changes: dict[str, object], said: str) -> None:
    assert said in words(replace(RARE, **changes))  # type: ignore[arg-type]


def test_a_record_that_no_longer_holds_is_named() -> None:
    text = words(USUAL, stale=(Stale("old.json", ("stock", "misses snr")),))
    assert "old.json no longer holds as it stands (stock, misses snr)" in text


def test_many_records_are_counted() -> None:
    names = tuple(f"r{k}.json" for k in range(300))
    assert "in r0.json, r1.json, r2.json, r3.json and 296 more records" in words(
        replace(USUAL, records=names)
    )


@pytest.mark.parametrize("width", [60, 80, 120])
def test_long_names_fit(width: int) -> None:
    long = replace(RARE, part="A-VERY-LONG-PART-NUMBER-123456789", records=("x" * 30, "y" * 40))
    printed(long, USUAL, width=width)


def test_names_cannot_drive_a_terminal() -> None:
    assert "\x1b" not in printed(replace(RARE, part="Y\x1b[31m", records=("r\x1b[2J.json",)))


def test_the_csv_holds_every_number() -> None:
    evil = replace(RARE, part="=1+1", maker="Maker A", lead_weeks=None, records=("a.json", "b.json"))
    rows = list(csv.reader(StringIO(exposure_csv(Exposures((evil, USUAL), ())), newline="")))
    assert tuple(rows[0]) == CSV_COLUMNS
    first = dict(zip(rows[0], rows[1], strict=True))
    assert first == {
        "part": "'=1+1",
        "maker": "Maker A",
        "uses": "photodiode",
        "status": "last-time-buy",
        "stock": "40.0",
        "needed": "100",
        "lead_weeks": "",
        "makers": "2",
        "drop_ins": "0",
        "values": "0",
        "fewest_in_a_record": "0",
        "records": "a.json; b.json",
    }
    assert len(rows) == 3
