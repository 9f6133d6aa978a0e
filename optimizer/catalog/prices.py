"""Unit prices out of price breaks."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from optimizer.catalog.parts import Floats, Points


def unit_price(points: Sequence[Points], quantity: int) -> Floats:
    """Return the unit price of each part at a purchase of `quantity` pieces.

    Args:
        points: price breaks of each part, (quantity, unit price), quantity rising; () = unknown.
        quantity: pieces bought [pieces].

    Returns:
        Unit prices [the catalog's currency], NaN where unknown; below the first break the first price.

    >>> unit_price([((1.0, 1.85), (100.0, 1.21)), ()], 100)
    array([1.21,  nan])
    """
    return np.array([_unit_price(breaks, quantity) for breaks in points], dtype=np.float64)


def _unit_price(breaks: Points, quantity: int) -> float:
    if not breaks:
        return math.nan
    reached = [price for first, price in breaks if first <= quantity]
    return reached[-1] if reached else breaks[0][1]
