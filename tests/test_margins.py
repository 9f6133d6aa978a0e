"""Margins by the model's table, their clipping and rounding; and figures rounded to 9 digits."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.figures import rounded
from tests.search.made import request

derandomized = settings(max_examples=400, deadline=None, derandomize=True)


def margin(name: str, value: float, limit: float) -> float:
    return float(margins.margin(name, np.array([value]), limit)[0])


@pytest.mark.parametrize("name", margins.TARGETS)
def test_a_figure_at_its_limit_has_margin_0(name: str) -> None:
    assert margin(name, 3.7, 3.7) == 0.0
    assert not np.signbit(margin(name, 3.7, 3.7))


# by hand from the model's table
TABLE = [
    ("bandwidth", 30e3, 20e3, 0.5),
    ("bandwidth", 10e3, 20e3, -0.5),
    ("full_scale", 4e-6, 2e-6, 1.0),
    ("slew", 1.2, 1.5, -0.2),
    ("snr", 66.0206, 60.0, 1.0),
    ("snr", 53.9794, 60.0, -0.5),
    ("dynamic_range", 100.0, 80.0, 9.0),
    ("phase_margin", 70.0, 55.0, 0.5),
    ("phase_margin", 40.0, 55.0, -0.5),
    ("peaking", 0.0, 1.0, 1.0),
    ("peaking", 0.25, 1.0, 0.75),
    ("peaking", 1.5, 1.0, -0.5),
    ("offset", 10e-3, 30e-3, 2.0),
    ("supply_current", 4e-3, 3e-3, -0.25),
    ("cost", 3.0, 4.5, 0.5),
]


@pytest.mark.parametrize(("name", "value", "limit", "expected"), TABLE)
def test_margins_of_the_table(name: str, value: float, limit: float, expected: float) -> None:
    assert margin(name, value, limit) == pytest.approx(expected, abs=2e-6)


@derandomized
@given(
    st.sampled_from(margins.TARGETS),
    st.floats(-1e9, 1e9),
    st.floats(1e-9, 1e9),
)
def test_margins_are_clipped_and_rounded(name: str, value: float, limit: float) -> None:
    found = margin(name, value, limit)
    assert -1.0 <= found <= 1000.0
    assert found == round(found, 9)


@pytest.mark.parametrize("name", margins.TARGETS)
def test_a_figure_that_does_not_exist_has_margin_minus_1(name: str) -> None:
    assert margin(name, float("nan"), 1.0) == -1.0


@pytest.mark.parametrize(
    ("name", "value", "expected"),
    [("snr", -np.inf, -1.0), ("snr", 1e6, 1000.0), ("bandwidth", 1e12, 1000.0), ("bandwidth", 0.0, -1.0),
     ("offset", 0.0, 1000.0), ("cost", 1e12, -1.0), ("peaking", 1e3, -1.0), ("phase_margin", -170.0, -1.0)],
)  # fmt: skip
def test_extremes_are_clipped(name: str, value: float, expected: float) -> None:
    assert margin(name, value, 1.0) == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("name", margins.TARGETS)
def test_better_figures_never_have_smaller_margins(name: str) -> None:
    values = np.linspace(0.01, 50.0, 2000)
    found = margins.margin(name, values, 7.0)
    worse = name in ("peaking", "offset", "supply_current", "cost")
    assert (np.diff(found) * (-1.0 if worse else 1.0) >= 0.0).all()


def test_an_unknown_target_is_no_target() -> None:
    with pytest.raises(KeyError, match="weight"):
        margins.margin("weight", np.ones(1), 1.0)


def test_graded_are_the_stated_targets_and_full_scale_in_the_order_of_the_record() -> None:
    """The order of the contract's record, typed here once more."""
    order = ("bandwidth", "snr", "dynamic_range", "full_scale", "phase_margin", "peaking", "slew", "offset",
             "supply_current", "cost")  # fmt: skip
    assert tuple(margins.limits(request())) == ("full_scale",)
    assert margins.limits(request())["full_scale"] == 1e-6
    stated = {name: 2.0 for name in order if name != "full_scale"}
    found = margins.limits(request(targets=stated))
    assert tuple(found) == order
    assert {name: limit for name, limit in found.items() if name != "full_scale"} == stated


def test_the_limiting_target_is_the_first_of_the_smallest() -> None:
    stated = {"bandwidth": 1.0, "snr": 1.0, "cost": 1.0}
    assert margins.limiting([0.2, 0.1, 0.1], stated) == "snr"
    assert margins.limiting([-1.0, -1.0, -1.0], stated) == "bandwidth"


def test_margins_are_one_column_a_target() -> None:
    figures = {"snr": np.array([40.0, np.nan]), "cost": np.array([1.0, 4.0])}
    found = margins.margins(figures, {"snr": 40.0, "cost": 2.0})
    np.testing.assert_array_equal(found, [[0.0, 1.0], [-1.0, -0.5]])


magnitudes = st.builds(
    lambda m, e, s: s * m * 10.0**e, st.floats(1.0, 10.0), st.integers(-15, 14), st.sampled_from([1, -1])
)


@derandomized
@given(magnitudes)
def test_rounding_is_to_9_digits_within_one_last_place(x: float) -> None:
    found, expected = float(rounded(np.array([x]))[0]), float(f"{x:.9g}")
    if found == expected:
        return
    half_way = abs(abs(x - expected) - abs(x - found)) < 1e-15 * abs(x) * 1e3
    assert abs(found - expected) <= np.spacing(abs(expected)) or half_way


@pytest.mark.parametrize(
    ("x", "expected"),
    [(0.0, 0.0), (-0.0, 0.0), (1.0, 1.0), (0.999999999999, 1.0), (123456789.4, 123456789.0), (1e-15, 1e-15),
     (9.99999999951e-4, 1e-3), (1234567890123.0, 1234567890000.0), (-2.0000000004, -2.0)],
)  # fmt: skip
def test_rounding_by_hand(x: float, expected: float) -> None:
    assert rounded(np.array([x]))[0] == pytest.approx(expected, rel=3e-16, abs=0.0)


def test_rounding_leaves_what_is_no_number_and_the_shape() -> None:
    found = rounded(np.array([[np.nan, np.inf], [-np.inf, 0.0]]))
    assert np.isnan(found[0, 0])
    assert found[0, 1] == np.inf
    assert found[1, 0] == -np.inf
    assert found[1, 1] == 0.0


@derandomized
@given(magnitudes)
def test_rounding_twice_changes_nothing_more(x: float) -> None:
    once = rounded(np.array([x]))
    assert rounded(once)[0] == once[0]


@derandomized
@given(st.lists(magnitudes, min_size=2, max_size=20))
def test_rounding_never_swaps_two_figures(values: list[float]) -> None:
    found = rounded(np.sort(np.array(values)))
    assert (np.diff(found) >= 0.0).all()


@derandomized
@given(magnitudes)
def test_rounding_is_the_same_alone_and_in_company(x: float) -> None:
    row = rounded(np.full(9, x))
    assert (row == rounded(np.array([x]))[0]).all()
