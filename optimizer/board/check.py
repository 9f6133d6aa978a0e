"""A plan looked at anew, from the board alone: no table, price schedule or row of the model is used here."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from fractions import Fraction
from math import fsum

from optimizer.board.pools import Chosen
from optimizer.board.problem import Board, BoardError, BoardPart, Option
from optimizer.board.solution import Totals

ALLOWED = 1e-8
"""How far a sum of currents or areas may lie over its budget, relative: rounding of sums."""


class UnsoundPlanError(BoardError):
    """A plan that does not build the board, cannot be bought, or breaks a budget: a fault of the solver."""


def examined(board: Board, chosen: Chosen, pieces: Mapping[int, int]) -> Totals:
    """What the plan uses; raises UnsoundPlanError with everything that is wrong with it."""
    faults: list[str] = []
    options = _options(board, chosen, faults)
    references = {option.reference for option in options if option.reference is not None}
    spare = _held(board, options, references, pieces, faults)
    totals = Totals(
        cost=_cost(board, pieces, faults),
        current=_current(board, options, references, pieces),
        area=_area(board, pieces),
        line_items=len(pieces),
        opamp_parts=sum(board.parts[p].amplifiers > 0 for p in pieces),
        placements=sum(pieces.values()),
        spare=spare,
    )
    for name, limit in board.budgets.stated().items():
        used = getattr(totals, name)
        if used is None or used > limit * (1 + ALLOWED):
            faults.append(f"the {name} of {used} is over the budget of {limit}")
    if faults:
        raise UnsoundPlanError("; ".join(faults))
    return totals


def _options(board: Board, chosen: Chosen, faults: list[str]) -> list[Option]:
    found = []
    for channel, taken in zip(board.channels, chosen, strict=True):
        if len(taken) != channel.count:
            faults.append(f"channel {channel.name} is built {len(taken)} times, not {channel.count}")
        found += [channel.options[j] for j in taken]
    return found


def _held(
    board: Board, options: list[Option], references: set[int], pieces: Mapping[int, int], faults: list[str]
) -> tuple[tuple[int, int], ...]:
    """Whether the parts bought are the parts used, and the spare amplifiers by family."""
    need: Counter[int] = Counter()
    amplifiers: Counter[int] = Counter()
    for option in options:
        need.update(option.parts)
        amplifiers[option.family] += option.amplifiers
    for reference in references:
        shared = board.references[reference]
        for part, count in shared.parts:
            need[part] += count
        if shared.buffer is not None:
            amplifiers[shared.buffer] += 1
    plain = {p: n for p, n in pieces.items() if not board.parts[p].amplifiers}
    if plain != dict(need):
        faults.append("the parts bought are not the parts used")
    spare = []
    for family, entry in enumerate(board.families):
        left = sum(pieces.get(a, 0) * board.parts[a].amplifiers for a in entry.packages) - amplifiers[family]
        least = min((board.parts[a].amplifiers for a in entry.packages if pieces.get(a)), default=1)
        if left < 0 or left >= least:
            faults.append(f"{entry.name} has {left} amplifiers left over")
        if left:
            spare.append((family, left))
    return tuple(spare)


def _cost(board: Board, pieces: Mapping[int, int], faults: list[str]) -> int:
    total = 0
    for part, number in pieces.items():
        entry = board.parts[part]
        cents = _paid(entry, board.boards * number)
        if cents is None:
            faults.append(f"{board.boards * number} of {entry.name} are not in stock")
            continue
        total += cents + board.line_item + board.placement * number
    return total


def _paid(part: BoardPart, need: int) -> int | None:
    """The cheapest of what every quantity costs that one would ask for: the need, and each break above it."""
    offers = []
    for quantity in {need} | {-int(-first // 1) for first, _ in part.breaks if first > need}:
        if part.stock is not None and quantity > part.stock:
            continue
        reached = [unit for first, unit in part.breaks if first <= quantity] or [part.breaks[0][1]]
        cents = min(Fraction(repr(float(unit))) for unit in reached) * quantity * 100
        offers.append(int(cents + Fraction(1, 2)))
    return min(offers, default=None)


def _current(board: Board, options: list[Option], references: set[int], pieces: Mapping[int, int]) -> float:
    packages = [board.parts[p].current * n for p, n in pieces.items() if board.parts[p].amplifiers]
    return fsum(
        [*packages, *(board.references[r].current for r in references), *(o.current for o in options)]
    )


def _area(board: Board, pieces: Mapping[int, int]) -> float | None:
    areas = [board.parts[part].area for part in pieces]
    if None in areas:
        return None
    return fsum((board.parts[part].area or 0.0) * number for part, number in pieces.items())
