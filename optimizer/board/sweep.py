"""Which options a plan of at most some cost can use: all partial plans, channel after channel.

At fixed prices (see `bound`) a partial plan is bounded by what its channels pay, what the channels to come
pay at least, and what each supply then loses at least, given who certainly buys and who may still buy.
That sum is the Lagrangian bound at the start, only rises with every decision, and is the cost itself when
all is decided and no supply has more users than its table can tell apart. A plan that is within the target
never drops out; few others last, which leaves the solver with little to choose among.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.board.bound import Key, Terms
from optimizer.board.problem import Board, Option
from optimizer.board.supplies import (
    Floats,
    Ints,
    reference_uses,
    tables,
    taken,
    used_references,
)

Bools = NDArray[np.bool_]

LARGEST = 1 << 12
"""Entries that the table of one supply may have for each number of channels decided."""
STATES = 60_000
"""Partial plans that are followed at once."""


@dataclass(frozen=True, slots=True)
class User:
    """Who takes from a supply or shares a reference: units in all, for each copy, and the price of each.

    `step` is what one unit adds to a partial plan's code (0: not told apart, always undecided).
    """

    channel: int | None
    units: int
    each: int
    price: float
    step: int


@dataclass(frozen=True, slots=True)
class Thing:
    """A supply or a reference: its users by key, and its least losses by copies decided and code."""

    users: dict[Key, User]
    losses: Floats


@dataclass(frozen=True, slots=True)
class Swept:
    """The options of each channel that are left, and whether the sweep came to its end."""

    options: tuple[tuple[int, ...], ...]
    complete: bool


@dataclass(slots=True)
class _Front:
    """The partial plans: codes by thing, cost of the channels decided, loss of all things, options chosen."""

    codes: Ints
    paid: Floats
    loss: Floats
    chosen: Ints

    def take(self, rows: Bools) -> _Front:
        return _Front(self.codes[rows], self.paid[rows], self.loss[rows], self.chosen[rows])


def sweep(board: Board, terms: Terms, target: float) -> Swept:
    """The options that plans of at most `target` can use, as far as they can be told."""
    return _Sweep(board, terms, target).swept()


class _Sweep:
    """One sweep: the things with their tables, and the front that goes through the channels."""

    def __init__(self, board: Board, terms: Terms, target: float) -> None:
        seen, prices = terms.seen, terms.prices
        self.board, self.weights, self.keys, self.prices = board, terms.weights, seen.keys, prices
        self.target = target + seen.allowance
        sizes = [len(channel.options) for channel in board.channels]
        by_size = sorted(range(len(sizes)), key=lambda i: (sizes[i], i))
        self.order = tuple(i for i in by_size for _ in range(board.channels[i].count))
        costs = prices[seen.option_prices].sum(axis=0) + seen.option_draws
        self.costs = [costs[a:b] for a, b in zip(seen.starts, seen.starts[1:], strict=False)]
        self.place: dict[tuple[int, int], int] = {}
        self.things: list[Thing] = []
        self.told: set[int] = set()
        self._references()
        self._supplies()

    # Things

    def _supplies(self) -> None:
        each: dict[int, dict[Key, int]] = defaultdict(dict)
        for i, channel in enumerate(self.board.channels):
            for option in channel.options:
                for supply in set(taken(self.board, option)):
                    key = (0, i, supply)
                    number = taken(self.board, option).count(supply)
                    each[supply][key] = max(number, each[supply].get(key, 0))
        for reference in used_references(self.board):
            for supply, count in reference_uses(self.board, reference):
                each[supply][2, reference, supply] = count
        costs = tables(self.board, self.weights)
        for supply, users in each.items():
            self.place[0, supply] = len(self.things)
            self.things.append(self._thing(self._users(users), costs[supply]))

    def _users(self, each: dict[Key, int]) -> dict[Key, User]:
        """The users of a supply with the steps of their codes, channels before references."""
        users, step = {}, 1
        for key, number in sorted(each.items()):
            channel = key[1] if key[0] == 0 else None
            units = number * (self.board.channels[key[1]].count if channel is not None else 1)
            size = units + 1 if channel is not None else 2
            told = step * size <= LARGEST and (channel is not None or key[1] in self.told)
            price = float(self.prices[self.keys[key]])
            users[key] = User(channel, units, number, price, step if told else 0)
            step *= size if told else 1
        return users

    def _thing(self, users: dict[Key, User], table: Floats) -> Thing:
        """The least loss of a supply for every code, after each of its users' copies."""
        codes = np.arange(_codes(users))
        digits = {key: _digit(codes, user) for key, user in users.items()}
        sold = np.sum([digits[k] * _weight(u) for k, u in users.items()], axis=0).astype(np.int64)
        takings = np.sum([digits[k] * _weight(u) * u.price for k, u in users.items()], axis=0)
        rows = [
            _least_losses(self._open(users, digits, decided), table, sold, takings)
            for decided in range(1 + self._copies(users))
        ]
        return Thing(users, np.array(rows))

    def _copies(self, users: dict[Key, User]) -> int:
        return sum(self.board.channels[u.channel].count for u in users.values() if u.channel is not None)

    def _open(
        self, users: dict[Key, User], digits: dict[Key, Ints], decided: int
    ) -> list[tuple[float, int, Ints | int]]:
        """Who may still buy after `decided` copies: price, units, and by code whether they still may."""
        left: list[tuple[float, int, Ints | int]] = []
        channels = [u.channel for u in users.values() if u.channel is not None]
        copies = [i for i in self.order if i in channels][decided:]
        for key, user in users.items():
            if user.channel is None:
                free = 1 - digits[key] if user.step else 1
                left.append((user.price, user.units, free))
            elif user.step:
                left.append((user.price, user.each * copies.count(user.channel), 1))
            else:
                left.append((user.price, user.units, 1))
        return sorted(left, key=lambda entry: -entry[0])

    def _references(self) -> None:
        sharers: dict[int, set[int]] = defaultdict(set)
        for i, channel in enumerate(self.board.channels):
            for option in channel.options:
                if option.reference is not None:
                    sharers[option.reference].add(i)
        for reference, channels in sharers.items():
            self.place[1, reference] = len(self.things)
            self.things.append(self._reference(reference, sorted(channels)))

    def _reference(self, reference: int, channels: list[int]) -> Thing:
        """The loss of a reference: its dues less what its sharers pay, nought where it may stay closed."""
        users, step = {}, 1
        for i in channels:
            count = self.board.channels[i].count
            told = step * (count + 1) <= LARGEST
            price = float(self.prices[self.keys[1, i, reference]])
            users[1, i, reference] = User(i, count, 1, price, step if told else 0)
            step *= count + 1 if told else 1
        if all(user.step for user in users.values()):
            self.told.add(reference)
        dues = sum(
            count * float(self.prices[self.keys[2, reference, supply]])
            for supply, count in reference_uses(self.board, reference)
        )
        dues += self.weights.current * self.board.references[reference].current
        codes = np.arange(_codes(users))
        digits = {key: _digit(codes, user) for key, user in users.items()}
        takings = np.sum([digits[k] * u.price for k, u in users.items()], axis=0)
        rows = []
        for decided in range(1 + self._copies(users)):
            more = sum(price * units for price, units, _ in self._open(users, digits, decided))
            loss = dues - takings - more
            rows.append(np.where(codes > 0, loss, np.minimum(0.0, loss)))
        return Thing(users, np.array(rows))

    # The front

    def swept(self) -> Swept:
        """Go through all copies, or until too many partial plans are open."""
        things = len(self.things)
        front = _Front(
            np.zeros((1, things), dtype=np.int64),
            np.zeros(1),
            np.array([sum(float(thing.losses[0, 0]) for thing in self.things)]),
            np.zeros((1, 0), dtype=np.int64),
        )
        decided = np.zeros(things, dtype=np.int64)
        for level, i in enumerate(self.order):
            ahead = self._ahead(level + 1)
            grown = self._grown(front, i, level, decided, ahead)
            if grown is None:
                return self._left(front, level)
            front = grown
        return self._left(front, len(self.order))

    def _ahead(self, level: int) -> float:
        return sum(float(self.costs[i].min()) for i in self.order[level:])

    def _left(self, front: _Front, levels: int) -> Swept:
        options = [tuple(range(len(channel.options))) for channel in self.board.channels]
        for i in set(self.order[:levels]):
            places = [k for k in range(levels) if self.order[k] == i]
            if len(places) == self.board.channels[i].count:
                options[i] = tuple(np.unique(front.chosen[:, places]).tolist())
        return Swept(tuple(options), levels == len(self.order))

    def _grown(self, front: _Front, i: int, level: int, decided: Ints, ahead: float) -> _Front | None:
        """The front with one more copy decided; None where it would be too long. Counts up `decided`."""
        users = [
            k for k, thing in enumerate(self.things) if any(u.channel == i for u in thing.users.values())
        ]
        loss = front.loss.copy()
        for k in users:
            table, row = self.things[k].losses, int(decided[k])
            loss += table[row + 1][front.codes[:, k]] - table[row][front.codes[:, k]]
        decided[users] += 1
        now = replace(front, loss=loss)
        again = level > 0 and self.order[level - 1] == i
        grown, total = [], 0
        for j in range(len(self.board.channels[i].options)):
            fit = now.take(now.chosen[:, -1] <= j) if again else now
            child = self._child(fit, (i, j), decided, ahead)
            total += child.paid.size
            if total > STATES:
                return None
            grown.append(child)
        return _joined(grown)

    def _child(self, front: _Front, at: tuple[int, int], decided: Ints, ahead: float) -> _Front:
        """The partial plans that go on with one option of one channel and can stay within the target."""
        i, j = at
        added = self._added(front, i, self.board.channels[i].options[j])
        loss = front.loss.copy()
        for k, more in added.items():
            row = self.things[k].losses[int(decided[k])]
            before = front.codes[:, k]
            loss += row[before + more] - row[before]
        paid = front.paid + float(self.costs[i][j])
        fits = paid + loss + ahead <= self.target
        codes = front.codes[fits]
        for k, more in added.items():
            codes[:, k] += more[fits] if isinstance(more, np.ndarray) else more
        chosen = np.column_stack([front.chosen[fits], np.full(codes.shape[0], j)])
        return _Front(codes, paid[fits], loss[fits], chosen)

    def _added(self, front: _Front, i: int, option: Option) -> dict[int, Ints | int]:
        """What an option adds to the codes of the things that it uses."""
        added: dict[int, Ints | int] = {}
        for supply in taken(self.board, option):
            k = self.place[0, supply]
            added[k] = added.get(k, 0) + self.things[k].users[0, i, supply].step
        reference = option.reference
        if reference is None:
            return added
        k = self.place[1, reference]
        new = (front.codes[:, k] == 0).astype(np.int64)
        added[k] = self.things[k].users[1, i, reference].step
        for supply, _ in reference_uses(self.board, reference):
            k = self.place[0, supply]
            added[k] = added.get(k, 0) + new * self.things[k].users[2, reference, supply].step
        return added


