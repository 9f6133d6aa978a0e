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
    """The smallest value of any range of an array, and where it is (sparse table by powers of two)."""

    place: Ints
    value: Floats

    @staticmethod
    def of(values: Floats) -> RangeMin:
        """Build the table of `values`."""
        rows = [np.arange(values.size)]
        width = 1
        while 2 * width <= values.size:
            left, right = rows[-1][:-width], rows[-1][width:]
            rows.append(np.where(values[right] < values[left], right, left))
            width *= 2
        place = np.zeros((len(rows), values.size), dtype=np.int64)
        for level, row in enumerate(rows):
            place[level, : row.size] = row
        return RangeMin(place, values[place])

    def least(self, span: Span) -> Floats:
        """The smallest value of each range."""
        return np.minimum(self.value[span.level, span.start], self.value[span.level, span.last])

    def position(self, span: Span) -> Ints:
        """Where the smallest value of each range is (the first of equal ones)."""
        left, right = (span.level, span.start), (span.level, span.last)
        return np.where(self.value[right] < self.value[left], self.place[right], self.place[left])


@dataclass(frozen=True, slots=True)
class Span:
    """Half-open ranges, none empty, as two overlapping ones of 2^`level` places each."""

    level: Ints
    start: Ints
    last: Ints

    @staticmethod
    def of(start: Ints, stop: Ints) -> Span:
        """The ranges from `start` to `stop`."""
        level = np.frexp((stop - start).astype(float))[1] - 1
        return Span(level, start, stop - (1 << level))


@dataclass(frozen=True, slots=True)
class Run:
    """Choices of one passive, all families together, by rising value (then family).

    `index` leads back to them; `price`, `parasitic` and `surplus` (minus the parasitic), `spread` and
    `spread_most` (minus the spread) give the least of any range.
    """

    value: Floats
    index: Ints
    family: RangeMin
    price: RangeMin
    parasitic: RangeMin
    surplus: RangeMin
    spread: RangeMin
    spread_most: RangeMin


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
        spread=RangeMin.of(passives.spread[index]),
        spread_most=RangeMin.of(-passives.spread[index]),
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
