"""What a board can be supplied with: every plain part and every op-amp family, and what n of it cost.

A supply is a part that is no op-amp (its own index), or a family (after all parts): of a family the
amplifiers are counted, and its cost is that of the cheapest packages that hold them. So everything that
depends on one number alone (price breaks, stock, line items, placements, spare amplifiers) is inside one
exact table for each supply, and the plans are left with choosing numbers.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from heapq import nlargest

import numpy as np
from numpy.typing import NDArray

from optimizer.board.prices import schedule
from optimizer.board.problem import Board, BoardPart, Channel, Option

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Weights:
    """What one unit of each budget adds to what is minimised: plain cost, or cost and prices of budgets."""

    cost: float = 1.0
    current: float = 0.0
    area: float = 0.0
    line_items: float = 0.0
    opamp_parts: float = 0.0


PLAIN = Weights()


def family_supply(board: Board, family: int) -> int:
    """The index of the supply of `family`."""
    return len(board.parts) + family


def taken(board: Board, option: Option) -> list[int]:
    """The supplies of an option, each as often as it takes it."""
    return [*option.parts, *[family_supply(board, option.family)] * option.amplifiers]


def most_of(board: Board) -> dict[int, int]:
    """The most pieces (amplifiers) of each supply that a plan without idle references uses on a board."""
    most: dict[int, int] = defaultdict(int)
    for channel in board.channels:
        for supply, count in _most_in(board, channel).items():
            most[supply] += channel.count * count
    for supply, counts in _reference_uses(board).items():
        most[supply] += sum(nlargest(sum(c.count for c in board.channels), counts))
    return dict(most)


def _most_in(board: Board, channel: Channel) -> dict[int, int]:
    most: dict[int, int] = defaultdict(int)
    for option in channel.options:
        family = family_supply(board, option.family)
        most[family] = max(most[family], option.amplifiers)
        for part in option.parts:
            most[part] = max(most[part], option.parts.count(part))
    return most


def used_references(board: Board) -> list[int]:
    """The references that some option of the pools uses."""
    used = {o.reference for c in board.channels for o in c.options if o.reference is not None}
    return sorted(used)


def reference_uses(board: Board, reference: int) -> list[tuple[int, int]]:
    """The supplies of a reference with their number: its parts, and its buffer's amplifier."""
    shared = board.references[reference]
    counts: dict[int, int] = defaultdict(int)
    for part, count in shared.parts:
        counts[part] += count
    if shared.buffer is not None:
        counts[family_supply(board, shared.buffer)] += 1
    return sorted(counts.items())


def _reference_uses(board: Board) -> dict[int, list[int]]:
    uses: dict[int, list[int]] = defaultdict(list)
    for reference in used_references(board):
        for supply, count in reference_uses(board, reference):
            uses[supply].append(count)
    return uses


def part_table(board: Board, part: int, most: int, weights: Weights) -> Floats:
    """What 0 to `most` pieces of one part a board cost, everything in; infinite beyond the stock."""
    entry = board.parts[part]
    cents = schedule(entry.breaks, board.boards, most, entry.stock)
    number = np.arange(most + 1)
    each, opens = budget_dues(entry, weights)
    each += weights.cost * board.placement
    opens += weights.cost * board.line_item
    return np.asarray(weights.cost * cents + each * number + opens * (number > 0))


def budget_dues(entry: BoardPart, weights: Weights) -> tuple[float, float]:
    """What a piece of a part, and the part number as such, add for the budgets that have prices."""
    each, opens = weights.area * (entry.area or 0.0), weights.line_items
    if entry.amplifiers:
        each, opens = each + weights.current * entry.current, opens + weights.opamp_parts
    return each, opens


def family_table(board: Board, family: int, most: int, weights: Weights) -> Floats:
    """What packages for at least 0 to `most` amplifiers of a family cost."""
    return _packed(board, family, most, weights)[0]


def packages(board: Board, family: int, amplifiers: int, weights: Weights = PLAIN) -> dict[int, int]:
    """The cheapest packages that hold `amplifiers`, by part; of equal ones, the later parts take less."""
    _, taken = _packed(board, family, amplifiers, weights)
    need, found = amplifiers, {}
    for part, counts in reversed(list(zip(board.families[family].packages, taken, strict=True))):
        if counts[need]:
            found[part] = int(counts[need])
            need = max(0, need - board.parts[part].amplifiers * found[part])
    return found


def _packed(board: Board, family: int, most: int, weights: Weights) -> tuple[Floats, list[Ints]]:
    """Package by package: the least cost of at least m amplifiers, and how many of the last are in it."""
    best = np.full(most + 1, np.inf)
    best[0] = 0.0
    taken: list[Ints] = []
    need = np.arange(most + 1)
    for part in board.families[family].packages:
        size = board.parts[part].amplifiers
        table = part_table(board, part, -(-most // size), weights)
        choices = np.stack([best[np.maximum(0, need - size * n)] + cost for n, cost in enumerate(table)])
        taken.append(choices.argmin(axis=0))
        best = choices.min(axis=0)
    return best, taken


def tables(board: Board, weights: Weights = PLAIN, most: dict[int, int] | None = None) -> Floats:
    """Costs by supply (row; a last row of nothing) and number (column); infinite where it cannot be."""
    most = most_of(board) if most is None else most
    rows = len(board.parts) + len(board.families) + 1
    filled = np.full((rows, 2 + max(most.values(), default=0)), np.inf)
    filled[:, 0] = 0.0
    filled[-1] = 0.0
    for supply, number in most.items():
        family = supply - len(board.parts)
        row = (
            part_table(board, supply, number, weights)
            if family < 0
            else family_table(board, family, number, weights)
        )
        filled[supply, : number + 1] = row
    return filled


def padded(rows: Iterable[Iterable[int]], filler: int) -> Ints:
    """Ragged rows as columns of one array, short ones filled up."""
    lists = [list(row) for row in rows]
    width = max((len(row) for row in lists), default=0)
    out = np.full((width, len(lists)), filler, dtype=np.int64)
    for place, row in enumerate(lists):
        out[: len(row), place] = row
    return out
