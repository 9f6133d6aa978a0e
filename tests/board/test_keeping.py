"""The board that changes least, against every plan of tiny boards, counted and priced by code of its own."""

from __future__ import annotations

import random
from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations_with_replacement, permutations, product

import pytest

from optimizer.board import solvers
from optimizer.board.keeping import Keeping, Standing, fewest, keeping
from optimizer.board.pools import Chosen
from optimizer.board.problem import Board, BoardPart, Budgets, Channel, Family, Option, SharedReference
from optimizer.board.solution import INFEASIBLE, PROVEN, SolveOptions
from tests.board.brute import packed, paid
from tests.board.tiny import board as tiny_board

Tried = tuple[int, int, frozenset[int]]
"""Changes, cents, active parts."""


def standing(board: Board, draw: random.Random) -> Standing:
    """A board that might have been built: any packages, levels and moves."""
    opamps = [p for p, part in enumerate(board.parts) if part.amplifiers]
    packages = Counter(draw.choices(opamps, k=draw.randint(1, 3)))
    levels = draw.randint(0, min(2, len(board.references)))
    kin = [frozenset(draw.sample(range(len(board.references)), draw.randint(0, 1))) for _ in range(levels)]
    homes = tuple(draw.choice([None, *range(levels)]) for _ in board.channels)
    moves = tuple(tuple(draw.choice([0, 0, 1, 2]) for _ in c.options) for c in board.channels)
    swaps = draw.choice([None, None, None, 1, 2])
    return Standing(packages, draw.choice([0, 0, 1]), moves, homes, tuple(kin), swaps)


def every_plan(board: Board, stood: Standing) -> Iterator[Tried]:
    """All plans within the budgets."""
    each = [list(combinations_with_replacement(range(len(c.options)), c.count)) for c in board.channels]
    for chosen in product(*each):
        options = [board.channels[i].options[j] for i, taken in enumerate(chosen) for j in taken]
        for pieces in all_pieces(board, options):
            cost = cents(board, options, pieces)
            swaps = swapped(board, stood, pieces)
            if cost is None or (stood.swaps is not None and swaps > stood.swaps):
                continue
            moves = sum(stood.moves[i][j] for i, taken in enumerate(chosen) for j in taken)
            active = frozenset(p for p in pieces if board.is_active(p))
            yield moves + swaps + levels_changed(board, stood, chosen), cost, active


def all_pieces(board: Board, options: list[Option]) -> Iterator[Counter[int]]:
    need: Counter[int] = Counter(part for option in options for part in option.parts)
    amplifiers: Counter[int] = Counter()
    for option in options:
        amplifiers[option.family] += option.amplifiers
    for reference in {option.reference for option in options} - {None}:
        shared = board.references[int(reference or 0)]
        need.update(dict(shared.parts))
        if shared.buffer is not None:
            amplifiers[shared.buffer] += 1
    for packs in product(*(packed(board, f, n) for f, n in amplifiers.items())):
        yield need + Counter({part: n for pack in packs for part, n in pack.items()})


def cents(board: Board, options: list[Option], pieces: Counter[int]) -> int | None:
    """What the pieces cost, None where they cannot be had or a budget is broken."""
    total, area = 0, 0.0
    current = sum(option.current for option in options)
    current += sum(
        board.references[r].current for r in {option.reference for option in options} if r is not None
    )
    for part, number in pieces.items():
        entry = board.parts[part]
        money = paid(entry.breaks, entry.stock, number * board.boards)
        if money is None:
            return None
        total += money + board.line_item + number * board.placement
        area += number * (entry.area or 0.0)
        current += number * entry.current if entry.amplifiers else 0.0
    used = {
        "cost": total,
        "current": current,
        "area": area,
        "line_items": len(pieces),
        "opamp_parts": sum(board.parts[p].amplifiers > 0 for p in pieces),
    }
    fits = all(used[name] <= limit * (1 + 1e-8) for name, limit in board.budgets.stated().items())
    return total if fits else None


def swapped(board: Board, stood: Standing, pieces: Counter[int]) -> int:
    leave, come = stood.lost, 0
    for part, entry in enumerate(board.parts):
        if entry.amplifiers:
            more = pieces.get(part, 0) - stood.packages.get(part, 0)
            come += max(0, more)
            leave += max(0, -more)
    return max(leave, come)


