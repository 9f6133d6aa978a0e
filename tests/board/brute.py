"""Every plan of a tiny board, tried one by one; nothing here comes from the model or its price schedules."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Decimal
from functools import cache
from itertools import combinations_with_replacement, product

from optimizer.board.problem import Board, Option

Active = frozenset[int]


@dataclass(frozen=True)
class Tried:
    """One plan: what it uses of each budget, and its active parts."""

    cost: int
    current: float
    area: float
    line_items: int
    opamp_parts: int
    active: Active


@cache
def paid(breaks: tuple[tuple[float, float], ...], stock: float | None, need: int) -> int | None:
    """The least cents for at least `need` pieces, every quantity up to the last break tried."""
    best = None
    for quantity in range(need, max(need, int(breaks[-1][0])) + 1):
        if stock is not None and quantity > stock:
            break
        unit = breaks[0][1]
        for first, price in breaks:
            if quantity >= first:
                unit = price
        money = Decimal(str(unit)) * quantity * 100
        cents = int(money.quantize(Decimal(1), rounding=ROUND_HALF_UP))
        best = cents if best is None else min(best, cents)
    return best


def plans(board: Board) -> Iterator[Tried]:
    """All plans that can be bought, budgets aside."""
    each = [list(combinations_with_replacement(c.options, c.count)) for c in board.channels]
    for choice in product(*each):
        options = [option for taken in choice for option in taken]
        yield from bought(board, options)


def bought(board: Board, options: list[Option]) -> Iterator[Tried]:
    need: Counter[int] = Counter()
    amplifiers: Counter[int] = Counter()
    for option in options:
        need.update(option.parts)
        amplifiers[option.family] += option.amplifiers
    shared = {option.reference for option in options} - {None}
    for reference in shared:
        for part, count in board.references[reference].parts:
            need[part] += count
        buffer = board.references[reference].buffer
        if buffer is not None:
            amplifiers[buffer] += 1
    drawn = sum(o.current for o in options) + sum(board.references[r].current for r in shared)
    for packs in product(*(packed(board, f, n) for f, n in sorted(amplifiers.items()))):
        pieces = need + Counter({part: n for pack in packs for part, n in pack.items()})
        tried = _priced(board, pieces, drawn)
        if tried is not None:
            yield tried


def packed(board: Board, family: int, amplifiers: int) -> list[dict[int, int]]:
    """All ways to hold the amplifiers of which no package could be left out."""
    packages = board.families[family].packages
    sizes = [board.parts[a].amplifiers for a in packages]
    found = []
    for counts in product(*(range(amplifiers + 1) for _ in packages)):
        held = sum(n * size for n, size in zip(counts, sizes, strict=True))
        least = min((size for n, size in zip(counts, sizes, strict=True) if n), default=0)
        if 0 <= held - amplifiers < least:
            found.append({a: n for a, n in zip(packages, counts, strict=True) if n})
    return found


def _priced(board: Board, pieces: Counter[int], drawn: float) -> Tried | None:
    cost, current, area = 0, drawn, 0.0
    for part, number in pieces.items():
        entry = board.parts[part]
        cents = paid(entry.breaks, entry.stock, number * board.boards)
        if cents is None:
            return None
        cost += cents + board.line_item + number * board.placement
        area += number * (entry.area or 0.0)
        current += number * entry.current
    opamps = [part for part in pieces if board.parts[part].amplifiers]
    active = frozenset(part for part in pieces if board.parts[part].active or part in opamps)
    return Tried(cost, current, area, len(pieces), len(opamps), active)


def keeps(board: Board, tried: Tried, but: str = "") -> bool:
    """Whether the plan is within the budgets, `but` one of them."""
    limits = board.budgets
    return all(
        limit is None or name == but or getattr(tried, name) <= limit * (1 + 1e-12)
        for name in ("cost", "current", "area", "line_items", "opamp_parts")
        for limit in [getattr(limits, name)]
    )


def ranked(board: Board) -> list[tuple[int, Active]]:
    """The least cost for each set of active parts, cheapest first."""
    best: dict[Active, int] = {}
    for tried in plans(board):
        if keeps(board, tried) and tried.cost < best.get(tried.active, tried.cost + 1):
            best[tried.active] = tried.cost
    return sorted(((cost, active) for active, cost in best.items()), key=lambda row: row[0])


def least(board: Board, budget: str) -> float | None:
    """The least use of one budget with the others kept."""
    return min((getattr(t, budget) for t in plans(board) if keeps(board, t, budget)), default=None)
