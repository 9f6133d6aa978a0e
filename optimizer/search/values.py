"""The passive choices: feedback resistors and capacitors, divider levels, low-passes, with their prices."""

from __future__ import annotations

from collections.abc import Sequence
from collections.abc import Set as AbstractSet
from dataclasses import dataclass
from decimal import Decimal
from math import gcd

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog import unit_price
from optimizer.catalog.parts import Parts
from optimizer.request.types import Request, Space
from optimizer.series import values as series_values

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Passives:
    """Choices of one passive, grouped by family, rising within each.

    `family` is an index into `names` (sorted by name, then maker) and `rows` (their catalog rows),
    `value` in ohm or F, `parasitic` in F, `price` a piece at the build quantity. `declared` counts
    them before any was dropped.
    """

    names: tuple[str, ...]
    rows: tuple[int, ...]
    family: Ints
    value: Floats
    parasitic: Floats
    price: Floats
    declared: int

    @property
    def size(self) -> int:
        """How many choices there are."""
        return int(self.value.size)


@dataclass(frozen=True, slots=True)
class Level:
    """One divider: resistors `top` and `bottom` [ohm], what the parts cost (NaN: not to be had), and

    the catalog rows of the families that the resistors and the bypass come from (-1: none).
    """

    top: float
    bottom: float
    cost: float
    resistors: int = -1
    bypass: int = -1


def family_values(parts: Parts, row: int) -> Floats:
    """Every value that family `row` offers, rising, each once."""
    if parts.text["series"][row] == "list":
        return np.unique([value for value, _ in parts.points["values"][row]])
    low, high = parts.number["from"][row], parts.number["to"][row]
    if not (parts.text["series"][row] and np.isfinite(low) and np.isfinite(high)):
        return np.zeros(0)  # a blank leaves it unknown what the family offers
    return np.asarray(series_values(str(parts.text["series"][row]), float(low), float(high)), dtype=float)


def admitted(parts: Parts, space: Space) -> list[int]:
    """Rows of families that the request neither excludes nor leaves out of its required ones."""
    names = parts.text["family"]
    known = set(names.tolist()) | {f"{m}/{n}" for m, n in zip(parts.text["maker"], names, strict=True)}
    wanted = known.intersection(space.require)
    rows = []
    for row, name in enumerate(names):
        called = {str(name), f"{parts.text['maker'][row]}/{name}"}
        if called.intersection(space.exclude) or (wanted and not called & wanted):
            continue
        rows.append(row)
    return rows


def resistors(parts: Parts, request: Request) -> Passives:
    """Feedback resistors: every value of every admitted family inside the request's range."""
    return _collect(parts, request, request.space.resistance)


def capacitors(parts: Parts, request: Request) -> Passives:
    """Placed feedback capacitors, the cheapest family for each value (ties: first by name).

    `none`, where the request allows it, is the first: value 0, family -1, free.
    """
    every = _collect(parts, request, request.space.capacitance)
    order = np.lexsort((every.family, every.price, every.value))
    first = np.ones(order.size, dtype=bool)
    first[1:] = np.diff(every.value[order]) != 0.0
    keep = np.sort(order[first])
    family, value, price = every.family[keep], every.value[keep], every.price[keep]
    declared = every.declared
    if request.space.no_capacitor:
        family, value, price = np.r_[-1, family], np.r_[0.0, value], np.r_[0.0, price]
        declared += 1
    return Passives(every.names, every.rows, family, value, np.zeros(value.size), price, declared)


def _collect(parts: Parts, request: Request, span: tuple[float, float]) -> Passives:
    name, maker = parts.text["family"], parts.text["maker"]
    prices = unit_price(parts.points["price"], request.quantity)
    parasitic = parts.number.get("parasitic_capacitance", np.zeros(parts.size))
    inside = [
        v[(v >= span[0]) & (v <= span[1])] for v in (family_values(parts, r) for r in range(parts.size))
    ]
    rows = [r for r in admitted(parts, request.space) if inside[r].size and np.isfinite(prices[r])]
    rows.sort(key=lambda r: (str(name[r]), str(maker[r])))
    family = np.repeat(np.arange(len(rows)), [inside[r].size for r in rows]).astype(np.int64)
    chosen = np.array(rows, dtype=np.int64)[family]
    return Passives(
        names=tuple(str(name[r]) for r in rows),
        rows=tuple(rows),
        family=family,
        value=np.concatenate([np.zeros(0), *(inside[r] for r in rows)]),
        parasitic=parasitic[chosen],
        price=prices[chosen],
        declared=sum(v.size for v in inside),
    )


def divider_levels(request: Request, resistor_parts: Parts, capacitor_parts: Parts) -> list[Level]:
    """One divider a ratio, the largest pair of it, by rising Vref; cost NaN where no family offers it."""
    divider = request.space.divider
    resistor_offers = _offers(resistor_parts, request)
    capacitor, bypass = _cheapest(_offers(capacitor_parts, request), {divider.bypass})
    levels = []
    for top, bottom in _ratios(series_values(divider.series, divider.low, divider.high)):
        piece, row = _cheapest(resistor_offers, {top, bottom})
        levels.append(Level(top, bottom, 2.0 * piece + capacitor, row, bypass))
    return levels


def _offers(parts: Parts, request: Request) -> list[tuple[float, int, frozenset[float]]]:
    """Price a piece, catalog row and values of each admitted family, cheapest first (ties: by name)."""
    prices = unit_price(parts.points["price"], request.quantity)
    rows = [row for row in admitted(parts, request.space) if np.isfinite(prices[row])]
    rows.sort(key=lambda row: (prices[row], str(parts.text["family"][row]), str(parts.text["maker"][row])))
    return [(float(prices[row]), row, frozenset(family_values(parts, row).tolist())) for row in rows]


def _cheapest(
    offers: Sequence[tuple[float, int, frozenset[float]]], wanted: AbstractSet[float]
) -> tuple[float, int]:
    """Price and row of the cheapest family that offers all of `wanted`; NaN and -1 where none does."""
    return next(((price, row) for price, row, values in offers if wanted <= values), (float("nan"), -1))


def _ratios(values: Floats) -> list[tuple[float, float]]:
    """(R1, R2) with the largest sum for each exact R2/R1, by rising ratio."""
    decimals = [Decimal(repr(float(v))) for v in values]
    shift = max((-int(d.as_tuple().exponent) for d in decimals), default=0)
    digits = [int(d.scaleb(max(shift, 0))) for d in decimals]
    best: dict[tuple[int, int], tuple[int, float, float]] = {}
    for n1, v1 in zip(digits, values, strict=True):
        for n2, v2 in zip(digits, values, strict=True):
            common = gcd(n1, n2)
            key = (n2 // common, n1 // common)
            if key not in best or best[key][0] < n1 + n2:
                best[key] = (n1 + n2, float(v1), float(v2))
    ordered = sorted(best.items(), key=lambda item: item[0][0] / item[0][1])
    return [(top, bottom) for _, (_, top, bottom) in ordered]


def low_passes(request: Request) -> Floats:
    """Time constants [s] of the low-passes: lowest cutoff first, none (0) last, each once."""
    cutoffs = sorted({f for f in request.space.low_pass if f is not None})
    constants = [1.0 / (2.0 * np.pi * f) for f in cutoffs]
    return np.array(constants + ([0.0] if None in request.space.low_pass else []))
