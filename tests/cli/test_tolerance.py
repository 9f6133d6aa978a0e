"""`shortlist` with [tolerance], from the request to the table, the record and the CSV."""

from __future__ import annotations

import csv
import json
import re
from io import StringIO
from pathlib import Path
from typing import Any

import pytest

from optimizer.cli import main
from optimizer.record import read

Captured = pytest.CaptureFixture[str]
CORNERS = """
[tolerance]
method = "corners"
draws = 300
gbw = "10 %"
responsivity = "5 %"
"""
YIELD = """
[tolerance]
yield = "90 %"
draws = 2000
seed = 3
gbw = "20 %"
voltage_noise = "10 %"
responsivity = "15 %"
"""


def asked(request_file: Path, table: str) -> str:
    request_file.write_text(request_file.read_text("utf-8") + table, "utf-8")
    return str(request_file)


def rows_of(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(StringIO(text, newline="")))


def without_times(path: Path) -> dict[str, Any]:
    data: dict[str, Any] = json.loads(path.read_text("utf-8"))
    del data["created"], data["search"]["seconds"], data["search"]["evaluated"]
    return data


def test_corners_reach_the_table_the_record_and_the_csv(
    request_file: Path, capsys: Captured, tmp_path: Path
) -> None:
    saved, sheet = tmp_path / "r.json", tmp_path / "r.csv"
    words = [
        "shortlist",
        asked(request_file, CORNERS),
        "--show",
        "2",
        "--save",
        str(saved),
        "--csv",
        str(sheet),
    ]
    assert main(words) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert "2 receivers that meet the request at every corner" in text
    candidates = read(saved).candidates
    for candidate, row in zip(candidates, rows_of(sheet.read_text("utf-8")), strict=True):
        assert candidate["yield"]["draws"] == 300
        assert float(row["yield"]) == candidate["yield"]["yield"]
        for target in candidate["targets"]:
            assert float(row[f"{target['name']}_worst"]) == target["worst"]
            assert row[f"{target['name']}_corner"].count("=") == len(target["corner"])
    limiting = next(t for t in candidates[0]["targets"] if t["name"] == candidates[0]["limiting"])
    assert limiting["corner"]
    assert re.search(rf"{limiting['name']}, \S+ % to spare at \S+ [+-]", text)


def test_rows_below_the_yield_are_ranked_last_for_any_number_of_workers(
    request_file: Path, capsys: Captured, tmp_path: Path
) -> None:
    request = asked(request_file, YIELD)
    saved = [tmp_path / "one.json", tmp_path / "two.json"]
    for path, workers in zip(saved, ("1", "2"), strict=True):
        assert main(["shortlist", request, "--save", str(path), "--workers", workers, "--choose", "2"]) == 0
    one, two = map(without_times, saved)
    assert one == two
    meets = [candidate["yield"]["meets"] for candidate in one["candidates"]]
    assert meets == sorted(meets, reverse=True)
    assert set(meets) == {True, False}
    assert [candidate["rank"] for candidate in one["candidates"]] == list(range(1, len(meets) + 1))
    costs = [c["figures"]["cost"] for c in one["candidates"]]
    reached = costs[: meets.count(True)]
    assert reached == sorted(reached)
    assert costs[len(reached) :] == sorted(costs[len(reached) :])
    assert costs != sorted(costs)
    text = capsys.readouterr().out
    assert len(re.findall(r"^(?:>| )? *! +\d+ ", text, re.MULTILINE)) == 2 * meets.count(False)
    assert "Row 2, chosen" in text


def test_without_tolerances_record_and_csv_are_as_they_were(
    request_file: Path, capsys: Captured, tmp_path: Path
) -> None:
    saved, sheet = tmp_path / "r.json", tmp_path / "r.csv"
    words = ["shortlist", str(request_file), "--show", "1", "--save", str(saved), "--csv", str(sheet)]
    assert main(words) == 0
    candidate = read(saved).candidates[0]
    assert "yield" not in candidate
    assert set(candidate["targets"][0]) == {"name", "value", "limit", "margin"}
    assert not [name for name in rows_of(sheet.read_text("utf-8"))[0] if "yield" in name or "worst" in name]
    assert "Real parts" not in capsys.readouterr().out
