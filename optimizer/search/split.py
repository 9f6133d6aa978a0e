"""Narrowing boxes to what their bounds leave, and splitting them in two."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from optimizer.search.bounds import Narrow
from optimizer.search.boxes import Boxes
from optimizer.search.view import Index, View

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_MUCH = 1e6


def narrowed(index: Index, boxes: Boxes, left: Narrow, v: View) -> Boxes:
    """`boxes` cut to the resistors and capacitors that `left` admits; some may come out empty."""
    rows = boxes.rows.copy()
    resistors, capacitors = index.resistors.value, index.capacitors.value
    placed = index.capacitors.value[boxes.column(Boxes.C0)]
    parasitic_low = v.cf_low - placed
    parasitic_high = v.cf_high - index.capacitors.value[boxes.column(Boxes.C1) - 1]
    r_low = np.searchsorted(resistors, left.rf_low * (1.0 - 1e-9), "left")
    r_high = np.searchsorted(resistors, left.rf_high * (1.0 + 1e-9), "right")
    c_low = np.searchsorted(capacitors, (left.cf_low - parasitic_high) - 1e-9 * left.cf_low, "left")
    c_high = np.searchsorted(capacitors, (left.cf_high - parasitic_low) + 1e-9 * left.cf_high, "right")
    rows[:, Boxes.R0] = np.maximum(rows[:, Boxes.R0], r_low)
    rows[:, Boxes.R1] = np.minimum(rows[:, Boxes.R1], r_high)
    rows[:, Boxes.C0] = np.maximum(rows[:, Boxes.C0], c_low)
    rows[:, Boxes.C1] = np.minimum(rows[:, Boxes.C1], c_high)
    return Boxes(rows)


def filled(boxes: Boxes) -> NDArray[np.bool_]:
    """Where a box still holds a setting."""
    return np.asarray(np.all(boxes.rows[:, 3::2] > boxes.rows[:, 2::2], axis=1))


def halves(index: Index, boxes: Boxes) -> Boxes:
    """Both halves of every box (none may be single), cut where the bounds gain most."""
    rows = boxes.rows
    widths = _widths(index, boxes)
    widths[rows[:, 3::2] - rows[:, 2::2] <= 1] = -1.0
    axis = np.argmax(widths, axis=1)
    each = np.arange(len(boxes))
    start, stop = rows[each, 2 + 2 * axis], rows[each, 3 + 2 * axis]
    middle = (start + stop) // 2
    of_context = axis == 0
    middle[of_context] = _group_cut(index, start[of_context], stop[of_context], middle[of_context])
    lower, upper = rows.copy(), rows.copy()
    lower[each, 3 + 2 * axis] = middle
    upper[each, 2 + 2 * axis] = middle
    return Boxes(np.concatenate([lower, upper]))


def _group_cut(index: Index, start: Ints, stop: Ints, middle: Ints) -> Ints:
    """`middle`, or the border between two groups of contexts nearest before or after it."""
    group = index.space.contexts.group
    border = np.searchsorted(group, np.arange(group[-1] + 2), "left")
    of_middle = group[middle]
    before = border[of_middle]
    cut = np.where(before > start, before, border[of_middle + 1])
    return np.where(group[start] == group[stop - 1], middle, cut)


def _widths(index: Index, boxes: Boxes) -> Floats:
    """How much each axis blurs the bounds: relative spreads of contexts, Rf, Cf and low-passes."""
    space, column = index.space, boxes.column
    x0, x1 = column(Boxes.X0), column(Boxes.X1) - 1
    contexts = space.contexts
    span = space.bench.high - space.bench.low
    several = contexts.group[x0] != contexts.group[x1]
    context = np.where(several, _MUCH, np.abs(contexts.vref[x1] - contexts.vref[x0]) / span + 1e-6)
    resistors = index.resistors.value
    r_low, r_high = resistors[column(Boxes.R0)], resistors[column(Boxes.R1) - 1]
    capacitors = index.capacitors.value
    c_low, c_high = capacitors[column(Boxes.C0)], capacitors[column(Boxes.C1) - 1]
    node = space.diodes.capacitance[column(Boxes.DIODE), x0] * 0.3 + 1e-13
    several_lags = np.where(column(Boxes.L1) - column(Boxes.L0) > 1, _MUCH / 2.0, 0.0)
    return np.column_stack(
        [
            context,
            np.log(r_high / r_low) + 1e-7,
            np.log((c_high + node) / (c_low + node)) + 1e-8,
            several_lags,
        ]
    )
