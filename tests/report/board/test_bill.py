"""The bill of materials: what it adds up to, and what its CSV file holds."""

from __future__ import annotations

from dataclasses import replace
from io import StringIO

import pandas as pd
import pytest

from optimizer.planning.outline import Costs
from optimizer.planning.plan import BoardPlan
from optimizer.report.board.amounts import money, unit_price
from optimizer.report.board.bill_csv import COLUMNS, text
from tests.planning import made_plan
from tests.report.board.shown import data, of_plans, printed, sections, words

BILL = "Bill of materials, money in EUR"


def rows_of(plan: BoardPlan) -> list[list[str]]:
    """The printed bill by its last four cells: a board, to buy, unit price, line cost."""
    lines = sections(printed(made_plan.planned(plans=(plan,)), 120))[BILL]
    return [line.split()[-4:] for line in lines[3 : 3 + len(plan.bill)]]


def sums_of(plan: BoardPlan) -> dict[str, tuple[float, float]]:
    """The printed sums: a build and a board."""
    blocks = printed(made_plan.planned(plans=(plan,)), 120).split("\n\n")
    (block,) = [block for block in blocks if block.split() and block.split()[:2] == ["a", "build"]]
    rows = [line.split() for line in block.split("\n")[1:]]
    names = [" ".join(row[:2]) if row[0] == "line" else row[0] for row in rows]
    return {name: (float(row[-2]), float(row[-1])) for name, row in zip(names, rows, strict=True)}


def number(cell: str) -> float:
    return float(cell.strip("+").replace(",", ""))


@pytest.mark.parametrize("plan", made_plan.plans(), ids=lambda plan: f"plan {plan.rank}")
def test_what_is_printed_adds_up_to_the_totals(plan: BoardPlan) -> None:
    """With nothing but the printed numbers, the costs of the board file and the quantity."""
    rows, sums = rows_of(plan), sums_of(plan)
    for _, bought, price, cost in rows:
        assert number(bought) * number(price) == pytest.approx(number(cost), abs=0.0051)
    parts = sum(number(row[3]) for row in rows)
    placed = sum(number(row[0]) for row in rows)
    assert sums["parts"][0] == pytest.approx(parts)
    assert sums["line items"][0] == pytest.approx(len(rows) * 15.00)
    assert sums["placements"][0] == pytest.approx(placed * made_plan.QUANTITY * 0.01)
    assert sums["total"][0] == pytest.approx(sum(sums[name][0] for name in sums if name != "total"))
    assert sums["total"][0] == pytest.approx(plan.cost / 100)
    for build, board in sums.values():
        assert board == pytest.approx(build / made_plan.QUANTITY, abs=0.0051)
    totals = {total.name: total.value for total in plan.totals}
    assert sums["total"][1] == pytest.approx(totals["cost"], abs=0.0051)
    assert placed == totals["placements"]
    assert len(rows) == totals["line_items"]


def test_half_cents_of_placements_are_rounded_as_whole_boards_are() -> None:
    """31 pieces at 0.0001 for 150 boards each: 1.5 cents, 2 in whole cents."""
    outline = made_plan.outline(costs=Costs(line_item=0.0, placement=0.0001))
    plan = made_plan.plan(made_plan.layouts()[0], wanted=outline)
    said = words(made_plan.planned(plans=(plan,)), 120, outline=outline)
    assert "placements 4,650 parts at 0.0001 0.62 0.0041" in said
    assert f"total 150 boards {plan.cost / 100:.2f}" in said


def test_what_is_bought_up_to_a_price_break_is_marked_and_told() -> None:
    first = made_plan.plans()[0]
    marked = [row[1] for row in rows_of(first) if "+" in row[1]]
    assert marked == ["1,000+"]
    note = "+ bought up to a price break, for less money than what is needed alone: YZD-01 900"
    assert note in words()


def test_nothing_is_marked_where_only_the_need_is_bought() -> None:
    first = made_plan.plans()[0]
    bill = tuple(replace(line, buy=line.pieces * made_plan.QUANTITY) for line in first.bill)
    plan = replace(first, bill=bill)
    assert "bought up" not in words(made_plan.planned(plans=(plan,)))
    assert [number(row[1]) for row in rows_of(plan)] == [line.buy for line in bill]
    assert not any("+" in row[1] for row in rows_of(plan))


@pytest.mark.parametrize(
    ("price", "said"),
    [
        (0.44, "0.44"),
        (1.325, "1.325"),
        (0.0034, "0.0034"),
        (0.8231, "0.8231"),
        (12.0, "12.00"),
        (0.0, "0.00"),
    ],
)
def test_a_unit_price_has_all_of_its_digits(price: float, said: str) -> None:
    assert unit_price(price) == said


@pytest.mark.parametrize(
    ("amount", "said"),
    [(23.404, "23.40"), (0.42, "0.42"), (0.0034, "0.0034"), (0.0, "0.00"), (1e4, "10000.00")],
)
def test_an_amount_has_two_decimals_and_never_rounds_to_nothing(amount: float, said: str) -> None:
    assert money(amount) == said


def test_the_csv_file_holds_the_bill() -> None:
    """Read back by pandas, an independent reader of CSV."""
    document, first = data(), made_plan.plans()[0]
    table = pd.read_csv(StringIO(text(document["plans"][0], document)), keep_default_na=False, na_values=[""])
    assert tuple(table.columns) == COLUMNS
    for column in ("role", "part", "maker", "package", "pieces", "buy", "unit_price", "cost", "area"):
        assert table[column].tolist() == [getattr(line, column) for line in first.bill]
    values = [line.value for line in first.bill]
    assert [None if pd.isna(value) else value for value in table["value"]] == values
    assert table["needed"].tolist() == [line.pieces * made_plan.QUANTITY for line in first.bill]
    assert set(table["currency"]) == {"EUR"}
    assert table["cost"].sum() == pytest.approx(sum(line.cost for line in first.bill))


def test_what_is_unknown_is_empty_in_the_csv_file() -> None:
    first = made_plan.plans()[0]
    bill = (replace(first.bill[0], area=None, package=None),)
    document = of_plans(replace(first, bill=bill))
    heading, row = text(document["plans"][0], document).strip().split("\r\n")
    cells = dict(zip(heading.replace('"', "").split(","), row.replace('"', "").split(","), strict=True))
    assert (cells["area"], cells["package"], cells["value"]) == ("", "", "")


@pytest.mark.parametrize("name", ["=1+1", "+1", "-1", "@SUM(A1)", "\t=1", "x;=1"])
def test_no_cell_runs_as_a_formula(name: str) -> None:
    first = made_plan.plans()[0]
    line = replace(first.bill[0], part=name, maker=name, package=name)
    document = of_plans(replace(first, bill=(line,)))
    table = pd.read_csv(StringIO(text(document["plans"][0], document)))
    for column in ("part", "maker", "package"):
        cell = str(table[column][0])
        assert "'" in cell
        assert cell.replace("'", "") == name
        assert not cell.lstrip().startswith(("=", "+", "-", "@"))
