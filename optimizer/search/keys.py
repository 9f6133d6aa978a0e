"""Ranking keys as columns of numbers to minimise: within a pair, and between pairs."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from optimizer.search.space import Choice, Space

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


def primary(by: str, figures: Mapping[str, Floats], least: Floats) -> Floats:
    """The figure that ranks first, smaller first; unknown last. `least`: smallest margin, cut at comfort."""
    if by == "margin":
        return -least
    value = -figures["snr"] if by == "snr" else figures[by]
    return np.asarray(np.where(np.isnan(value), np.inf, value))


def comfortable(space: Space, margin_columns: Floats) -> Floats:
    """Margins (candidates, targets) cut at comfort and sorted, the smallest first."""
    return np.sort(np.minimum(margin_columns, space.comfort), axis=1)


def within_pair(space: Space, choice: Choice, columns: tuple[Floats, Floats, Floats]) -> Floats:
    """Key rows (candidates, k) of settings of one pair; `columns`: primary, cost, sorted margins."""
    first, cost, vector = columns
    return np.column_stack([first, cost, -vector, ties(space, choice)])


def ties(space: Space, choice: Choice) -> Floats:
    """Last ties: Rf, placed Cf, wiring and Vref (the context's order), low-pass, families by name."""
    return np.column_stack(
        [
            space.resistors.value[choice.resistor],
            space.capacitors.value[choice.capacitor],
            choice.context.astype(float),
            choice.low_pass.astype(float),
            space.resistors.family[choice.resistor].astype(float),
            space.capacitors.family[choice.capacitor].astype(float),
        ]
    )


def between_pairs(space: Space, choice: Choice, columns: tuple[Floats, Floats, Floats]) -> Floats:
    """Key rows of best settings of different pairs: primary, cost, margin up to comfort, names."""
    first, cost, vector = columns
    names = (space.order_diodes[choice.diode], space.order_opamps[choice.opamp])
    return np.column_stack([first, cost, -vector[:, 0], *names])


def order(key: Floats) -> Ints:
    """Rows of `key` in rising lexicographic order."""
    return np.lexsort(key.T[::-1])


def less(left: Floats, right: Floats) -> NDArray[np.bool_]:
    """Row by row, whether `left` comes strictly before `right` (broadcast on rows)."""
    left, right = np.broadcast_arrays(left, right)
    before = np.zeros(left.shape[0], dtype=bool)
    open_ = np.ones(left.shape[0], dtype=bool)
    for column in range(left.shape[1]):
        before |= open_ & (left[:, column] < right[:, column])
        open_ &= left[:, column] == right[:, column]
        if not open_.any():
            break
    return before
