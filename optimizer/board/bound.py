"""A proved lower bound on every plan, by Lagrangian decomposition, and the options that no better plan uses.

Each channel pays a price for each supply that it takes, and for the reference that it shares; so does a
reference for its supplies. Channels then choose their cheapest option, references open where channels pay
more than they cost, and a supply sells the number at which its takings pass its cost by most: each alone,
and exactly (price breaks, stock and packages inside). What all lose together bounds every plan from below,
for any prices: Held, Wolfe and Crowder, Validation of subgradient optimization, Mathematical Programming 6
(1974). The bound is that of the linear relaxation in which each supply has its convex hull, far above the
relaxation of the rows in `model`.
"""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.board.problem import Board
from optimizer.board.supplies import (
    PLAIN,
    Floats,
    Ints,
    Weights,
    family_supply,
    padded,
    reference_uses,
    tables,
    used_references,
)

Bools = NDArray[np.bool_]
Key = tuple[int, int, int]
"""Whose price it is: kind (a channel's, a channel's for a reference, a reference's), who pays, for what."""

WIDTHS = (4, 8, 16, 32, 64, 128, 256, 512)
NOTABLE, LEAST = 1e-5, 1e-3
"""The relative gain of a step that counts, and the step length at which it ends."""


@dataclass(frozen=True, slots=True)
class Group:
    """Supplies with about as many units to sell: their units' prices by index, and costs by number."""

    supplies: Ints
    units: Ints
    costs: Floats


@dataclass(frozen=True, slots=True)
class Layout:
    """Which prices each option, reference and supply sees; the last price is always nought.

    Options stand channel after channel, from `starts`; `option_prices` has a column for each. A reference
    is paid by channels (`paid`, flat, of references `payer`) and pays `owed` (flat, of references `debtor`).
    Where budgets have prices, options and references pay for what they draw besides packages, and the
    `allowance` is what the budgets themselves are worth: it comes off the bound.
    """

    keys: Mapping[Key, int]
    starts: Ints
    counts: Floats
    option_prices: Ints
    option_draws: Floats
    paid: Ints
    payer: Ints
    payments: Floats
    owed: Ints
    debtor: Ints
    dues: Floats
    reference_draws: Floats
    allowance: float
    groups: tuple[Group, ...]


@dataclass(frozen=True, slots=True)
class Answer:
    """The bound at some prices, its slope in each, and what each option then costs its channel."""

    bound: float
    slope: Floats
    option_costs: Floats
    least: Floats


def layout(board: Board, weights: Weights = PLAIN) -> Layout:
    """The prices of `board` and who sees them; `weights` may put prices on budgets."""
    return _Layouter(board, weights).layout()


def allowance(board: Board, weights: Weights) -> float:
    """What the stated budgets are worth at the prices of `weights`: no plan within them uses more."""
    stated = board.budgets.stated().items()
    return float(sum(getattr(weights, name) * limit for name, limit in stated if name != "cost"))


