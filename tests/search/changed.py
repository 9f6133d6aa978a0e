"""Every setting of a small space evaluated once, to be asked any question about its limits.

Order, feasibility, fronts and conflicts are worked out in plain Python from the contract's text; only the
figures, the checks and the declared choices are the engine's.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import chain, combinations

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.figures import evaluate
from optimizer.request.types import Request
from optimizer.search import corners, plain, spreads
from optimizer.search import space as spaces
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from tests.search.test_corners import every_corner
from tests.search.whole import Name, Row, _row, between, ranked

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
HIGHER = (*margins.AT_LEAST, *margins.DECIBELS, "phase_margin")


@dataclass(frozen=True)
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

    def sourced(self, meets: Bools) -> Bools:
        """Where makers enough have an op-amp of the same package and pinout among those that meet."""
        o, d, *rest = self.choice.columns()
        text = self.catalogs.opamps.text
        makers: dict[Name, set[str]] = {}
        sockets = []
        for row in range(o.size):
            outline = (str(text["package"][o[row]]), str(text["pinout"][o[row]]))
            # what is blank fits nothing else
            fits = outline if all(outline) else (str(o[row]),)
            sockets.append((*fits, int(d[row]), *(int(column[row]) for column in rest)))
            if meets[row]:
                makers.setdefault(sockets[-1], set()).add(str(text["maker"][o[row]]))
        return np.array([len(makers.get(socket, ())) >= self.space.sources for socket in sockets], dtype=bool)

    def cheapest(self, limits: Mapping[str, float]) -> Name | None:
        """What a shortlist by cost with one row would show; None where nothing meets `limits`."""
        meets = np.flatnonzero(self.meets(limits))
        if not meets.size:
            return None
        cost = self.values["cost"][meets]
        best: dict[Name, Row] = {}
        for place in meets[cost == cost.min()].tolist():
            row = self.row(place, limits)
            if row.pair not in best or self.rank(row) < self.rank(best[row.pair]):
                best[row.pair] = row
        return min(best.values(), key=lambda row: between(row, "cost", self.space)).name

    def row(self, place: int, limits: Mapping[str, float]) -> Row:
        """One setting with its margins against `limits`."""
        ranked_by = {"cost": float(self.values["cost"][place])}
        graded = tuple(float(margins.margin(n, self.values[n][place], v)) for n, v in limits.items()) or (
            margins.LARGEST,
        )
        return _row(self.space, self.catalogs, self.choice, place, (ranked_by, graded))

    def rank(self, row: Row) -> Name:
        """The order within a pair."""
        return (*ranked(row, "cost", self.space), *row.ties)


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
    corners_too = space.request.tolerance.method == "corners"
    worst: dict[str, Floats] = {}
    fine = np.ones(choice.opamp.size, dtype=bool)
    for corner in every_corner(space, choice) if corners_too else [{}]:
        there, deviation = corners.deviations(space, choice, (corner,))
        with np.errstate(all="ignore"):
            moved = spreads.moved(space, there, deviation)
            result = evaluate(space.bench, moved)
            fine &= result.eligible & ~np.any(
                list(spreads.moved_checks(space, there, moved).values()), axis=0
            )
        for name in margins.TARGETS:
            value = np.broadcast_to(result.figures[name], choice.opamp.shape)
            least = np.minimum if name in HIGHER else np.maximum
            worst[name] = least(worst[name], value) if name in worst else np.array(value)
    return worst, fine


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
            rows = [every.row(int(place), {}) for place in alike[values[alike] == value]]
            first = min(rows, key=lambda row: (row.pair, row.ties))
            found.append((float(level), float(better * value) + 0.0, first.name))
    return found


def sourced_front(every: All, rest: Mapping[str, float], target: str) -> list[tuple[float, float]]:
    """Every (cost, value) such that no dearer limit than `value` can be met at `cost`: with second sources."""
    values = every.values[target]
    costs: dict[float, float] = {}
    for value in sorted(set(values[~np.isnan(values)].tolist()), reverse=target not in HIGHER):
        meets = every.meets({**rest, target: value})
        if meets.any():
            costs[float(every.values["cost"][meets].min())] = value
    return sorted(costs.items())


def minimal_conflicts(
    names: Sequence[str], feasible: Callable[[frozenset[str]], bool]
) -> set[frozenset[str]]:
    """The sets that are infeasible while each set with one name less is not."""
    sets = [frozenset(some) for size in range(len(names) + 1) for some in combinations(names, size)]
    verdict = {some: feasible(some) for some in sets}
    return {some for some in sets if not verdict[some] and all(verdict[some - {name}] for name in some)}
