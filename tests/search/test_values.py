"""Which values can be had: divider levels counted in exact fractions, families, prices, low-passes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.request.types import Divider, Request, Tolerance
from optimizer.search import values
from optimizer.search.values import Level
from optimizer.series import SERIES
from tests.search.made import Row, capacitor, catalogs, listed, request, resistor

E12 = (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82)
"""IEC 60063, E12, typed here once more."""


def levels_of(
    divider: Divider,
    resistors: Sequence[Row] = (resistor(series="E192"),),
    capacitors: Sequence[Row] = (capacitor(),),
    **space: Any,
) -> list[Level]:
    made = catalogs(resistors=resistors, capacitors=capacitors)
    asked = request(space={"divider": divider, **space})
    return values.divider_levels(asked, made.resistors, made.capacitors)


def largest_pairs(members: Sequence[Fraction]) -> dict[Fraction, tuple[Fraction, Fraction]]:
    """(R1, R2) of the largest total for each exact R2/R1."""
    best: dict[Fraction, tuple[Fraction, Fraction]] = {}
    for top in members:
        for bottom in members:
            ratio = bottom / top
            if ratio not in best or top + bottom > sum(best[ratio]):
                best[ratio] = (top, bottom)
    return best


def decimal_members(series: str, low: str, high: str) -> list[Fraction]:
    """Members of a series as exact decimals, both ends included."""
    every = [Fraction(m) * Fraction(10) ** p for p in range(-8, 12) for m in SERIES[series]]
    return [m for m in every if Fraction(low) <= m <= Fraction(high)]


def test_the_default_divider_has_as_many_levels_as_exact_fractions_say() -> None:
    members = [Fraction(m * 1000) for m in E12] + [Fraction(100_000)]
    expected = largest_pairs(members)
    found = levels_of(Divider())
    assert len(found) == len(expected)
    pairs = {Fraction(v.bottom) / Fraction(v.top): (Fraction(v.top), Fraction(v.bottom)) for v in found}
    assert pairs == expected
    # 13 values, 169 pairs; 141 by a count with fractions.Fraction alone
    assert len(found) == 141


def test_equal_resistors_count_once_at_the_largest_value() -> None:
    equal = [v for v in levels_of(Divider()) if v.top == v.bottom]
    assert [(v.top, v.bottom) for v in equal] == [(100e3, 100e3)]


def test_levels_rise_and_none_is_there_twice() -> None:
    found = levels_of(Divider(series="E24", low=1e3, high=1e6))
    share = [Fraction(v.bottom) / Fraction(v.top) for v in found]
    assert share == sorted(set(share))


@pytest.mark.parametrize(
    ("series", "low", "high"),
    [("E3", "10e3", "100e3"), ("E6", "2.2e3", "47e3"), ("E24", "1e3", "20e3"), ("E96", "10e3", "20e3"),
     ("E12", "0.1", "1"), ("E24", "1e6", "22e6"), ("E12", "47e3", "47e3")],
)  # fmt: skip
def test_every_series_and_range_agrees_with_exact_fractions(series: str, low: str, high: str) -> None:
    expected = largest_pairs(decimal_members(series, low, high))
    found = levels_of(Divider(series=series, low=float(low), high=float(high)))
    # a float is the nearest to its decimal, so the pairs are compared as floats
    assert [(v.top, v.bottom) for v in found] == [
        (float(top), float(bottom)) for _, (top, bottom) in sorted(expected.items())
    ]


def test_ratios_of_very_small_resistors_are_exact_too() -> None:
    """Values below a milliohm's step count as they are: 10.1 and 10.2 mohm differ."""
    expected = largest_pairs(decimal_members("E192", "0.01", "0.0105"))
    found = levels_of(
        Divider(series="E192", low=0.01, high=0.0105), [resistor(series="E192", **{"from": 1e-3})]
    )
    assert len(found) == len(expected)


