"""Boxes: ranges of choices of one pair, many at a time, and the tables that bound any range."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.search.space import Choice, Space
from optimizer.search.values import Passives

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Boxes:
    """One row a box: op-amp, diode, and half-open ranges of contexts, resistors, capacitors, low-passes."""

    rows: Ints

    OPAMP, DIODE, X0, X1, R0, R1, C0, C1, L0, L1 = range(10)

    def __len__(self) -> int:
        return int(self.rows.shape[0])

    def column(self, index: int) -> Ints:
        """One column of all boxes."""
        return np.asarray(self.rows[:, index])

    def take(self, rows: NDArray[np.int64] | NDArray[np.bool_]) -> Boxes:
        """The boxes at `rows`."""
        return Boxes(self.rows[rows])


@dataclass(frozen=True, slots=True)
class RangeMin:
    """Positions of the smallest value of any run of an array (sparse table)."""

    values: Floats
    table: Ints

    @staticmethod
    def of(values: Floats) -> RangeMin:
        """Build the table of `values`."""
        rows = [np.arange(values.size)]
        width = 1
        while 2 * width <= values.size:
            left, right = rows[-1][:-width], rows[-1][width:]
            rows.append(np.where(values[right] < values[left], right, left))
            width *= 2
        table = np.zeros((len(rows), values.size), dtype=np.int64)
        for level, row in enumerate(rows):
            table[level, : row.size] = row
        return RangeMin(values, table)

    def position(self, start: Ints, stop: Ints) -> Ints:
        """Where the smallest of values[start:stop] is; every range non-empty."""
        level = np.frexp((stop - start).astype(float))[1] - 1
        left = self.table[level, start]
        right = self.table[level, stop - (1 << level)]
        return np.asarray(np.where(self.values[right] < self.values[left], right, left))

    def least(self, start: Ints, stop: Ints) -> Floats:
        """The smallest of values[start:stop]."""
        return self.values[self.position(start, stop)]


@dataclass(frozen=True, slots=True)
class Run:
    """Choices of one passive, all families together, by rising value (then family).

    `index` leads back to them; `price`, `parasitic` and `surplus` (minus the parasitic) give the least
    of any range.
    """

    value: Floats
    index: Ints
    family: RangeMin
    price: RangeMin
    parasitic: RangeMin
    surplus: RangeMin


def run_of(passives: Passives) -> Run:
    """Lay out `passives` as one rising run."""
    index = np.lexsort((passives.family, passives.value))
    return Run(
        value=passives.value[index],
        index=index,
        family=RangeMin.of(passives.family[index].astype(float)),
        price=RangeMin.of(passives.price[index]),
        parasitic=RangeMin.of(passives.parasitic[index]),
        surplus=RangeMin.of(-passives.parasitic[index]),
    )


def whole(space: Space, opamp: Ints, diode: Ints) -> Boxes:
    """One box a pair: everything that the space declares."""
    rows = np.zeros((opamp.size, 10), dtype=np.int64)
    rows[:, Boxes.OPAMP], rows[:, Boxes.DIODE] = opamp, diode
    rows[:, Boxes.X1] = space.contexts.size
    rows[:, Boxes.R1] = space.resistors.size
    rows[:, Boxes.C1] = space.capacitors.size
    rows[:, Boxes.L1] = space.low_passes.size
    return Boxes(rows)


def single(boxes: Boxes) -> NDArray[np.bool_]:
    """Where a box holds one setting only."""
    return np.asarray(np.all(boxes.rows[:, 3::2] - boxes.rows[:, 2::2] == 1, axis=1))


def settings_of(boxes: Boxes, resistors: Run, capacitors: Run) -> Choice:
    """The settings of boxes that hold one each."""
    column = boxes.column
    return Choice(
        column(Boxes.OPAMP),
        column(Boxes.DIODE),
        column(Boxes.X0),
        resistors.index[column(Boxes.R0)],
        capacitors.index[column(Boxes.C0)],
        column(Boxes.L0),
    )
