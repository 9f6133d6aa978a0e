"""The pools: for each kind of channel the candidates that the board's model may choose from.

Candidates that use the same parts are one: of several wirings or low-passes the one with the largest
margin stands for it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.board.prices import in_cents
from optimizer.board.problem import Board, Budgets, Channel, Family, Option, SharedReference
from optimizer.planning.amplifiers import Amplifiers
from optimizer.planning.kinds import NONE, Kind
from optimizer.planning.outline import Outline
from optimizer.planning.shelf import Shelf
from optimizer.search.space import Choice

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Key = tuple[int, int, int, int, int, bool]
"""Photodiode, group of op-amps, resistor, capacitor (-1: none), level (-1: ground), whether buffered."""
Six = tuple[int, int, int, int, int, int]
"""One setting of the search, by index."""


@dataclass(frozen=True, slots=True)
class Field:
    """Everything there is to choose from: the channels by kind, the part numbers, the op-amps in groups."""

    outline: Outline
    kinds: tuple[Kind, ...]
    shelf: Shelf
    amplifiers: Amplifiers

    @property
    def copies(self) -> int:
        """Channels on one board."""
        return sum(kind.count for kind in self.kinds)


@dataclass(slots=True)
class Pool:
    """The candidates of one kind by what they use: the smallest margin, and the setting."""

    kind: Kind
    group: Ints
    held: dict[Key, tuple[float, Six]] = field(default_factory=dict)

    def add(self, choice: Choice, margin: Floats) -> int:
        """Take in settings that meet; returns how many of them use parts in a new way."""
        before = len(self.held)
        rows = np.column_stack(choice.columns()).tolist()
        for key, six, least in zip(self.keys(choice), rows, margin.tolist(), strict=True):
            known = self.held.get(key)
            mine = (least, tuple(six))
            if known is None or (-mine[0], mine[1]) < (-known[0], known[1]):
                self.held[key] = mine
        return len(self.held) - before

    def keys(self, choice: Choice) -> list[Key]:
        """What each setting uses."""
        kind = self.kind
        columns = (
            kind.diode_part[choice.diode],
            self.group[choice.opamp],
            kind.resistor_part[choice.resistor],
            kind.capacitor_part[choice.capacitor],
            kind.level[choice.context],
        )
        buffered = kind.space.contexts.buffered[choice.context].tolist()
        return list(zip(*(column.tolist() for column in columns), buffered, strict=True))

    def choice(self, keys: Sequence[Key]) -> Choice:
        """The settings behind `keys`."""
        rows = np.array([self.held[key][1] for key in keys], dtype=np.int64).reshape(-1, 6)
        return Choice(*(rows[:, k] for k in range(6)))


@dataclass(frozen=True, slots=True)
class Assembled:
    """Pools as a board for the model. Its parts are `parts` of the shelf, its families `groups`.

    `keys`: by kind, what each option is.
    """

    board: Board
    parts: tuple[int, ...]
    groups: tuple[int, ...]
    keys: tuple[tuple[Key, ...], ...]


def assembled(field_: Field, pools: Sequence[Pool]) -> Assembled:
    """The board that chooses from `pools`, one channel for each kind."""
    return _Assembly(field_, pools).assembled()


def budgets(outline: Outline) -> Budgets:
    """The limits of a board as its model takes them."""
    limits = outline.limits
    return Budgets(
        cost=None if limits.cost is None else in_cents(limits.cost * outline.quantity),
        current=limits.supply_current,
        area=limits.area,
        line_items=limits.line_items,
        opamp_parts=outline.rules.opamp_parts or None,
    )


def costs_of(outline: Outline) -> tuple[int, int]:
    """Cents a build for a part number, and for a piece a board."""
    costs = outline.costs
    return in_cents(costs.line_item), in_cents(costs.placement * outline.quantity)


class _Assembly:
    """Numbers what the pools use."""

    def __init__(self, field_: Field, pools: Sequence[Pool]) -> None:
        self.field, self.pools = field_, pools
        self.keys = tuple(tuple(sorted(pool.held)) for pool in pools)
        self.groups = tuple(sorted({key[1] for keys in self.keys for key in keys}))
        self.group_place = {group: place for place, group in enumerate(self.groups)}
        packages = {p for group in self.groups for p in field_.amplifiers.packages[group]}
        used = {p for i, keys in enumerate(self.keys) for key in keys for p in self._all_parts(i, key)}
        self.parts = tuple(sorted(packages | used))
        self.place = {part: place for place, part in enumerate(self.parts)}
        self.references: dict[tuple[tuple[int, ...], int], int] = {}
        self.shared: list[SharedReference] = []

    def assembled(self) -> Assembled:
        channels = tuple(self._channel(i) for i in range(len(self.pools)))
        outline, shelf = self.field.outline, self.field.shelf
        line_item, placement = costs_of(outline)
        board = Board(
            boards=outline.quantity,
            parts=tuple(shelf.parts[part].entry for part in self.parts),
            families=tuple(self._family(group) for group in self.groups),
            references=tuple(self.shared),
            channels=channels,
            budgets=budgets(outline),
            line_item=line_item,
            placement=placement,
        )
        return Assembled(board, self.parts, self.groups, self.keys)

    def _family(self, group: int) -> Family:
        amplifiers = self.field.amplifiers
        return Family(amplifiers.names[group], tuple(self.place[p] for p in amplifiers.packages[group]))

    def _channel(self, i: int) -> Channel:
        kind = self.field.kinds[i]
        return Channel(kind.name, kind.count, tuple(self._option(i, key) for key in self.keys[i]))

    def _divider(self, i: int, key: Key) -> tuple[int, ...]:
        """The parts of the divider of an option; nothing on ground."""
        if key[4] == NONE:
            return ()
        kind = self.field.kinds[i]
        context = self.pools[i].held[key][1][2]
        return tuple(int(part) for part in kind.divider[context])

    def _all_parts(self, i: int, key: Key) -> tuple[int, ...]:
        own = (key[0], key[2], *((key[3],) if key[3] != NONE else ()))
        return (*own, *self._divider(i, key))

    def _option(self, i: int, key: Key) -> Option:
        divider, group = self._divider(i, key), self.group_place[key[1]]
        every = tuple(self.place[part] for part in self._all_parts(i, key))
        context = self.pools[i].held[key][1][2]
        current = float(self.field.kinds[i].space.contexts.current[context])
        if not key[5]:
            return Option(every, group, current=current)
        return Option(every[: -len(divider)], group, self._reference(divider, group, current))

    def _reference(self, divider: tuple[int, ...], group: int, current: float) -> int:
        """The level that an option with a buffer uses: of these parts, on the rails of its op-amps."""
        known = self.references.setdefault((divider, group), len(self.shared))
        if known == len(self.shared):
            counts: dict[int, int] = {}
            for part in divider:
                counts[self.place[part]] = counts.get(self.place[part], 0) + 1
            name = f"level {known + 1}"
            self.shared.append(SharedReference(name, tuple(sorted(counts.items())), current, group))
        return known


def without_limits(made: Assembled) -> Assembled:
    """The same board with no limits at all."""
    return replace(made, board=replace(made.board, budgets=Budgets()))
