"""What cannot be between the values of one cell or one row, whatever the catalog says."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import pairwise

import numpy as np

from optimizer.catalog.parts import Floats, Points
from optimizer.quantities import QuantityError

# The lower end of a range and its upper end, by column.
ORDERED = (("supply_min", "supply_max"), ("temp_min", "temp_max"), ("from", "to"))


def refuse_unordered(column: str, points: Points) -> None:
    """Raise QuantityError where x does not rise from pair to pair, or a capacitance does."""
    for (left, before), (right, after) in pairwise(points):
        if right <= left:
            raise QuantityError("the first of each pair must rise from pair to pair")
        if column == "capacitance" and after > before:
            raise QuantityError("a diode's capacitance cannot rise with reverse bias")


def crossed(number: Mapping[str, Floats]) -> Iterator[tuple[str, str, Sequence[int]]]:
    """Yield (lower column, upper column, rows) for every range whose lower end is above its upper."""
    for low, high in ORDERED:
        if low in number and high in number:
            rows = np.flatnonzero(number[low] > number[high]).tolist()
            if rows:
                yield low, high, rows