def _codes(users: dict[Key, User]) -> int:
    """How many codes there are: one more than the largest."""
    return 1 + sum(u.step * (u.units if u.channel is not None else 1) for u in users.values())


def _digit(codes: Ints, user: User) -> Ints:
    """How many units (of a reference: whether) the user has certainly bought in each code."""
    if not user.step:
        return np.zeros_like(codes)
    size = user.units + 1 if user.channel is not None else 2
    return np.asarray(codes // user.step % size)


def _weight(user: User) -> int:
    return 1 if user.channel is not None else user.units


def _least_losses(
    left: list[tuple[float, int, Ints | int]], table: Floats, sold: Ints, takings: Floats
) -> Floats:
    """The least of cost less takings over who else may buy, dearest offers first."""
    last = table.size - 1
    number, money = sold.copy(), takings.astype(float)
    least = table[np.minimum(number, last)] - money
    for price, units, free in left:
        for _ in range(units):
            number = number + free
            money = money + free * price
            least = np.minimum(least, table[np.minimum(number, last)] - money)
    return np.asarray(least)


def _joined(fronts: list[_Front]) -> _Front:
    return _Front(
        np.concatenate([f.codes for f in fronts]),
        np.concatenate([f.paid for f in fronts]),
        np.concatenate([f.loss for f in fronts]),
        np.concatenate([f.chosen for f in fronts]),
    )
