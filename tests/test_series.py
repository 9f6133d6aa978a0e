"""Preferred numbers over ranges; the lists themselves are held to published ones in tests/published."""

from __future__ import annotations

import math
from decimal import Decimal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from optimizer.quantities import read_quantity, show
from optimizer.series import SERIES, values

NAMES = sorted(SERIES)
ends = st.floats(min_value=1e-13, max_value=1e10)


def by_formula(count: int, digits: int) -> list[int]:
    return [round(10 ** (digits - 1 + k / count)) for k in range(count)]


def test_the_lists_are_not_the_rounded_formula() -> None:
    differing = {
        name: set(SERIES[name]) - set(by_formula(len(SERIES[name]), 3)) for name in ("E48", "E96", "E192")
    }
    assert differing == {"E48": set(), "E96": set(), "E192": {920}}
    assert set(SERIES["E24"]) - set(by_formula(24, 2)) == {27, 30, 33, 36, 39, 43, 47, 82}


@pytest.mark.parametrize(
    ("coarse", "fine"), [("E3", "E6"), ("E6", "E12"), ("E12", "E24"), ("E48", "E96"), ("E96", "E192")]
)
def test_a_coarser_series_leaves_out_every_other_member(coarse: str, fine: str) -> None:
    assert SERIES[coarse] == SERIES[fine][::2]


def test_both_ends_belong() -> None:
    assert values("E6", 1e3, 4.7e3).tolist() == [1e3, 1.5e3, 2.2e3, 3.3e3, 4.7e3]
    assert values("E3", 4.7e-12, 4.7e-12).tolist() == [4.7e-12]
    above, below = math.nextafter(1e3, math.inf), math.nextafter(4.7e3, 0)
    assert values("E6", above, below).tolist() == [1.5e3, 2.2e3, 3.3e3]


def test_a_range_without_members_is_empty() -> None:
    assert values("E3", 11.0, 21.0).tolist() == []
    assert values("E3", 47.0, 10.0).tolist() == []


def test_unknown_series_and_impossible_ranges() -> None:
    with pytest.raises(KeyError):
        values("E7", 1.0, 10.0)
    for low, high in [
        (0.0, 1.0),
        (-1.0, 1.0),
        (math.nan, 1.0),
        (1.0, math.inf),
        (1.0, math.nan),
        (math.inf, 1.0),
    ]:
        with pytest.raises(ValueError, match="finite positive"):
            values("E6", low, high)


def test_the_result_cannot_be_changed() -> None:
    with pytest.raises(ValueError, match="read-only"):
        values("E6", 1.0, 10.0)[0] = 2.0


@given(st.sampled_from(NAMES), ends, ends)
def test_every_member_in_the_range_and_no_other(name: str, one: float, other: float) -> None:
    low, high = min(one, other), max(one, other)
    members = [Decimal(member).scaleb(power) for power in range(-17, 12) for member in SERIES[name]]
    expected = [float(member) for member in members if Decimal(repr(low)) <= member <= Decimal(repr(high))]
    found = values(name, low, high)
    assert found.tolist() == expected
    assert bool(np.all(np.diff(found) > 0))


@given(st.sampled_from(NAMES), st.integers(-13, 9), st.integers(0, 191))
def test_members_equal_what_is_read_from_text(name: str, power: int, index: int) -> None:
    member = SERIES[name][index % len(SERIES[name])]
    nearest = float(Decimal(member).scaleb(power))
    assert values(name, nearest, nearest).tolist() == [nearest]
    assert read_quantity(show(nearest, "resistance"), "resistance") == nearest