def test_a_range_without_values_has_no_level() -> None:
    assert levels_of(Divider(series="E3", low=11e3, high=21e3)) == []


def test_only_the_largest_pair_of_a_ratio_is_tried_even_where_a_smaller_one_can_be_had() -> None:
    """22k : 10k reaches what 220k : 100k does; the larger pair is the level, and nobody sells it."""
    divider = Divider(series="E3", low=10e3, high=220e3)
    found = {Fraction(v.bottom) / Fraction(v.top): v for v in levels_of(divider, [resistor(to=100e3)])}
    level = found[Fraction(10, 22)]
    assert (level.top, level.bottom) == (220e3, 100e3)
    assert np.isnan(level.cost)


def test_a_level_costs_two_of_the_cheapest_family_that_offers_both_and_the_cheapest_bypass() -> None:
    resistors = [
        resistor(family="YZR-1", **listed(10e3), price=[(1.0, 0.01)]),
        resistor(family="YZR-2", **listed(10e3, 22e3), price=[(1.0, 0.05)]),
        resistor(family="YZR-3", **listed(10e3, 22e3, 47e3), price=[(1.0, 0.04), (100.0, 0.06)]),
        resistor(family="YZR-4", price=[]),
    ]
    capacitors = [
        capacitor(family="YZC-1", **listed(100e-9), price=[(1.0, 0.5)]),
        capacitor(family="YZC-2", **listed(100e-9, 1e-12), price=[(1.0, 0.25)]),
        capacitor(family="YZC-3", **listed(47e-9), price=[(1.0, 0.01)]),
        capacitor(family="YZC-4", price=[]),
    ]
    divider = Divider(series="E3", low=10e3, high=47e3)
    costs = {(v.top, v.bottom): v.cost for v in levels_of(divider, resistors, capacitors)}
    assert costs[47e3, 47e3] == pytest.approx(2 * 0.04 + 0.25)
    assert costs[22e3, 10e3] == pytest.approx(2 * 0.04 + 0.25)
    dear = request(quantity=100, space={"divider": divider})
    made = catalogs(resistors=resistors, capacitors=capacitors)
    at_100 = {(v.top, v.bottom): v.cost for v in values.divider_levels(dear, made.resistors, made.capacitors)}
    assert at_100[22e3, 10e3] == pytest.approx(2 * 0.05 + 0.25)
    assert at_100[47e3, 10e3] == pytest.approx(2 * 0.06 + 0.25)


def test_a_resistor_outside_the_range_of_rf_may_stand_in_the_divider() -> None:
    """`resistance` is the range of Rf; the divider has a range of its own."""
    found = levels_of(Divider(series="E3", low=10e3, high=10e3), resistance=(1e6, 2e6))
    assert [(v.top, v.bottom) for v in found] == [(10e3, 10e3)]
    assert found[0].cost == pytest.approx(0.07)


@pytest.mark.parametrize("name", ["YZR-1", "Maker C/YZR-1"])
def test_an_excluded_family_makes_no_divider(name: str) -> None:
    divider = Divider(series="E3", low=10e3, high=10e3)
    assert np.isnan(levels_of(divider, [resistor()], exclude=(name,))[0].cost)
    assert np.isfinite(levels_of(divider, [resistor(maker="Maker D")], exclude=("Maker C/YZR-1",))[0].cost)


def test_a_bypass_that_nobody_sells_leaves_no_divider() -> None:
    divider = Divider(series="E3", low=10e3, high=10e3, bypass=130e-9)
    assert np.isnan(levels_of(divider)[0].cost)


def passives(asked: Request, rows: Sequence[Row], role: str) -> values.Passives:
    made = catalogs(**{role: rows})
    return getattr(values, role)(getattr(made, role), asked)  # type: ignore[no-any-return]