class _Layouter:
    """Numbers the prices while it goes through channels and references."""

    def __init__(self, board: Board, weights: Weights) -> None:
        self.board, self.weights = board, weights
        self.number: dict[Key, int] = {}
        self.units: dict[int, list[int]] = {}
        self.references = used_references(board)
        self.place = {reference: k for k, reference in enumerate(self.references)}
        self.paid: list[tuple[int, int, int]] = []

    def _price(self, kind: int, user: int, thing: int) -> int:
        return self.number.setdefault((kind, user, thing), len(self.number))

    def layout(self) -> Layout:
        rows = [row for i in range(len(self.board.channels)) for row in self._channel(i)]
        owed = [entry for reference in self.references for entry in self._reference(reference)]
        sizes = [len(channel.options) for channel in self.board.channels]
        last = len(self.number)
        paid = np.array(self.paid, dtype=np.int64).reshape(-1, 3)
        dues = np.array(owed, dtype=np.int64).reshape(-1, 3)
        return Layout(
            self.number,
            np.cumsum([0, *sizes]),
            np.array([channel.count for channel in self.board.channels], dtype=float),
            padded(rows, last),
            self.weights.current * np.array([o.current for c in self.board.channels for o in c.options]),
            paid[:, 0],
            paid[:, 1],
            paid[:, 2].astype(float),
            dues[:, 0],
            dues[:, 1],
            dues[:, 2].astype(float),
            self.weights.current * np.array([self.board.references[r].current for r in self.references]),
            allowance(self.board, self.weights),
            tuple(self._groups(last)),
        )

    def _channel(self, i: int) -> list[list[int]]:
        channel = self.board.channels[i]
        rows = []
        most: dict[int, int] = {}
        shared: dict[int, int] = {}
        for option in channel.options:
            row = [self._price(0, i, part) for part in option.parts]
            family = family_supply(self.board, option.family)
            row += [self._price(0, i, family)] * option.amplifiers
            for price, supply in zip(row, [*option.parts, *[family] * option.amplifiers], strict=True):
                most[supply] = max(most.get(supply, 0), row.count(price))
            if option.reference is not None:
                price = self._price(1, i, option.reference)
                shared[price] = self.place[option.reference]
                row.append(price)
            rows.append(row)
        for supply, number in most.items():
            self.units.setdefault(supply, []).extend([self._price(0, i, supply)] * number * channel.count)
        self.paid += [(price, reference, channel.count) for price, reference in shared.items()]
        return rows

    def _reference(self, reference: int) -> list[tuple[int, int, int]]:
        entries = []
        for supply, count in reference_uses(self.board, reference):
            price = self._price(2, reference, supply)
            self.units.setdefault(supply, []).extend([price] * count)
            entries.append((price, self.place[reference], count))
        return entries

    def _groups(self, last: int) -> list[Group]:
        costs = tables(self.board, self.weights)
        finite = np.maximum.accumulate(np.isfinite(costs) * np.arange(costs.shape[1]), axis=1)[:, -1]
        by_width: dict[int, list[int]] = {}
        for supply, units in self.units.items():
            width = next((w for w in WIDTHS if w >= len(units)), len(units))
            by_width.setdefault(width, []).append(supply)
        groups = []
        for supplies in by_width.values():
            prices = padded((self.units[s] for s in supplies), last).T.copy()
            deep = 1 + min(prices.shape[1], int(finite[supplies].max()))
            groups.append(Group(np.array(supplies), prices, costs[supplies, :deep]))
        return groups


def first_prices(seen: Layout) -> Floats:
    """Each supply at its least cost a piece, a reference's dues shared among all that may use it."""
    prices = np.zeros(len(seen.keys) + 1)
    for group in seen.groups:
        number = np.arange(1, group.costs.shape[1])
        each = (group.costs[:, 1:] / number).min(axis=1)
        each[~np.isfinite(each)] = group.costs[np.isfinite(group.costs)].max(initial=1.0)
        prices[group.units] = each[:, None]
    prices[-1] = 0.0
    dues = np.bincount(seen.debtor, prices[seen.owed] * seen.dues, seen.reference_draws.size)
    sharers = np.bincount(seen.payer, seen.payments, seen.reference_draws.size)
    prices[seen.paid] = (dues / np.maximum(sharers, 1))[seen.payer]
    return prices


def carried(seen: Layout, before: Layout, prices: Floats) -> Floats:
    """The prices of an earlier layout of the same board with more options."""
    now = first_prices(seen)
    for key, place in seen.keys.items():
        now[place] = prices[before.keys[key]]
    return now


def ask(seen: Layout, prices: Floats) -> Answer:
    """What channels, references and supplies do at `prices`."""
    slope = np.zeros(prices.size)
    options = prices[seen.option_prices].sum(axis=0) + seen.option_draws
    best = np.array([a + options[a:b].argmin() for a, b in zip(seen.starts, seen.starts[1:], strict=False)])
    least = options[best]
    total = float(least @ seen.counts) - seen.allowance
    bought = seen.option_prices[:, best]
    slope += np.bincount(bought.ravel(), np.broadcast_to(seen.counts, bought.shape).ravel(), slope.size)
    total += _references(seen, prices, slope)
    for group in seen.groups:
        total += _supplies(group, prices, slope)
    slope[-1] = 0.0
    return Answer(total, slope, options, least)


