"""The contexts: every wiring with every reference, as arrays in the order that breaks ties."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.physics import reference
from optimizer.request.types import WIRINGS, Request
from optimizer.search.values import Level

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Contexts:
    """One element a context: `wiring` (index into WIRINGS), `divided`, `vref` [V] at nominal, ...

    `top`, `bottom` [ohm] (NaN on ground), `source` = R1 || R2 [ohm] (0 on ground), `current` [A]
    and `cost` of the divider, `resistors` and `bypass` the catalog rows of its families (-1 on ground),
    `spread` the relative half width of its resistors (0 on ground, NaN unknown),
    `bias` = reverse bias [V] at nominal. `group` numbers the runs of one wiring and one kind of
    reference; inside a group Vref rises.
    """

    wiring: Ints
    sign: Floats
    biased: Bools
    divided: Bools
    buffered: Bools
    vref: Floats
    top: Floats
    bottom: Floats
    source: Floats
    current: Floats
    cost: Floats
    resistors: Ints
    bypass: Ints
    spread: Floats
    bias: Floats
    group: Ints

    @property
    def size(self) -> int:
        """How many contexts there are."""
        return int(self.wiring.size)


def declared(request: Request, levels: Sequence[Level]) -> int:
    """How many contexts the request declares, before any is found impossible."""
    space = request.space
    references = ("ground" in space.references) + len(levels) * ("divider" in space.references)
    return len(set(space.wirings)) * references


def build(request: Request, levels: Sequence[Level]) -> Contexts:
    """All contexts that can exist: reverse bias above 0 where biased, dividers that can be bought."""
    supply, space = request.supply, request.space
    rows: list[tuple[float, ...]] = []
    for wiring, name in enumerate(WIRINGS):
        if name not in space.wirings:
            continue
        if "ground" in space.references:
            rows.append((wiring, np.nan, np.nan, 0.0, -1, -1, 0.0))
        if "divider" in space.references:
            rows.extend(
                (wiring, v.top, v.bottom, v.cost, v.resistors, v.bypass, v.spread)
                for v in levels
                if np.isfinite(v.cost)
            )
    table = np.array(rows, dtype=float).reshape(-1, 7)
    wirings, top, bottom, cost = table[:, 0].astype(np.int64), table[:, 1], table[:, 2], table[:, 3]
    divided = np.isfinite(top)
    vref = np.where(divided, reference.divided(supply.high, supply.low, top, bottom), 0.0)
    biased = np.asarray(wirings % 2 == 1)
    rising = np.asarray(wirings < 2)
    bias = np.where(rising, vref - supply.low, supply.high - vref)
    bias = np.where(biased, bias, 0.0)
    keep = ~biased | (bias > 0.0)
    group = np.cumsum(np.r_[0, (np.diff(wirings[keep]) != 0) | (np.diff(divided[keep].astype(int)) != 0)])
    return Contexts(
        wiring=wirings[keep],
        sign=np.where(rising, 1.0, -1.0)[keep],
        biased=biased[keep],
        divided=divided[keep],
        buffered=(divided & ~biased)[keep],
        vref=vref[keep],
        top=top[keep],
        bottom=bottom[keep],
        source=np.where(divided, reference.parallel(top, bottom), 0.0)[keep],
        current=np.where(divided, reference.current(supply.high, supply.low, top, bottom), 0.0)[keep],
        cost=cost[keep],
        resistors=table[keep, 4].astype(np.int64),
        bypass=table[keep, 5].astype(np.int64),
        spread=table[keep, 6],
        bias=bias[keep],
        group=group[: int(keep.sum())],
    )