def test_rf_is_every_value_of_every_family_inside_the_range() -> None:
    rows = [
        resistor(family="YZR-2", **listed(150e3, 100e3, 150e3, 99e3)),
        resistor(family="YZR-1", series="E3"),
        resistor(family="YZR-3", **listed(1e9)),
        resistor(family="YZR-4", price=[]),
    ]
    found = passives(request(space={"resistance": (100e3, 220e3)}), rows, "resistors")
    chosen = [(found.names[f], v) for f, v in zip(found.family, found.value, strict=True)]
    assert chosen == [("YZR-1", 100e3), ("YZR-1", 220e3), ("YZR-2", 100e3), ("YZR-2", 150e3)]
    # the family without a price is declared, but cannot be bought
    assert found.declared == 6
    assert isinstance(found.declared, int)


def test_require_names_the_only_families_of_its_role() -> None:
    rows = [resistor(family="YZR-1"), resistor(family="YZR-2"), resistor(family="YZR-2", maker="Maker D")]
    space = {"resistance": (100e3, 100e3)}
    assert passives(request(space={**space, "require": ("YZR-2",)}), rows, "resistors").size == 2
    assert passives(request(space={**space, "require": ("Maker D/YZR-2",)}), rows, "resistors").size == 1
    assert passives(request(space={**space, "require": ("YZA-1",)}), rows, "resistors").size == 3


def test_each_capacitance_is_bought_from_the_cheapest_family_and_the_first_by_name() -> None:
    rows = [
        capacitor(family="YZC-3", **listed(1e-12, 2e-12), price=[(1.0, 0.02)]),
        capacitor(family="YZC-2", **listed(1e-12, 3e-12), price=[(1.0, 0.03)]),
        capacitor(family="YZC-1", **listed(2e-12), price=[(1.0, 0.02)]),
    ]
    found = values.cheapest(passives(request(), rows, "capacitors"), request())
    chosen = sorted(
        (value, found.names[f] if f >= 0 else None, price)
        for f, value, price in zip(found.family, found.value, found.price, strict=True)
    )
    assert chosen == [
        (0.0, None, 0.0),
        (1e-12, "YZC-3", 0.02),
        (2e-12, "YZC-1", 0.02),
        (3e-12, "YZC-2", 0.03),
    ]
    assert found.declared == 6
    asked = request(space={"no_capacitor": False})
    without = values.cheapest(passives(asked, rows, "capacitors"), asked)
    assert (without.size, without.declared) == (3, 5)
    assert (without.family >= 0).all()


@given(st.lists(st.one_of(st.none(), st.sampled_from([1e3, 2e3, 10e3, 1e6])), min_size=1, max_size=6))
@settings(max_examples=50, deadline=None, derandomize=True)
def test_low_passes_are_tried_once_each_lowest_cutoff_first_and_none_last(
    cutoffs: list[float | None],
) -> None:
    found = values.low_passes(request(space={"low_pass": tuple(cutoffs)}))
    stated = sorted({c for c in cutoffs if c is not None})
    with np.errstate(divide="ignore"):
        assert (1.0 / (2.0 * np.pi * found)).tolist() == pytest.approx(
            [*stated, *([np.inf] * (None in cutoffs))]
        )


def test_where_corners_are_graded_a_tighter_capacitor_stays_beside_the_cheaper_one() -> None:
    rows = [
        capacitor(family="YZC-1", **listed(1e-12), price=[(1.0, 0.02)], tolerance=0.05),
        capacitor(family="YZC-2", **listed(1e-12), price=[(1.0, 0.03)], tolerance=0.01),
        capacitor(family="YZC-3", **listed(1e-12), price=[(1.0, 0.04)], tolerance=0.01),
        capacitor(family="YZC-4", **listed(2e-12), price=[(1.0, 0.01)], tolerance=None),
    ]
    asked = replace(
        request(space={"no_capacitor": False}), tolerance=Tolerance(method="corners", stated=True)
    )
    found = values.cheapest(passives(asked, rows, "capacitors"), asked)
    assert [found.names[f] for f in found.family] == ["YZC-1", "YZC-2"]
    assert found.spread.tolist() == [0.05, 0.01]
