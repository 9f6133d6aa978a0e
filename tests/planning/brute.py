"""Every plan of a tiny board out of its requests and catalogs, tried one by one.

Only figures and margins of single settings are the engine's (held to an independent evaluator elsewhere).
Which op-amps are one amplifier, what a level shares, what is bought and what a board uses is worked out here
once more, from what the rows of the catalogs say.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cached_property
from itertools import combinations_with_replacement, product
from math import comb, isnan, nan
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.planning.outline import Outline, Wanted
from optimizer.request.types import Request
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.roles import PASSES
from optimizer.vocabulary import NAMES
from tests.board.brute import paid

Part = tuple[Any, ...]
"""Role, maker, name and, of a passive, its value."""
Active = frozenset[Part]


@dataclass(frozen=True, order=True)
class Way:
    """One way to build one copy: what it buys itself, its amplifier, and the level that it shares."""

    own: tuple[Part, ...]
    amplifier: tuple[Any, ...]
    level: tuple[Part, ...]
    current: float


@dataclass(frozen=True)
class Tried:
    """One plan: what it uses of each limit, and its active parts."""

    cost: int
    supply_current: float
    area: float
    line_items: int
    opamp_parts: int
    active: Active


class Brute:
    """All that can be built of one board."""

    def __init__(self, outline: Outline) -> None:
        self.outline = outline
        self.channels = outline.channels
        self.sellers: dict[Part, tuple[tuple[tuple[float, float], ...], float, float]] = {}
        self.sizes: dict[Part, tuple[int, float]] = {}
        self.graded = {c.request: Graded(outline, c) for c in self.channels}
        self.families = self._families()
        self.ways = {request: sorted(self._ways(graded)) for request, graded in self.graded.items()}

    @cached_property
    def assignments(self) -> int:
        """How many ways there are to give every copy a way, packages aside."""
        total = 1
        for request, count in self._counts().items():
            total *= comb(len(self.ways[request]) + count - 1, count)
        return total

    def _counts(self) -> Counter[str]:
        counts: Counter[str] = Counter()
        for channel in self.channels:
            counts[channel.request] += channel.count
        return counts

    def _families(self) -> dict[tuple[Any, ...], list[Part]]:
        """The packages of each amplifier: one maker and family, electrically one, admitted by the same."""
        signs: dict[tuple[Any, Part], list[Any]] = {}
        several = any(graded.sources > 1 for graded in self.graded.values())
        for request, graded in self.graded.items():
            opamps = graded.catalogs.opamps
            supply = graded.request.supply
            for row in range(opamps.size):
                part = part_of(opamps, row)
                if graded.admitted[row] and self._known(part, opamps, row):
                    electrical = tuple(
                        str(float(opamps.number[name][row]))
                        for name in sorted(opamps.number)
                        if name not in ("channels", "stock", "lead_weeks", "board_area")
                    )
                    own = (str(opamps.text["maker"][row]), str(opamps.text["family"][row]))
                    place = part if several else None
                    rails = (supply.high, supply.low)
                    signs.setdefault((rails, part), []).append((request, own, electrical, place))
        families: dict[tuple[Any, ...], list[Part]] = {}
        for (rails, part), sign in signs.items():
            # a channel that runs from other rails needs packages of its own, of the same part numbers
            families.setdefault((rails, *sign), []).append(part)
        return families

    def _known(self, part: Part, opamps: Parts, row: int) -> bool:
        drawn = float(opamps.number["quiescent_current"][row])
        self.sell(part, opamps, row)
        self.sizes[part] = (int(opamps.number["channels"][row]), 0.0 if isnan(drawn) else drawn)
        limits = self.outline.limits
        return not (
            (limits.supply_current is not None and isnan(drawn))
            or (limits.area is not None and isnan(self.sellers[part][2]))
        )

    def sell(self, part: Part, table: Parts, row: int) -> None:
        """Note what the catalog says of a part."""
        stock, area = (
            float(table.number[n][row]) if n in table.number else nan for n in ("stock", "board_area")
        )
        self.sellers[part] = (tuple(table.points["price"][row]), stock, area)

    def _ways(self, graded: Graded) -> set[Way]:
        """What each setting uses that meets in some package of its amplifier."""
        supply = graded.request.supply
        rails = (supply.high, supply.low)
        homes = {p: sign for sign, parts in self.families.items() if sign[0] == rails for p in parts}
        opamps = graded.catalogs.opamps
        amplifiers = {row: homes.get(part_of(opamps, row)) for row in np.flatnonzero(graded.admitted)}
        found = set()
        for setting in graded.meeting():
            amplifier = amplifiers[setting[0]]
            if amplifier is None:
                continue
            own, divider, current, buffered = graded.used(setting, self)
            if self.outline.limits.area is not None and any(
                isnan(self.sellers[part][2]) for part in (*own, *divider)
            ):
                continue
            found.add(
                Way(
                    own=own if buffered else (*own, *divider),
                    amplifier=amplifier,
                    level=divider if buffered else (),
                    current=current,
                )
            )
        return found

    def plans(self) -> Iterator[Tried]:
        """All plans that can be bought, limits aside."""
        each = [combinations_with_replacement(self.ways[r], n) for r, n in self._counts().items()]
        for chosen in product(*(list(one) for one in each)):
            yield from self._bought([way for taken in chosen for way in taken])

    def _bought(self, ways: list[Way]) -> Iterator[Tried]:
        need: Counter[Part] = Counter()
        amplifiers: Counter[Any] = Counter()
        current, levels = 0.0, set()
        for way in ways:
            need.update(way.own)
            amplifiers[way.amplifier] += 1
            if not way.level:
                current += way.current
            elif (way.level, way.amplifier) not in levels:
                levels.add((way.level, way.amplifier))
                need.update(way.level)
                amplifiers[way.amplifier] += 1
                current += way.current
        packings = [self._packings(home, n) for home, n in amplifiers.items()]
        for packs in product(*packings):
            pieces = need.copy()
            for pack in packs:
                pieces.update(pack)
            tried = self._priced(pieces, current)
            if tried is not None:
                yield tried

    def _packings(self, home: tuple[Any, ...], amplifiers: int) -> list[Counter[Part]]:
        """All ways to hold the amplifiers of which no package could be left out."""
        packages = self.families[home]
        found = []
        for counts in product(*(range(amplifiers + 1) for _ in packages)):
            sizes = [self.sizes[part][0] for part in packages]
            spare = sum(n * size for n, size in zip(counts, sizes, strict=True)) - amplifiers
            least = min((size for n, size in zip(counts, sizes, strict=True) if n), default=0)
            if 0 <= spare < least:
                found.append(Counter({part: n for part, n in zip(packages, counts, strict=True) if n}))
        return found

    def _priced(self, pieces: Counter[Part], current: float) -> Tried | None:
        boards, costs = self.outline.quantity, self.outline.costs
        cents = rounded(Fraction(str(costs.line_item)) * 100) * len(pieces)
        cents += rounded(Fraction(str(costs.placement)) * boards * 100) * sum(pieces.values())
        area = 0.0
        for part, number in pieces.items():
            breaks, stock, each = self.sellers[part]
            paid_ = paid(breaks, None if isnan(stock) else stock, number * boards)
            if paid_ is None:
                return None
            cents += paid_
            area += number * (0.0 if isnan(each) else each)
            if part in self.sizes:
                current += number * self.sizes[part][0] * self.sizes[part][1]
        opamps = [part for part in pieces if part in self.sizes]
        active = frozenset(part for part in pieces if part[0] in ("opamp", "photodiode"))
        return Tried(cents, current, area, len(pieces), len(opamps), active)

    def keeps(self, tried: Tried, but: str = "") -> bool:
        """Whether a plan is within the limits, `but` one of them."""
        limits = self.outline.limits
        stated = {
            "cost": None
            if limits.cost is None
            else rounded(Fraction(str(limits.cost)) * self.outline.quantity * 100),
            "supply_current": limits.supply_current,
            "area": limits.area,
            "line_items": limits.line_items,
            "opamp_parts": self.outline.rules.opamp_parts or None,
        }
        return all(
            limit is None or name == but or getattr(tried, name) <= limit * (1 + 1e-9)
            for name, limit in stated.items()
        )

    @cached_property
    def tried(self) -> list[Tried]:
        """All plans that can be bought."""
        return list(self.plans())

    @cached_property
    def best(self) -> dict[Active, int]:
        """The least cost of each set of active parts within the limits."""
        best: dict[Active, int] = {}
        for one in self.tried:
            if self.keeps(one):
                best[one.active] = min(one.cost, best.get(one.active, one.cost))
        return best

    @property
    def cost(self) -> int | None:
        """The least cost of all."""
        return min(self.best.values(), default=None)

    def least(self, name: str) -> float | None:
        """The least use of one limit with the others kept."""
        return min((getattr(t, name) for t in self.tried if self.keeps(t, name)), default=None)


class Graded:
    """Every setting of one request, evaluated."""

    def __init__(self, outline: Outline, channel: Wanted) -> None:
        self.request: Request = channel.study.request
        self.catalogs: Catalogs = channel.study.catalogs
        self.sources = max(outline.rules.opamp_sources, self.request.resilience.opamp_sources)
        # stock is for the whole board to see; a second amplifier comes from any package
        opamps = self.catalogs.opamps
        stocked = replace(opamps, number={**opamps.number, "stock": np.full(opamps.size, nan)})
        plainly = replace(self.request, resilience=replace(self.request.resilience, opamp_sources=1))
        self.space = spaces.build_whole(plainly, replace(self.catalogs, opamps=stocked))
        short = opamps.number["stock"] < outline.quantity
        self.admitted = (self.space.opamp_verdicts.alone == PASSES) & ~short

    def meeting(self) -> Iterator[tuple[int, ...]]:
        """Every setting that meets, with op-amps of enough makers: by index of the space."""
        found: dict[tuple[int, ...], set[int]] = {}
        for o, d in product(range(self.catalogs.opamps.size), range(self.catalogs.photodiodes.size)):
            if not self.admitted[o]:
                continue
            for choice in plain.every_choice(self.space, o, d):
                judged = plain.judge(self.space, choice, "cost")
                rows = np.column_stack(choice.columns())[judged.meets].tolist()
                for row in rows:
                    found.setdefault(tuple(row[1:]), set()).add(row[0])
        for rest, opamps in found.items():
            for o in opamps:
                if self._makers(o, opamps) >= self.sources:
                    yield (o, *rest)

    def _makers(self, o: int, others: set[int]) -> int:
        text = self.catalogs.opamps.text
        place = (text["package"][o], text["pinout"][o])
        fit = {
            str(text["maker"][p])
            for p in others
            if place == (text["package"][p], text["pinout"][p]) and all(place)
        }
        return len(fit | {str(text["maker"][o])})

    def used(
        self, setting: tuple[int, ...], brute: Brute
    ) -> tuple[tuple[Part, ...], tuple[Part, ...], float, bool]:
        """The parts of a setting besides its op-amps, those of its divider, its current, whether buffered."""
        _, d, x, r, c, _ = setting
        space, held, contexts = self.space, self.catalogs, self.space.contexts
        own = [part_of(held.photodiodes, d)]
        brute.sell(own[0], held.photodiodes, d)

        def passive(table: Parts, row: int, value: float) -> Part:
            part = (*part_of(table, row), value)
            brute.sell(part, table, row)
            return part

        resistor = int(space.resistors.rows[space.resistors.family[r]])
        own.append(passive(held.resistors, resistor, float(space.resistors.value[r])))
        if space.capacitors.family[c] >= 0:
            row = int(space.capacitors.rows[space.capacitors.family[c]])
            own.append(passive(held.capacitors, row, float(space.capacitors.value[c])))
        if not contexts.divided[x]:
            return tuple(own), (), 0.0, False
        top, bottom = float(contexts.top[x]), float(contexts.bottom[x])
        family, bypass = int(contexts.resistors[x]), int(contexts.bypass[x])
        divider = (
            passive(held.resistors, family, top),
            passive(held.resistors, family, bottom),
            passive(held.capacitors, bypass, self.request.space.divider.bypass),
        )
        supply = self.request.supply
        current = (supply.high - supply.low) / (top + bottom)
        return tuple(own), divider, current, bool(contexts.buffered[x])


def part_of(table: Parts, row: int) -> Part:
    """Role, maker and name of a row."""
    role = table.role.removesuffix("s")
    return (role, str(table.text["maker"][row]), str(table.text[NAMES[table.role]][row]))


def rounded(money: Fraction) -> int:
    """Whole cents, half a cent up."""
    return int(money + Fraction(1, 2))
