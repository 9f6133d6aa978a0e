"""Every setting of a small space evaluated once, to be asked any question about its limits.

Order, feasibility, fronts and conflicts are worked out in plain Python from the contract's text; only the
figures, the checks and the declared choices are the engine's.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import chain, combinations

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.figures import evaluate
from optimizer.request.types import Request
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.result import SOURCES
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from optimizer.search.spread import corners, spreads
from tests.search.test_corners import every_corner
from tests.search.whole import Name, Row, _row, between, ranked

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
HIGHER = (*margins.AT_LEAST, *margins.DECIBELS, "phase_margin")


@dataclass(frozen=True, eq=False)
class All:
    """The eligible settings of a space, and the value of every target (one array a target)."""

    space: Space
    catalogs: Catalogs
    choice: Choice
    values: Mapping[str, Floats]

    def margins(self, limits: Mapping[str, float]) -> Floats:
        """One row a setting, one column a limit."""
        columns = [margins.margin(name, self.values[name], limit) for name, limit in limits.items()]
        return np.stack(columns, axis=1) if columns else np.zeros((self.choice.opamp.size, 0))

    def meets(self, limits: Mapping[str, float]) -> Bools:
        """Where a setting meets all `limits`, and so do op-amps of enough makers in its place."""
        meets = np.asarray(np.all(self.margins(limits) >= 0.0, axis=1))
        return meets & self.sourced(meets) if self.space.sources > 1 else meets

    def can_meet(self, asked: Collection[str]) -> bool:
        """Whether some setting meets the targets among `asked`; with second sources where those are too."""
        limits = {name: limit for name, limit in self.space.limits.items() if name in asked}
        alone = np.all(self.margins(limits) >= 0.0, axis=1)
        return bool((self.meets(limits) if SOURCES in asked else alone).any())

    def sourced(self, meets: Bools) -> Bools:
        """Where makers enough have an op-amp of the same package and pinout among those that meet."""
        sockets, makers = self.sockets, self.makers
        known: dict[Name, set[str]] = {}
        for row in np.flatnonzero(meets):
            known.setdefault(sockets[row], set()).add(makers[row])
        return np.array([len(known.get(socket, ())) >= self.space.sources for socket in sockets], dtype=bool)

    @cached_property
    def sockets(self) -> list[Name]:
        """By setting, everything but the op-amp, and the package and pinout that it must have."""
        o, *rest = self.choice.columns()
        package, pinout = (self.catalogs.opamps.text[name] for name in ("package", "pinout"))
        found: list[Name] = []
        for row in range(o.size):
            outline = (str(package[o[row]]), str(pinout[o[row]]))
            # what is blank fits nothing else
            fits = outline if all(outline) else (str(o[row]),)
            found.append((*fits, *(int(column[row]) for column in rest)))
        return found

    @cached_property
    def makers(self) -> list[str]:
        """By setting, the maker of the op-amp."""
        return [str(maker) for maker in self.catalogs.opamps.text["maker"][self.choice.opamp]]

    def cheapest(self, limits: Mapping[str, float]) -> Name | None:
        """What a shortlist by cost with one row would show; None where nothing meets `limits`."""
        meets = np.flatnonzero(self.meets(limits))
        if not meets.size:
            return None
        cost = self.values["cost"][meets]
        meets = meets[cost == cost.min()]
        table = self.margins(limits)[meets]
        first = np.sort(np.minimum(table, self.space.comfort), axis=1)
        best: dict[Name, Row] = {}
        for pair in set(
            zip(self.choice.opamp[meets].tolist(), self.choice.diode[meets].tolist(), strict=True)
        ):
            own = np.flatnonzero(
                (self.choice.opamp[meets] == pair[0]) & (self.choice.diode[meets] == pair[1])
            )
            rows = [self.row(int(meets[i]), tuple(table[i].tolist())) for i in own[_first_of(first[own])]]
            best[pair] = min(rows, key=self.rank)
        return min(best.values(), key=lambda row: between(row, "cost", self.space)).name

    def row(self, place: int, graded: tuple[float, ...] = ()) -> Row:
        """One setting with its margins."""
        ranked_by = {"cost": float(self.values["cost"][place])}
        return _row(self.space, self.catalogs, self.choice, place, (ranked_by, graded or (margins.LARGEST,)))

    def rank(self, row: Row) -> Name:
        """The order within a pair."""
        return (*ranked(row, "cost", self.space), *row.ties)


def _first_of(table: Floats) -> Bools:
    """The rows that come first by sorted margins, the larger first, so that only they need be ranked."""
    first = np.ones(table.shape[0], dtype=bool)
    for column in table.T:
        first &= column == column[first].max()
    return first


def everything(request: Request, catalogs: Catalogs) -> All:
    """Evaluate every setting of every pair whose parts pass alone."""
    space = spaces.build(request, catalogs)
    choices, values = [], []
    for block in _choices(space):
        choice = block.take(spaces.own_code(space, block) == PASSES)
        worst, fine = at_worst(space, choice)
        choices.append(choice.take(fine))
        values.append({name: worst[name][fine] for name in margins.TARGETS})
    columns = [np.concatenate(column) for column in zip(*(c.columns() for c in choices), strict=True)]
    table = {name: np.concatenate([one[name] for one in values]) for name in margins.TARGETS}
    return All(space, catalogs, Choice(*columns), table)


def at_worst(space: Space, choice: Choice) -> tuple[dict[str, Floats], Bools]:
    """Every target at nominal, or at the worst of all corners; and where all of them are eligible."""
    worst: dict[str, Floats] = {}
    fine = np.ones(choice.opamp.size, dtype=bool)
    for figures, eligible in _evaluated(space, choice):
        fine &= eligible
        for name in margins.TARGETS:
            value = np.broadcast_to(figures[name], choice.opamp.shape)
            least = np.minimum if name in HIGHER else np.maximum
            worst[name] = least(worst[name], value) if name in worst else np.array(value)
    return worst, fine


def _evaluated(space: Space, choice: Choice) -> Iterator[tuple[Mapping[str, Floats], Bools]]:
    """Figures and eligibility at nominal, then at each corner where corners are graded."""
    with np.errstate(all="ignore"):
        result = evaluate(space.bench, spaces.settings(space, choice))
        yield result.figures, result.eligible
        if space.request.tolerance.method != "corners":
            return
        for corner in every_corner(space, choice):
            there, deviation = corners.deviations(space, choice, (corner,))
            moved = spreads.moved(space, there, deviation)
            result = evaluate(space.bench, moved)
            outside = np.any(list(spreads.moved_checks(space, there, moved).values()), axis=0)
            yield result.figures, result.eligible & ~outside


def _choices(space: Space) -> Iterator[Choice]:
    opamps = np.flatnonzero(space.opamp_verdicts.alone == PASSES)
    diodes = np.flatnonzero(space.diode_verdicts.alone == PASSES)
    none = np.zeros(0, dtype=np.int64)
    yield Choice(none, none, none, none, none, none)
    yield from chain.from_iterable(plain.every_choice(space, int(o), int(d)) for o in opamps for d in diodes)


def front(every: All, rest: Mapping[str, float], target: str) -> list[tuple[float, float, Name]]:
    """Every (cost, value) that no other setting beats in both, cheapest first, with its setting.

    Of equal ones the setting that comes first by its parts, then by the last ties.
    """
    better = 1.0 if target in HIGHER else -1.0
    values = better * every.values[target]
    places = np.flatnonzero(every.meets(rest) & ~np.isnan(values))
    cost = every.values["cost"]
    found: list[tuple[float, float, Name]] = []
    highest = -np.inf
    for level in np.unique(cost[places]):
        alike = places[cost[places] == level]
        value = values[alike].max()
        if value > highest:
            highest = value
            rows = [every.row(int(place)) for place in alike[values[alike] == value]]
            first = min(rows, key=lambda row: (row.pair, row.ties))
            found.append((float(level), float(better * value) + 0.0, first.name))
    return found


def best(every: All, rest: Mapping[str, float], target: str) -> tuple[float, Name] | None:
    """The best value of `target` with `rest` met, and its cheapest setting."""
    points = front(every, rest, target)
    return points[-1][1:] if points else None


def sourced_front(every: All, rest: Mapping[str, float], target: str) -> list[tuple[float, float]]:
    """The front where a setting is worth what the least of its sources reaches: as many as are asked for,

    each of another maker, the best of them.
    """
    better = 1.0 if target in HIGHER else -1.0
    values = better * every.values[target]
    meets = np.all(every.margins(rest) >= 0.0, axis=1) & ~np.isnan(values)
    sockets, makers = every.sockets, every.makers
    reach: dict[Name, dict[str, float]] = {}
    for row in np.flatnonzero(meets):
        known = reach.setdefault(sockets[row], {})
        known[makers[row]] = max(known.get(makers[row], -np.inf), float(values[row]))
    found: list[tuple[float, float]] = []
    for level in np.unique(every.values["cost"][meets]):
        for row in np.flatnonzero(meets & (every.values["cost"] == level)):
            others = [v for maker, v in reach[sockets[row]].items() if maker != makers[row]]
            sources = sorted(others, reverse=True)[: every.space.sources - 1]
            value = min([float(values[row]), *sources])
            if len(sources) == every.space.sources - 1 and (not found or value > found[-1][1]):
                found = [*(one for one in found if one[0] < level), (float(level), value)]
    return [(cost, better * value + 0.0) for cost, value in found]


def minimal_conflicts(
    names: Sequence[str], feasible: Callable[[frozenset[str]], bool]
) -> set[frozenset[str]]:
    """The sets that are infeasible while each set with one name less is not."""
    sets = [frozenset(some) for size in range(len(names) + 1) for some in combinations(names, size)]
    verdict = {some: feasible(some) for some in sets}
    return {some for some in sets if not verdict[some] and all(verdict[some - {name}] for name in some)}
