"""Prices and the currency written with them (codes of ISO 4217); cases are our own contract's."""

from __future__ import annotations

import math
import string

import pytest
from hypothesis import given
from hypothesis import strategies as st

from optimizer.quantities import QuantityError, read_price
from optimizer.quantities.currencies import CURRENCIES, currency_code

cells = st.text(string.digits + ".,-+eE kKmMuµμΩ°%±/√()HzVAFWC€$\u00a0\u2212\u202f\n", max_size=14) | st.text(
    max_size=8
)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (1.85, (1.85, None)),
        ("1.85", (1.85, None)),
        ("1.85 €", (1.85, "EUR")),
        ("€1.85", (1.85, "EUR")),
        ("EUR 1.85", (1.85, "EUR")),
        ("1.85 eur", (1.85, "EUR")),
        ("$1.85", (1.85, "USD")),
        ("US$ 1.85", (1.85, "USD")),
        ("$1.85 USD", (1.85, "USD")),
        ("£0.034", (0.034, "GBP")),
        ("¥120", (120.0, "JPY")),
        ("CHF\u00a01.85", (1.85, "CHF")),
        ("1e3", (1000.0, None)),
        ("-2 €", (-2.0, "EUR")),
    ],
)
def test_prices_carry_their_currency(text: str | float, expected: tuple[float, str | None]) -> None:
    assert read_price(text) == expected


def test_prices_with_a_decimal_comma() -> None:
    assert read_price("1,85 €", decimal_comma=True) == (1.85, "EUR")


@pytest.mark.parametrize(
    "text",
    ["", "€", "1,000", "€1,000.00", "1.85 mV", "1.85 € $", "€1.85 USD", "1,85", "1 000 €", "1.85 / 100"],
)
def test_prices_that_are_refused(text: str) -> None:
    with pytest.raises(QuantityError):
        read_price(text)


@given(cells, st.booleans())
def test_any_price_text_is_a_finite_number_or_a_refusal(text: str, decimal_comma: bool) -> None:
    try:
        value, code = read_price(text, decimal_comma=decimal_comma)
    except QuantityError:
        return
    assert math.isfinite(value)
    assert code is None or len(code) == 3


def test_codes_of_currencies() -> None:
    assert all(
        len(code) == 3 and code.isupper() and currency_code(code.lower()) == code for code in CURRENCIES
    )
    assert {"EUR", "USD", "GBP", "JPY", "CHF", "CNY", "SEK"} <= CURRENCIES
    assert currency_code("EURO") is None
    assert currency_code("") is None
