"""Passives at an end of the allowed range are told of wherever a row is spelt out."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from optimizer.record import Record
from optimizer.record.build import plain
from optimizer.report import report, to_text
from optimizer.report.pinned import pinned
from tests.made_up import CANDIDATE, MISS, outcome, record

LOW_R, HIGH_R = "Rf is at the low end of space.resistance", "Rf is at the high end of space.resistance"
LOW_C = "Cf is at the low end of space.capacitance"


def request(resistance: tuple[float, float | None], capacitance: tuple[float, float]) -> dict[str, Any]:
    ranges = {"resistance": resistance, "capacitance": capacitance}
    return {"space": {name: {"from": low, "to": high} for name, (low, high) in ranges.items()}}


@pytest.mark.parametrize(
    ("rf", "cf", "said"),
    [
        (1e5, None, LOW_R),
        (1.04e5, None, LOW_R),
        (1.06e5, None, ""),
        (1e6, None, ""),
        (9.4e6, None, ""),
        (9.6e6, None, HIGH_R),
        (10e6, None, HIGH_R),
        (1e6, 0.5e-12, LOW_C),
        (1e6, 0.0, ""),
        (10e6, 1e-9, f"{HIGH_R}; Cf is at the high end of space.capacitance"),
    ],
)
def test_within_five_per_cent_of_an_end(rf: float, cf: float | None, said: str) -> None:
    row = {"feedback_resistance": rf, "feedback_capacitance": cf}
    assert pinned(row, request((1e5, 10e6), (0.5e-12, 1e-9))) == said


def test_a_range_of_one_value_has_both_ends_there() -> None:
    row = {"feedback_resistance": 1e6, "feedback_capacitance": None}
    assert pinned(row, request((1e6, 1e6), (1e-12, 1e-9))) == "Rf is at both ends of space.resistance"


def test_a_range_without_an_upper_end_has_none_to_be_at() -> None:
    row = {"feedback_resistance": 1e6, "feedback_capacitance": None}
    assert pinned(row, request((1e3, None), (1e-12, 1e-9))) == ""


def said_of(made: Record, resistance: dict[str, float], width: int = 80) -> str:
    data = plain(made.data)
    data["request"]["space"]["resistance"] = resistance
    data["request"]["space"]["capacitance"] |= {"from": 4.7e-12, "to": 1e-9}
    return " ".join(to_text(report(Record(data), width), colour=False).split())


def test_the_chosen_row_and_each_near_miss_say_it() -> None:
    free = replace(MISS, feedback_resistance=4.7e5, feedback_capacitance=0.0)
    text = said_of(record(outcome((CANDIDATE,), (MISS, free))), {"from": 1e5, "to": 1e6})
    assert f"(YZC-C) {HIGH_R}; {LOW_C} reference" in text
    assert text.count(HIGH_R) == 2
    assert "In the nearest miss" not in text


def test_nothing_meets_says_it_of_the_nearest_miss() -> None:
    made = record(outcome((), (MISS,)))
    assert f"In the nearest miss, {LOW_R}; {LOW_C}." in said_of(made, {"from": 1e6, "to": 1e7})
    assert "In the nearest miss, Cf" in said_of(made, {"from": 1e5, "to": 1e7})


def test_a_row_in_the_midst_of_its_ranges_says_nothing() -> None:
    free = replace(MISS, feedback_resistance=4.7e5, feedback_capacitance=0.0)
    text = said_of(record(outcome((), (free,))), {"from": 1e5, "to": 1e6})
    assert " end of space" not in text
    assert "In the nearest miss" not in text
