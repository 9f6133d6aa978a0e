"""How the board's report says money, uses of budgets, and which copies of a channel."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from decimal import ROUND_HALF_UP, Decimal

from optimizer.quantities import show
from optimizer.report.words import count, ranges

CENTS = 100
MOST_DIGITS = 9
KINDS: Mapping[str, str] = {"cost": "price", "supply_current": "current", "area": "area"}
NUMBERS = (
    *("no", "one", "two", "three", "four", "five", "six"),
    *("seven", "eight", "nine", "ten", "eleven", "twelve"),
)


def money(amount: float) -> str:
    """An amount with two decimals, more where it is less than a tenth: '23.40', '0.0038'."""
    whole, _, decimals = show(amount, "price", 2).partition(".")
    return f"{whole}.{decimals.rstrip('0'):0<2}"


def of_cents(cents: float) -> str:
    """Cents as an amount: '9364.00'."""
    return f"{cents / CENTS:.2f}"


def in_cents(amount: float) -> int:
    """An amount in whole cents, half a cent up, as its decimal digits say."""
    return int((Decimal(repr(amount)) * CENTS).to_integral_value(ROUND_HALF_UP))


def unit_price(price: float) -> str:
    """A price with all of its digits, so that it multiplies out: '0.44', '1.325', '0.0034'."""
    said = (show(price, "price", digits) for digits in range(1, MOST_DIGITS))
    return next((text for text in said if float(text) == price), show(price, "price", MOST_DIGITS))


def amount(name: str, value: float | None, digits: int = 3) -> str:
    """What is used of one of the totals, with its unit; 'unknown' where it is."""
    if value is None:
        return "unknown"
    if name not in KINDS:
        return count(round(value))
    return money(value) if name == "cost" and digits == 3 else show(value, KINDS[name], digits)


def told_apart(name: str, value: float | None, limit: float) -> tuple[str, str]:
    """A use and its limit with as many digits as it takes to tell the two apart."""
    for digits in range(3, MOST_DIGITS):
        said = (amount(name, value, digits), amount(name, limit, digits))
        if said[0] != said[1] or value == limit:
            break
    return said


def worded(number: int, what: str) -> str:
    """A count of things in running text: 'one line item', 'two line items', '13 line items'."""
    said = NUMBERS[number] if number < len(NUMBERS) else count(number)
    return f"{said} {what}" if number == 1 else f"{said} {what}s"


def numbered(copies: Sequence[int]) -> str:
    """Copies of a channel by number: '1', '1-4, 6'."""
    return ", ".join(ranges(sorted(copies)))
