"""The worked figures: their printed arithmetic is done again and must give the figure."""

from __future__ import annotations

from collections import Counter
from functools import cache
from math import isnan
from typing import Any

import numpy as np
import pytest

from optimizer.figures import evaluate
from optimizer.report.worked import Worked, steps, worked
from optimizer.search import space as spaces
from optimizer.search.examine import Glass, examine
from optimizer.search.space import Choice, Space
from optimizer.vocabulary import VOCABULARY
from tests.independent.adapter import engine_setting
from tests.independent.cases import random_case, stable_case
from tests.independent.direct import Case
from tests.report.redo import NotArithmetic, Redone, agree, redo
from tests.search.made import catalogs, diode, opamp, request

INTEGRALS = {"F", "F'", "Bd", "Bd'"}
"""Integrals without a closed form that fits a line."""

CASES = 40


def figures_of(space: Space, choice: Choice) -> dict[str, float | None]:
    with np.errstate(all="ignore"):
        result = evaluate(space.bench, spaces.settings(space, choice))
    values = {name: float(np.ravel(value)[0]) for name, value in result.figures.items()}
    return {name: None if isnan(value) else value for name, value in values.items()}


@cache
def looked_at(number: int) -> tuple[Case, Glass, dict[str, float | None]]:
    """A random stable receiver under the glass, and its figures."""
    case = stable_case(np.random.default_rng([17, number]), 3.0)
    space, choice = engine_setting(case)
    return case, examine(space, choice), figures_of(space, choice)


def rows_of(number: int) -> tuple[Worked, ...]:
    case, glass, figures = looked_at(number)
    return (*worked(glass, figures, case["light"]["kind"]), *steps(glass))


def sides(line: str) -> list[Redone]:
    """The sides of a line that can be computed; the names at its left cannot."""
    found = []
    for side in line.split(" = "):
        try:
            found.append(redo(side))
        except NotArithmetic:
            assert not found, f"what stands after a number can be computed: {line}"
    return found


@pytest.mark.parametrize("number", range(CASES))
def test_every_line_agrees_with_itself_and_the_last_with_the_value(number: int) -> None:
    for row in rows_of(number):
        found = [sides(line) for line in row.numbers]
        for line, values in zip(row.numbers, found, strict=True):
            assert all(agree(values[0], other) for other in values[1:]), (row.figure, line)
        if row.value == "-" or row.figure in INTEGRALS or row.figure == "peaking":
            continue
        # a condition is met at the frequency that its first line turns into w
        last = redo(row.numbers[0].split(" = ")[1]) if " = " in row.numbers[-1] else found[-1][0]
        value = redo(row.value)
        if " = " in row.numbers[-1]:
            value = Redone(value.value * 2 * np.pi, value.tolerance * 2 * np.pi)
        assert agree(last, value), (row.figure, row.numbers, row.value)


@pytest.mark.parametrize("number", range(CASES))
def test_peaking_is_its_arithmetic_or_shown_not_to_be_there(number: int) -> None:
    case, glass, figures = looked_at(number)
    row = next(r for r in worked(glass, figures, case["light"]["kind"]) if r.figure == "peaking")
    assert figures["peaking"] is not None
    if figures["peaking"] > 0:
        assert agree(redo(row.numbers[-1]), redo(row.value))
        return
    assert redo(row.value).value == 0
    if len(row.numbers) == 2:
        assert redo(row.numbers[-1]).value == 0  # the highest point away from rest lies below it
        return
    c1, c2, *more = (sides(line) for line in row.numbers[:-1])
    assert c1[-1].value >= 0
    assert c2[-1].value >= 0 or more[0][-1].value < 0


@pytest.mark.parametrize("number", range(CASES))
def test_the_value_shown_is_the_figure(number: int) -> None:
    case, glass, figures = looked_at(number)
    rows = worked(glass, figures, case["light"]["kind"])
    assert [row.figure for row in rows] == list(VOCABULARY)
    for row in rows:
        figure = figures[row.figure]
        if figure is None:
            assert row.value == "-"
        else:
            assert redo(row.value).value == pytest.approx(figure, rel=6e-5, abs=1e-300), row.figure


def test_the_digits_printed_are_enough_to_redo_a_figure_by_hand() -> None:
    """Few lines lose so much in a difference that redoing them would tell nothing."""
    poor: Counter[str] = Counter()
    for number in range(CASES):
        for row in rows_of(number):
            found = [value for line in row.numbers for value in sides(line)]
            if found and any(v.tolerance > 0.01 * abs(v.value) for v in found if v.value):
                poor[row.figure] += 1
    assert sum(poor.values()) < 0.02 * CASES * 40, poor
    assert not poor.keys() & {"snr", "bandwidth", "transresistance", "error", "output_noise_weak", "cost"}


