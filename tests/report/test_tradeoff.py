"""What targets cost, and fronts, in words: widths, what is compressed, what is said where nothing meets."""

from __future__ import annotations

import csv
from collections.abc import Mapping
from dataclasses import replace
from io import StringIO
from typing import Any

import pytest

from optimizer.report.conflicts import conflict_lines, listed, relaxed
from optimizer.report.front import apart, front_lines
from optimizer.report.stepped import limits_words, runs, steps_words
from optimizer.report.tradeoff import tradeoff_lines
from optimizer.report.tradeoff_csv import front_csv, tradeoff_csv
from optimizer.request.in_force import in_force
from optimizer.request.types import Request
from optimizer.search.weigh.conflicts import Conflicts, Relaxation
from optimizer.search.weigh.front import Front, front
from optimizer.search.weigh.tradeoff import Row, Step, Tradeoff, tradeoff
from tests.search import made

TARGETS = {"bandwidth": 500e3, "phase_margin": 45.0, "offset": 5e-3}
AMPS = [
    made.opamp(part="YZA-slow", gbw=4e6, price=[(1.0, 1.0)]),
    made.opamp(part="YZA-fast", gbw=40e6, price=[(1.0, 1.003)]),
]


def asked(**targets: float) -> Request:
    return made.request(targets=TARGETS | targets)


PARTS = made.catalogs(AMPS)
FOUND = tradeoff(asked(), PARTS)
HARD = tradeoff(asked(offset=1e-9), PARTS)


def data(request: Request | None = None, currency: str | None = "EUR") -> Mapping[str, Any]:
    return {"name": "a \x1b[31mname", "request": in_force(request or asked()), "currency": currency}


def printed(found: Tradeoff | Front, width: int, **given: Any) -> list[str]:
    draw: Any = front_lines if isinstance(found, Front) else tradeoff_lines
    return [line.plain for line in draw(found, data(**given), width)]


def table(lines: list[str]) -> dict[str, list[str]]:
    """The rows of the overview by target."""
    names = [row.target for row in FOUND.rows]
    return {cells[0]: cells[1:] for cells in map(str.split, lines) if cells and cells[0] in names}


@pytest.mark.parametrize("width", [40, 60, 80, 120])
@pytest.mark.parametrize("found", [FOUND, HARD, front(asked(), PARTS, "bandwidth")])
def test_nothing_is_wider_than_the_terminal(found: Tradeoff | Front, width: int) -> None:
    lines = printed(found, width)
    assert max(map(len, lines)) <= width
    assert not any("\x1b" in line for line in lines)


def test_the_overview_has_a_row_a_target_and_a_column_a_step() -> None:
    rows = table(printed(FOUND, 120))
    assert list(rows) == ["bandwidth", "full_scale", "phase_margin", "offset"]
    assert {len(cells) for cells in rows.values()} == {10}
    assert FOUND.base is not None
    stated = {cells[5] for cells in rows.values()}
    assert len(stated) == 1
    for row in FOUND.rows:
        cells = [*rows[row.target][:5], *rows[row.target][6:]]
        for cell, step in zip(cells, row.steps, strict=True):
            if cell == "none":
                assert step.candidate is None
            elif cell == "same":
                assert step.changes == ()
            else:
                assert step.candidate is not None
                assert float(cell) == pytest.approx(step.candidate.figures["cost"], abs=1e-9)


def test_costs_that_differ_are_told_apart() -> None:
    """The fast amplifier costs 0.003 more: three digits would not tell."""
    rows = table(printed(FOUND, 120))
    base = rows["bandwidth"][5]
    costs = {step.candidate.figures["cost"] for row in FOUND.rows for step in row.steps if step.candidate}
    assert len(costs) > 1
    others = {cell for cells in rows.values() for cell in cells if cell not in ("same", "none", base)}
    assert others


def test_what_changes_is_said_once_for_neighbouring_steps() -> None:
    lines = printed(FOUND, 200)
    text = "\n".join(lines)
    assert "op-amp YZA-slow -> YZA-fast" in text
    for row in FOUND.rows:
        for run in runs(row.steps):
            if run[0].changes:
                where = f"  {steps_words(run)} ({limits_words(row.target, run, data()['request'])})"
                assert sum(line.startswith(where) for line in lines) >= 1


def test_the_margins_meaning_and_the_proof_are_said() -> None:
    text = " ".join(printed(FOUND, 80))
    assert "-10 % admits what misses it by 10 %" in text
    assert f"Decided {FOUND.questions} sets of limits" in text
    assert "proven" in text
    assert "Caution:" in text
    assert "Not in the model:" in text


def test_where_nothing_meets_only_what_may_help_is_shown() -> None:
    lines = printed(HARD, 120)
    text = "\n".join(lines)
    assert "Nothing meets the request as it stands." in text
    assert "- offset" in lines
    assert "Not even dropping one of these alone helps: bandwidth, full_scale, phase_margin." in text
    headings = next(line for line in lines if line.lstrip().startswith("-50"))
    assert "+5" not in headings
    assert "is the same" not in text
    assert table(lines)["offset"][0] != "none"