def _references(seen: Layout, prices: Floats, slope: Floats) -> float:
    dues = np.bincount(seen.debtor, prices[seen.owed] * seen.dues, seen.reference_draws.size)
    takings = np.bincount(seen.payer, prices[seen.paid] * seen.payments, seen.reference_draws.size)
    loss = dues + seen.reference_draws - takings
    open_ = loss < 0
    slope[seen.paid] -= seen.payments * open_[seen.payer]
    slope[seen.owed] += seen.dues * open_[seen.debtor]
    return float(loss[open_].sum())


def _supplies(group: Group, prices: Floats, slope: Floats) -> float:
    loss, order = _losses(group, prices)
    number = loss.argmin(axis=1)
    sold = np.take_along_axis(group.units, order, axis=1)[np.arange(order.shape[1]) < number[:, None]]
    slope -= np.bincount(sold, minlength=slope.size)
    return float(loss[np.arange(number.size), number].sum())


def _losses(group: Group, prices: Floats) -> tuple[Floats, Ints]:
    """What each supply loses on the units sold, by their number, and the units, dearest offers first."""
    offers = prices[group.units]
    deep = group.costs.shape[1] - 1
    order = np.argsort(-offers, axis=1)[:, :deep]
    loss = group.costs.copy()
    loss[:, 1:] -= np.cumsum(np.take_along_axis(offers, order, axis=1), axis=1)
    return loss, order


def least_losses(seen: Layout, prices: Floats) -> dict[int, float]:
    """What each supply loses at least at `prices`: no sale costs it less than its takings and this."""
    found: dict[int, float] = {}
    for group in seen.groups:
        least = _losses(group, prices)[0].min(axis=1)
        found |= dict(zip(group.supplies.tolist(), least.tolist(), strict=True))
    return found


@dataclass(frozen=True, slots=True)
class Bound:
    """The best bound found, the prices that give it, and its answer."""

    value: float
    prices: Floats
    answer: Answer


@dataclass(frozen=True, slots=True)
class Terms:
    """What a board is bounded under: its layout with prices, and the weights of budgets."""

    seen: Layout
    prices: Floats
    weights: Weights = PLAIN


@dataclass(frozen=True, slots=True)
class Pace:
    """Steps at most, steps without gain before smaller ones are taken, and by how much smaller."""

    steps: int
    patience: int
    smaller: float
    until: float = np.inf


def climb(seen: Layout, target: float, pace: Pace) -> Bound:
    """The bound after steps of `pace` towards `target`: smoothed subgradients, Polyak's step lengths."""
    now = first_prices(seen)
    best = Bound(-np.inf, now, ask(seen, now))
    eager, idle, way = 1.0, 0, np.zeros(now.size)
    for _ in range(pace.steps):
        answer = ask(seen, now)
        idle = 0 if answer.bound > best.value + NOTABLE * abs(best.value) else idle + 1
        if answer.bound > best.value:
            best = Bound(answer.bound, now, answer)
        if idle >= pace.patience:
            eager, idle, now, answer = eager * pace.smaller, 0, best.prices, best.answer
            way = np.zeros(now.size)
        way = 0.7 * way + 0.3 * answer.slope if way.any() else answer.slope
        norm = float(way @ way)
        if norm < 1e-9 or eager < LEAST or target <= best.value or time.monotonic() > pace.until:
            break
        now = np.maximum(0.0, now + eager * (target - answer.bound) / norm * way)
        now[-1] = 0.0
    return best


def useful(seen: Layout, bound: Bound, target: float) -> list[list[int]]:
    """For each channel, the options that a plan of at most `target` may use."""
    slack = target - bound.value
    kept: Sequence[Bools] = [
        bound.answer.option_costs[a:b] - least <= slack
        for a, b, least in zip(seen.starts, seen.starts[1:], bound.answer.least, strict=False)
    ]
    return [np.flatnonzero(keep).tolist() for keep in kept]