def test_a_wrong_number_is_noticed() -> None:
    """The judge of the other tests itself: what is one per cent off no longer agrees."""
    noticed = total = 0
    for number in range(10):
        for row in rows_of(number):
            if row.figure not in {"snr", "offset", "transresistance", "noise_equivalent_light", "e1"}:
                continue
            wrong = redo(f"({row.numbers[-1]}) × 1.01")
            total += 1
            noticed += not agree(wrong, redo(row.value))
    assert total
    assert noticed > 0.95 * total


def test_words_only_where_there_is_nothing_to_compute() -> None:
    for number in range(CASES):
        for row in rows_of(number):
            if row.figure in INTEGRALS or row.value == "-":
                continue
            assert any(sides(line) for line in row.numbers), row


def test_every_row_names_its_source() -> None:
    for number in range(10):
        for row in rows_of(number):
            assert row.source
            known = ("no source", "own algebra", "Franco", "Fiore", "Johnson", "Astrom", "SBOA220B")
            assert any(word in row.source for word in known), row


def made(asked: dict[str, Any] | None = None, **rows: Any) -> dict[str, Worked]:
    """The rows of the first setting of a made space with a capacitor, by name."""
    space = spaces.build(request(**(asked or {})), catalogs(**rows))
    choice = Choice(*(np.array([k]) for k in (0, 0, 0, 0, 1, 0)))
    glass = examine(space, choice)
    light = space.request.light.kind
    found = (*worked(glass, figures_of(space, choice), light), *steps(glass))
    return {row.figure: row for row in found}


def test_lines_read_as_they_are_meant_to() -> None:
    rows = made({"targets": {"bandwidth": 10e3, "slew": 1.0}, "supply": {"guard": 0.05}})
    assert rows["input_capacitance"].numbers == ("40 pF + 3 pF + 2 pF + 1 pF",)
    assert rows["error"].formula == "Vos (1 + Rf/Rsh) + Ib Rf"
    assert rows["error"].numbers == ("500 µV × (1 + 100 kohm / 1 Gohm) + 2 pA × 100 kohm",)
    assert rows["transresistance"].numbers == ("100 kohm × 1e5 / (1e5 + 1 + 100 kohm / 1 Gohm)",)
    assert rows["swing"].numbers == ("4.98 V - 50 mV - 0 V",)
    assert rows["cost"].numbers == ("3.00 + 2.00 + 0.02 + 0.03",)
    assert rows["slew"].numbers == ("5 V/µs / (pi × 10 kHz × 99.999 kohm × 0.56 A/W × 1 µW)",)
    assert rows["offset"].formula == "error, for no dark current flows"


def test_what_does_not_exist_says_why() -> None:
    rows = made({"light": {"strongest": 1e-3, "background": 1e-3}})
    assert (rows["dynamic_range"].value, rows["dynamic_range"].numbers) == ("-", ("full scale is 0",))
    assert rows["full_scale"].numbers[0].startswith("max(0, ")
    assert (rows["slew"].value, rows["slew"].numbers) == ("-", ("no bandwidth target is stated",))
    unknown = made(photodiodes=[diode(rise_time=None)], opamps=[opamp(quiescent_current=None)])
    for name in ("bandwidth", "supply_current"):
        assert unknown[name].value == "-"
        assert unknown[name].numbers == ("the catalog leaves a value unknown that this needs",)


def test_an_unstable_loop_is_said_to_be_one() -> None:
    rows = made(opamps=[opamp(second_pole=5e3)], photodiodes=[diode(capacitance=[(0.0, 4e-9)])])
    for name in ("snr", "output_noise_dark", "peaking", "dynamic_range", "noise_equivalent_light"):
        assert (rows[name].value, rows[name].numbers) == ("-", ("the loop is unstable",))
    assert "B" not in rows
    assert agree(redo(rows["phase_margin"].numbers[-1]), redo(rows["phase_margin"].value))


def test_irradiance_is_worked_in_watts_per_square_metre() -> None:
    rows = made({"light": {"kind": "irradiance", "weakest": 0.01, "strongest": 0.25}})
    assert "2.24 µA/(W/m2) × 10 mW/m2" in rows["snr"].numbers[0]
    assert rows["full_scale"].value.endswith("W/m2")


def test_any_receiver_can_be_worked() -> None:
    """Stable or not, whatever is absent: no row fails to be written."""
    rng = np.random.default_rng(23)
    for _ in range(30):
        case = random_case(rng)
        space, choice = engine_setting(case)
        glass = examine(space, choice)
        rows = (*worked(glass, figures_of(space, choice), case["light"]["kind"]), *steps(glass))
        assert all("nan" not in line and "inf" not in line for row in rows for line in row.numbers)