def test_what_no_part_could_meet_comes_first_and_the_rest_all_the_same() -> None:
    request = made.request(light={"weakest": 1e-15}, targets={"snr": 80.0, "bandwidth": 1e6})
    lines = printed(tradeoff(request, PARTS), 120, request=request)
    assert lines[1] == "No part could meet this request:"
    assert "shot noise" in lines[2]
    assert any(line.startswith("Targets that cannot hold together") for line in lines)


def test_an_empty_space_says_why_and_no_more() -> None:
    request = made.request(space={"resistance": (1.0, 2.0)})
    lines = printed(tradeoff(request, PARTS), 80, request=request)
    assert lines[1] == "No part could meet this request:"
    assert len(lines) <= 4
    assert printed(front(request, PARTS, "snr"), 80, request=request)[1] == lines[1]


def test_conflicts_in_words() -> None:
    assert listed(("snr",)) == "snr"
    assert listed(("bandwidth", "snr", "cost")) == "bandwidth, snr and cost"
    assert relaxed(Relaxation("snr", 40.0, 33.66, -0.517899, None)) == "51.8 %"
    assert relaxed(Relaxation("offset", 1e-9, 1e-3, -0.999999, None)) == "over 99.9 %"
    assert relaxed(Relaxation("peaking", 1.0, 3.0, -2.0, None)) == "200 %"
    assert relaxed(Relaxation("peaking", 1.0)) == "-"
    cut = Conflicts((("snr",), ("offset", "cost")), (Relaxation("snr", 40.0),), complete=False)
    lines = [line.plain for line in conflict_lines(cut, data(), 80)]
    assert "- offset and cost" in lines
    assert any(line.startswith("There are more; these 2 were looked for") for line in lines)
    assert "No single target helps, not even dropped." in lines
    none = [line.plain for line in conflict_lines(Conflicts((), (), eligible=False), data(), 200)]
    assert none == ["No pair is eligible, whatever the targets: see luxsift shortlist for the reasons."]


def test_the_front_marks_what_meets_the_stated_limit() -> None:
    found = front(asked(), PARTS, "bandwidth")
    lines = printed(found, 120)
    marked = [line for line in lines if line.startswith("*  ")]
    assert len(marked) == sum((point.margin or 0.0) >= 0.0 for point in found.points)
    assert "its own limit, at least 500 kHz, is dropped" in " ".join(lines)
    other = printed(front(asked(), PARTS, "snr"), 120)
    assert not [line for line in other if line.startswith("*")]
    assert "its own limit" not in " ".join(other)


def test_a_front_without_points_says_what_stands_in_the_way() -> None:
    found = front(asked(offset=1e-9), PARTS, "bandwidth")
    text = "\n".join(printed(found, 120))
    assert "Nothing meets the other targets, even with bandwidth left aside." in text
    assert "- offset" in text


def test_neighbours_are_told_apart_where_digits_can() -> None:
    request = data()["request"]
    assert apart("cost", [1.0, 1.0012, 2.0], request) == ("1.000", "1.001", "2.000")
    assert apart("cost", [], request) == ()
    assert apart("cost", [1.0, 1.0], request)[0] == "1.00000000"


def test_steps_as_csv() -> None:
    rows = list(csv.DictReader(StringIO(tradeoff_csv(FOUND))))
    assert len(rows) == 4 * 9
    dropped = rows[0]
    assert (dropped["target"], dropped["step"], dropped["limit"]) == ("bandwidth", "", "")
    steps = [step for target in FOUND.rows for step in target.steps]
    for row, step in zip(rows, steps, strict=True):
        if step.candidate is None:
            assert row["cost"] == ""
        else:
            assert float(row["cost"]) == step.candidate.figures["cost"]
            assert float(row["margin"]) == step.candidate.margin
            assert row["changes"] == "; ".join(step.changes)


def test_points_as_csv_and_no_formula_runs() -> None:
    named = made.catalogs([made.opamp(part="=YZA", gbw=40e6)])
    found = front(asked(), named, "bandwidth")
    rows = list(csv.DictReader(StringIO(front_csv(found))))
    assert [float(row["value"]) for row in rows] == [point.value for point in found.points]
    assert {row["opamp"] for row in rows} == {"'=YZA"}


def test_a_row_that_changes_nothing_is_named_at_the_end() -> None:
    base = FOUND.base
    still = Row("offset", 5e-3, tuple(Step(s.step, s.limit, base) for s in FOUND.rows[-1].steps))
    found = replace(FOUND, rows=(*FOUND.rows[:-1], still))
    assert "No step of these changes the receiver: " in " ".join(printed(found, 120))
    assert table(printed(found, 120))["offset"].count("same") == 9
