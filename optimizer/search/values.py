"""The passive choices: feedback resistors and capacitors, divider levels, low-passes, with their prices."""

from __future__ import annotations

from collections.abc import Sequence
from collections.abc import Set as AbstractSet
from dataclasses import dataclass, replace
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
Offer = tuple[float, int, frozenset[float]]
"""Price a piece, catalog row and values of a family."""


@dataclass(frozen=True, slots=True)
class Passives:
    """Choices of one passive, grouped by family, rising within each.

    `family` is an index into `names` (sorted by name, then maker) and `rows` (their catalog rows),
    `value` in ohm or F, `parasitic` in F, `price` a piece at the build quantity, `spread` the relative
    half width of the value over tolerance and ambient (NaN: unknown). `declared` counts them before
    any was dropped.
    """

    names: tuple[str, ...]
    rows: tuple[int, ...]
    family: Ints
    value: Floats
    parasitic: Floats
    price: Floats
    spread: Floats
    declared: int

    @property
    def size(self) -> int:
        """How many choices there are."""
        return int(self.value.size)


@dataclass(frozen=True, slots=True)
class Level:
    """One divider: resistors `top` and `bottom` [ohm], what the parts cost (NaN: not to be had), and

    the catalog rows of the families that the resistors and the bypass come from (-1: none). `spread`:
    relative half width of the resistors.
    """

    top: float
    bottom: float
    cost: float
    resistors: int = -1
    bypass: int = -1
    spread: float = float("nan")


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
    """Placed feedback capacitors: every value of every admitted family inside the request's range.

    `none`, where the request allows it, is the first: value 0, family -1, free, exact.
    """
    every = _collect(parts, request, request.space.capacitance)
    if not request.space.no_capacitor:
        return every
    return replace(
        every,
        family=np.r_[-1, every.family],
        value=np.r_[0.0, every.value],
        parasitic=np.zeros(every.size + 1),
        price=np.r_[0.0, every.price],
        spread=np.r_[0.0, every.spread],
        declared=every.declared + 1,
    )


def cheapest(passives: Passives, request: Request) -> Passives:
    """The cheapest family for each value (ties: first by name), and for each spread where it counts."""
    counts = np.where(corners(request), passives.spread, 0.0)
    order = np.lexsort((passives.family, passives.price, counts, passives.value))
    first = np.ones(order.size, dtype=bool)
    first[1:] = (np.diff(passives.value[order]) != 0.0) | (np.diff(counts[order]) != 0.0)
    keep = np.sort(order[first])
    columns = ("family", "value", "parasitic", "price", "spread")
    return replace(passives, **{name: getattr(passives, name)[keep] for name in columns})


def corners(request: Request) -> bool:
    """Whether targets must hold at every corner of the spreads."""
    return request.tolerance.method == "corners"


def spreads(parts: Parts, request: Request) -> Floats:
    """Relative half width of the values of each family over tolerance and ambient; NaN where unknown."""
    tempco = parts.number.get("tempco", np.zeros(parts.size))
    distance = max(abs(request.ambient.coldest - 25.0), abs(request.ambient.hottest - 25.0))
    return np.asarray(parts.number["tolerance"] + (tempco * distance if distance else 0.0))


def _usable(parts: Parts, request: Request) -> NDArray[np.bool_]:
    """Families of which all is known that the request needs: price, and for corners the spread."""
    known = np.isfinite(unit_price(parts.points["price"], request.quantity))
    return np.asarray(known & np.isfinite(spreads(parts, request)) if corners(request) else known)


def _collect(parts: Parts, request: Request, span: tuple[float, float]) -> Passives:
    name, maker = parts.text["family"], parts.text["maker"]
    prices = unit_price(parts.points["price"], request.quantity)
    parasitic = parts.number.get("parasitic_capacitance", np.zeros(parts.size))
    inside = [
        v[(v >= span[0]) & (v <= span[1])] for v in (family_values(parts, r) for r in range(parts.size))
    ]
    usable = _usable(parts, request)
    rows = [r for r in admitted(parts, request.space) if inside[r].size and usable[r]]
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
        spread=spreads(parts, request)[chosen],
        declared=sum(v.size for v in inside),
    )


def divider_levels(request: Request, resistor_parts: Parts, capacitor_parts: Parts) -> list[Level]:
    """One divider a ratio, the largest pair of it, by rising Vref; cost NaN where no family offers it."""
    divider = request.space.divider
    resistor_offers = divider_offers(resistor_parts, request)
    capacitor, bypass = cheapest_offer(offers(capacitor_parts, request), {divider.bypass})
    spread = np.r_[spreads(resistor_parts, request), np.nan]
    levels = []
    for top, bottom in _ratios(series_values(divider.series, divider.low, divider.high)):
        piece, row = cheapest_offer(resistor_offers, {top, bottom})
        levels.append(Level(top, bottom, 2.0 * piece + capacitor, row, bypass, float(spread[row])))
    return levels


def divider_offers(parts: Parts, request: Request) -> list[Offer]:
    """The families that dividers may be bought from, cheapest first."""
    usable = _usable(parts, request)
    return [offer for offer in offers(parts, request) if usable[offer[1]]]


def offers(parts: Parts, request: Request) -> list[Offer]:
    """What each admitted family offers, cheapest first (ties: by name)."""
    prices = unit_price(parts.points["price"], request.quantity)
    rows = [row for row in admitted(parts, request.space) if np.isfinite(prices[row])]
    rows.sort(key=lambda row: (prices[row], str(parts.text["family"][row]), str(parts.text["maker"][row])))
    return [(float(prices[row]), row, frozenset(family_values(parts, row).tolist())) for row in rows]


def cheapest_offer(among: Sequence[Offer], wanted: AbstractSet[float]) -> tuple[float, int]:
    """Price and row of the cheapest family that offers all of `wanted`; NaN and -1 where none does."""
    return next(((price, row) for price, row, values in among if wanted <= values), (float("nan"), -1))


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
