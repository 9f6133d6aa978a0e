"""What a build pays for a part: quantity breaks, buying up to the next break, and stock, in whole cents."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from math import ceil
from typing import Any

import numpy as np
from numpy.typing import NDArray

CENTS = 100
FITS = 2**62
"""Below this an integer of numpy holds the products."""
Breaks = Sequence[tuple[float, float]]


@dataclass(frozen=True, slots=True)
class Piece:
    """The cost of `first` to `last` pieces a board: `cost` + `slope` (n - `first`), in cents a build."""

    first: int
    last: int
    cost: int
    slope: int


@dataclass(frozen=True, slots=True)
class Purchase:
    """What is bought for a build: `quantity` pieces at `unit` each, `cents` in all."""

    quantity: int
    unit: float
    cents: int


def purchase(breaks: Breaks, boards: int, pieces: int, stock: float | None) -> Purchase | None:
    """The cheapest way to buy `pieces` a board for `boards` boards; None where the stock is too small.

    `breaks` are (from quantity, unit price), quantity rising; below the first its price holds. Buying
    up to a break is allowed where that costs less. Of equal costs the smallest quantity is bought.
    """
    need = boards * pieces
    if not need:
        return Purchase(0, breaks[0][1], 0)
    options = []
    for place, (first, unit) in enumerate(breaks):
        quantity = max(need, _least(place, first))
        if stock is None or quantity <= stock:
            options.append((int(_cents(unit, np.array([quantity]))[0]), quantity, unit))
    if not options:
        return None
    cents, quantity, unit = min(options)
    return Purchase(quantity, unit, cents)


def _least(place: int, first: float) -> int:
    return ceil(first) if place else 0


def in_cents(money: float) -> int:
    """`money` in whole cents, half a cent up, as its decimal digits say."""
    return int(_cents(money, np.array([1]))[0])


def _cents(unit: float, quantity: NDArray[np.int64]) -> NDArray[Any]:
    """`quantity` times `unit` in whole cents, half a cent up: exact on the price's decimal digits."""
    top, bottom = Decimal(repr(float(unit))).as_integer_ratio()
    exact = 2 * CENTS * top * int(quantity.max(initial=1)) + bottom < FITS
    many = quantity if exact else quantity.astype(object)
    return np.asarray((2 * CENTS * top * many + bottom) // (2 * bottom))


def schedule(breaks: Breaks, boards: int, most: int, stock: float | None) -> NDArray[np.float64]:
    """The cents that `purchase` pays for 0 to `most` pieces a board; infinite beyond the stock."""
    need = boards * np.arange(1, most + 1)
    best = np.full(most + 1, np.inf)
    best[0] = 0.0
    for place, (first, unit) in enumerate(breaks):
        quantity = np.maximum(need, _least(place, first))
        cents = _cents(unit, quantity).astype(float)
        if stock is not None:
            cents[quantity > stock] = np.inf
        np.minimum(best[1:], cents, out=best[1:])
    return best


def pieces(breaks: Breaks, boards: int, most: int, stock: float | None) -> tuple[Piece, ...]:
    """The costs of 1 to `most` pieces a board as exact linear runs; as far as the stock reaches."""
    runs: list[Piece] = []
    for n, cents in enumerate(schedule(breaks, boards, most, stock)[1:].tolist(), 1):
        if cents == np.inf:
            continue
        run = runs[-1] if runs else None
        if run is not None and run.last == n - 1:
            step = int(cents) - (run.cost + run.slope * (run.last - run.first))
            if run.first == run.last or step == run.slope:
                runs[-1] = Piece(run.first, n, run.cost, step)
                continue
        runs.append(Piece(n, n, int(cents), 0))
    return tuple(runs)
