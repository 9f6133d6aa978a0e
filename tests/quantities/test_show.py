"""Showing quantities, and reading what was shown; cases without a source are our own contract's."""

from __future__ import annotations

import math

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from optimizer.quantities import KINDS, read_price, read_quantity, show

READABLE = [kind for kind in KINDS if kind not in ("price", "count", "gain")]
values = st.floats(min_value=1e-17, max_value=9e14) | st.floats(min_value=-9e14, max_value=-1e-17)


@pytest.mark.parametrize(
    ("value", "kind", "expected"),
    [
        (4.7e-12, "capacitance", "4.7 pF"),
        (20e3, "frequency", "20 kHz"),
        (999.6, "frequency", "1 kHz"),
        (999.4, "frequency", "999 Hz"),
        (123456.0, "resistance", "123 kohm"),
        (46.23, "level", "46.2 dB"),
        (2.4, "voltage", "2.4 V"),
        (-3e-3, "voltage", "-3 mV"),
        (2e-6, "voltage", "2 \u00b5V"),
        (0.0, "voltage", "0 V"),
        (60.0, "angle", "60 deg"),
        (0.03, "fraction", "3 %"),
        (1e5, "gain", "100 dB"),
        (25.0, "temperature", "25 \u00b0C"),
        (7.5e-6, "area", "7.5 mm2"),
        (5e6, "slew_rate", "5 V/\u00b5s"),
        (50e-6, "tempco", "50 ppm/K"),
        (0.05, "responsivity", "0.05 A/W"),
        (4.5, "price", "4.50"),
        (0.0123, "price", "0.0123"),
        (1234.567, "price", "1234.57"),
        (20000.0, "count", "20000"),
        (1.5, "ratio", "1.5"),
        (1e-25, "capacitance", "1.00e-25 F"),
        (None, "voltage", "-"),
        (math.nan, "price", "-"),
        (math.inf, "resistance", "infinite"),
    ],
)
def test_shown_in_engineering_notation(value: float | None, kind: str, expected: str) -> None:
    assert show(value, kind) == expected


def test_shown_with_the_digits_asked_for() -> None:
    assert show(1234.567, "frequency", 2) == "1.2 kHz"
    assert show(1234.567, "frequency", 6) == "1.23457 kHz"
    assert show(123456.0, "frequency", 2) == "120 kHz"
    assert show(123456.0, "frequency", 1) == "100 kHz"


@given(values, st.sampled_from(READABLE), st.integers(1, 12))
@example(999.9999, "frequency", 3)
@example(1e-17, "temperature", 3)
def test_what_is_shown_reads_back_to_the_digits_shown(value: float, kind: str, digits: int) -> None:
    rounded = float(f"{value:.{digits - 1}e}")
    assert read_quantity(show(value, kind, digits), kind) == rounded


@given(st.floats(min_value=1e-5, max_value=1e9))
def test_gains_read_back(value: float) -> None:
    assert math.isclose(read_quantity(show(value, "gain", 12), "gain"), value, rel_tol=1e-8)


@given(st.floats(min_value=1e-4, max_value=1e6))
def test_prices_and_counts_read_back(value: float) -> None:
    assert math.isclose(read_price(show(value, "price"))[0], value, rel_tol=5.001e-3)
    assert read_quantity(show(round(value), "count"), "count") == round(value)


@given(values, st.sampled_from([kind for kind in KINDS if KINDS[kind].engineering]))
def test_engineering_notation_keeps_one_to_three_digits_before_the_point(value: float, kind: str) -> None:
    if kind != "gain":
        assert 1 <= abs(float(show(value, kind).split()[0])) < 1000