def levels_changed(board: Board, stood: Standing, chosen: Chosen) -> int:
    """The least over every way in which the levels that are there may stand for those that were."""
    taken = [
        (stood.homes[i], board.channels[i].options[j].reference)
        for i, options in enumerate(chosen)
        for j in options
    ]
    there = sorted({r for _, r in taken if r is not None})
    old = range(len(stood.kin))
    best = None
    for line in set(permutations([*there, *([None] * len(old))], len(old))):
        kept = sum(r is not None and r in stood.kin[level] for level, r in enumerate(line))
        added = len(set(there) - set(line))
        left = sum(home is not None and r is not None and line[home] != r for home, r in taken)
        count = len(old) - kept + added + left
        best = count if best is None else min(best, count)
    return best or 0


def best_of(board: Board, stood: Standing, plans: int) -> list[tuple[int, int]]:
    """Changes and cents of the best plan for each set of active parts, in rank order."""
    best: dict[frozenset[int], tuple[int, int]] = {}
    for changes, cost, active in every_plan(board, stood):
        best[active] = min(best.get(active, (changes, cost)), (changes, cost))
    return sorted(best.values())[:plans]


def said(found: Keeping) -> list[tuple[int, int]]:
    return [(kept.changes, kept.plan.totals.cost) for kept in found.plans]


@pytest.mark.parametrize("solver", [name for name in solvers.NAMES if solvers.available(name)])
@pytest.mark.parametrize("seeds", range(4))
def test_the_same_as_every_plan(solver: str, seeds: int) -> None:
    infeasible = 0
    for seed in range(15 * seeds, 15 * seeds + 15):
        board = tiny_board(seed)
        stood = standing(board, random.Random(seed + 1000))
        found = keeping(board, stood, SolveOptions(time=20.0, solver=solver, plans=3))
        wanted = best_of(board, stood, 3)
        assert said(found) == wanted, seed
        assert not found.faults
        assert found.status == (PROVEN if wanted else INFEASIBLE)
        infeasible += not wanted
    assert infeasible < 15


@pytest.mark.parametrize("seed", range(30))
def test_the_fewest_changes_with_no_budget_and_stock_of_op_amps_alone(seed: int) -> None:
    board = tiny_board(seed)
    stood = standing(board, random.Random(seed + 1000))
    parts = tuple(part if part.amplifiers else replace(part, stock=None) for part in board.parts)
    free = replace(board, parts=parts, budgets=Budgets())
    least = min((changes for changes, *_ in every_plan(free, stood)), default=None)
    assert fewest(board, stood, SolveOptions(time=20.0)) == least
    wanted = best_of(board, stood, 3)
    assert said(keeping(board, stood, SolveOptions(time=20.0, plans=3), least)) == wanted


def test_a_dual_that_gives_way_to_two_singles_is_two_changes() -> None:
    """One package is another now, and one has come."""
    found = keeping(duals(), Standing({0: 1}, 0, ((0,),), (None,), ()), SolveOptions())
    assert said(found)[0][0] == 0
    without = Board(10, duals().parts, (Family("A", (1,)),), (), duals().channels)
    with pytest.raises(Exception, match="0 families"):
        keeping(without, Standing({0: 1}, 0, ((0,),), (None,), ()), SolveOptions())
    parts = (BoardPart("twin", ((1, 9.0),), amplifiers=1), *duals().parts[2:])
    channels = (Channel("c", 2, (Option((1,), 0),)),)
    gone = Board(10, parts, (Family("A", (0,)),), (), channels)
    found = keeping(gone, Standing({}, 1, ((0,),), (None,), ()), SolveOptions())
    assert [plan.changes for plan in found.plans] == [2]


def duals() -> Board:
    """Two copies on a dual that also comes as a single, the single far cheaper."""
    parts = (
        BoardPart("dual", ((1, 9.0),), amplifiers=2),
        BoardPart("single", ((1, 0.1),), amplifiers=1),
        BoardPart("diode", ((1, 1.0),), active=True),
    )
    return Board(10, parts, (Family("A", (0, 1)),), (), (Channel("c", 2, (Option((2,), 0),)),))


def test_a_level_that_gives_way_is_one_change_for_all_who_use_it() -> None:
    parts = (
        BoardPart("amplifier", ((1, 1.0),), amplifiers=1),
        BoardPart("diode", ((1, 1.0),), active=True),
        BoardPart("resistor", ((1, 0.1),)),
    )
    levels = (SharedReference("new", ((2, 2),), buffer=0),)
    channels = (Channel("c", 3, (Option((1,), 0, 0),)),)
    board = Board(10, parts, (Family("A", (0,)),), levels, channels)
    found = keeping(board, Standing({0: 4}, 0, ((0,),), (0,), (frozenset(),)), SolveOptions())
    assert [plan.changes for plan in found.plans] == [1]
