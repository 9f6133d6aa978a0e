"""The record on spreads of real parts: keys and columns that stand only where there is something to say."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from optimizer.errors import InputError
from optimizer.record import read, write
from optimizer.record.build import plain
from optimizer.search.result import Simulated, Unusable
from tests.made_up import CANDIDATE, CORNERED, CORNERS, MISS, outcome, record


def test_worst_corners_stand_only_where_corners_are_graded() -> None:
    target = record(outcome((CORNERED,)), CORNERS).data["candidates"][0]["targets"][0]
    assert target["corner"] == {"gbw": -0.3, "feedback_resistance": 0.0115}
    assert (target["value"], target["worst"], target["margin"]) == (24123.4567, 20090.0, 0.0045)
    assert set(record().data["candidates"][0]["targets"][0]) == {"name", "value", "limit", "margin"}


def test_a_worst_value_that_does_not_exist_is_null() -> None:
    lost = replace(CORNERED.targets[0], worst=None, margin=-1.0)
    target = record(outcome((replace(CORNERED, targets=(lost,)),))).data["candidates"][0]["targets"][0]
    assert target["worst"] is None
    assert target["corner"]


def test_the_yield_stands_only_where_something_was_drawn() -> None:
    data = record(outcome((CORNERED,), (MISS,)), CORNERS).data
    assert data["candidates"][0]["yield"] == {
        "draws": 10_000,
        "passed": 9_923,
        "yield": 0.9923,
        "low": 0.990386,
        "high": 0.993835,
        "failures": {"dark_output": 1, "full_scale": 23, "snr": 61},
        "worst": {"bandwidth": 20100.0, "snr": 45.9, "full_scale": 2.9e-6, "cost": 3.2134},
        "unknown": [],
        "meets": True,
    }
    assert "yield" not in data["near_misses"][0]
    assert "yield" not in record().data["candidates"][0]


@pytest.mark.parametrize(("wanted", "meets"), [(None, None), (0.990386, True), (0.9904, False)])
def test_the_lower_end_of_the_interval_decides_whether_the_yield_is_reached(
    wanted: float | None, meets: bool | None
) -> None:
    request = replace(CORNERS, tolerance=replace(CORNERS.tolerance, yield_=wanted))
    assert record(outcome((CORNERED,)), request).data["candidates"][0]["yield"]["meets"] is meets


def test_an_unknown_yield_is_null_and_not_reached() -> None:
    unknown = replace(CORNERED, simulated=Simulated(draws=0, unknown=("resistor.tolerance",)))
    found = record(outcome((unknown,)), CORNERS).data["candidates"][0]["yield"]
    assert (found["yield"], found["low"], found["high"]) == (None, None, None)
    assert found["unknown"] == ["resistor.tolerance"]
    assert found["meets"] is False


def test_families_that_took_no_part_are_named() -> None:
    family = Unusable("resistor", "YZR-9", "Maker C", ("tolerance", "tempco"))
    data = record(outcome(unusable=(family,))).data
    assert data["search"]["unusable"] == [
        {"role": "resistor", "family": "YZR-9", "maker": "Maker C", "blank": ["tolerance", "tempco"]}
    ]


def test_records_with_spreads_are_read_again_and_older_ones_without(tmp_path: Path) -> None:
    first = record(outcome((CORNERED,), (MISS,)), CORNERS)
    write(first, tmp_path / "record.json")
    assert read(tmp_path / "record.json").data == first.data
    old = plain(record().data)
    del old["search"]["unusable"]
    (tmp_path / "old.json").write_text(json.dumps(old))
    assert len(read(tmp_path / "old.json").candidates) == 1


@pytest.mark.parametrize(
    ("path", "value", "said"),
    [
        (("targets", 0, "corner"), [], "candidates[0].targets[0].corner: found '[]', expected a table"),
        (("targets", 0, "corner"), {"gbw": "x"}, "candidates[0].targets[0].corner.gbw: found 'x', expected"),
        (("targets", 0, "worst"), "x", "candidates[0].targets[0].worst: found 'x', expected a whole number"),
        (("yield",), 0.99, "candidates[0].yield: expected a table"),
        (("yield", "draws"), None, "candidates[0].yield.draws: found 'None', expected a whole number"),
        (("yield", "failures"), {"snr": None}, "candidates[0].yield.failures.snr: found 'None', expected"),
        (("yield", "meets"), 1, "candidates[0].yield.meets: found '1', expected true or false or null"),
    ],
)
def test_spreads_of_another_shape_are_refused(
    tmp_path: Path, path: tuple[str | int, ...], value: object, said: str
) -> None:
    data = json.loads(json.dumps(record(outcome((CORNERED,)), CORNERS).data))
    place = data["candidates"][0]
    for key in path[:-1]:
        place = place[key]
    place[path[-1]] = value
    (tmp_path / "record.json").write_text(json.dumps(data))
    with pytest.raises(InputError) as caught:
        read(tmp_path / "record.json")
    assert said in str(caught.value)


def test_half_a_corner_is_refused(tmp_path: Path) -> None:
    data = json.loads(json.dumps(record(outcome((CORNERED,)), CORNERS).data))
    del data["candidates"][0]["targets"][0]["worst"]
    (tmp_path / "record.json").write_text(json.dumps(data))
    with pytest.raises(InputError, match=r"targets\[0\].worst: the record lacks this key"):
        read(tmp_path / "record.json")


def test_tables_have_worst_values_and_yields_only_where_they_apply() -> None:
    table = record(outcome((CORNERED,), (MISS,)), CORNERS).table
    assert table["snr_worst"].iloc[0] == 46.265
    assert table["snr_corner"].iloc[0] == "feedback_resistance=-0.0115; gbw=0.3"
    assert table["cost_corner"].iloc[0] == ""
    assert (table["yield"].iloc[0], table["yield_low"].iloc[0]) == (0.9923, 0.990386)
    assert table["yield_meets"].iloc[0]
    nominal = replace(CORNERS, tolerance=replace(CORNERS.tolerance, method="nominal"))
    columns = record(outcome((CANDIDATE,)), nominal).table.columns
    assert "yield" in columns
    assert not [name for name in columns if name.endswith(("_worst", "_corner"))]
    plain = record().table.columns
    assert not [name for name in plain if name.startswith("yield") or name.endswith(("_worst", "_corner"))]
