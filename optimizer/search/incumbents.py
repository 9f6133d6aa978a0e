"""The best setting found of every pair, and the last row that the shortlist would show."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from optimizer.search import keys
from optimizer.search.plain import Judged
from optimizer.search.space import Choice, Space

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


@dataclass(slots=True)
class Incumbents:
    """The best setting found of each pair, one slot a pair that has one.

    `slot_of` is by pair, -1 where none was found; `shown` the slots of the best pairs, in rank order;
    `bar` the key between pairs of the last of them, None while there are too few.
    """

    slot_of: NDArray[np.int32]
    judged: Judged | None = None
    key: Floats = field(default_factory=lambda: np.zeros((0, 0)))
    shown: Ints = field(default_factory=lambda: np.zeros(0, dtype=np.int64))
    bar: Floats | None = None

    @staticmethod
    def of(pairs: int) -> Incumbents:
        """No incumbent yet for any of `pairs` pairs."""
        return Incumbents(np.full(pairs, -1, dtype=np.int32))


def improve(space: Space, incumbents: Incumbents, judged: Judged, *, show: int) -> None:
    """Take the best of `judged` for each pair into `incumbents`, and move the bar of `show` rows."""
    key = keys.within_pair(space, judged.choice, judged.columns)
    pair = judged.choice.opamp * space.diodes.price.size + judged.choice.diode
    order = keys.order(np.column_stack([pair, key]))
    first = order[np.r_[True, np.diff(pair[order]) != 0]]
    slots = incumbents.slot_of[pair[first]]
    better = slots < 0
    known = ~better
    if known.any():
        better[known] = keys.less(key[first[known]], incumbents.key[slots[known]])
    first, slots = first[better], slots[better]
    if not first.size:
        return
    fresh = slots < 0
    before = 0 if incumbents.judged is None else incumbents.judged.reach.size
    slots[fresh] = before + np.arange(int(fresh.sum()), dtype=slots.dtype)
    incumbents.slot_of[pair[first]] = slots
    _store(incumbents, (slots, fresh), judged.take(first), key[first])
    _raise_bar(space, incumbents, slots.astype(np.int64), show)


def _store(incumbents: Incumbents, places: tuple[NDArray[np.int32], Bools], new: Judged, key: Floats) -> None:
    """Write `new` into its slots; fresh slots follow the old ones in order."""
    slots, fresh = places
    if incumbents.judged is None:
        incumbents.judged, incumbents.key = new, key
        return
    old = incumbents.judged
    for column, values in zip(_arrays(old), _arrays(new), strict=True):
        column[slots[~fresh]] = values[~fresh]
    incumbents.key[slots[~fresh]] = key[~fresh]
    if fresh.any():
        incumbents.judged = _joined(old, new.take(fresh))
        incumbents.key = np.concatenate([incumbents.key, key[fresh]])


def _arrays(judged: Judged) -> tuple[NDArray[np.generic], ...]:
    judged_columns = (judged.reach, judged.admitted, judged.margin_columns)
    return (*judged.choice.columns(), *judged_columns, *judged.columns)


def _joined(left: Judged, right: Judged) -> Judged:
    columns = [np.concatenate(both) for both in zip(_arrays(left), _arrays(right), strict=True)]
    return Judged(Choice(*columns[:6]), *columns[6:])


def _raise_bar(space: Space, incumbents: Incumbents, changed: Ints, show: int) -> None:
    """The last row shown, after the incumbents at slots `changed` improved."""
    if incumbents.judged is None:
        return
    slots = np.union1d(incumbents.shown, changed)
    some = incumbents.judged.take(slots)
    key = keys.between_pairs(space, some.choice, some.columns)
    order = keys.order(key)[:show]
    incumbents.shown = slots[order]
    if order.size == show:
        incumbents.bar = key[order[-1]]
