"""Boards that nothing meets: the smallest conflict and the least relaxations are those of brute force."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

import pytest

from optimizer.board.conflicts import conflict, relaxations
from optimizer.board.problem import Budgets
from optimizer.board.solution import SolveOptions
from tests.board import brute, tiny

STUCK = [seed for seed in range(160) if not brute.ranked(tiny.board(seed))][:25]


def smallest(board):
    """The size of the smallest conflict, and all conflicts of that size."""
    stated = [(name, 0) for name in board.budgets.stated()]
    demands = [*stated, *(("channel", i) for i in range(len(board.channels)))]
    for size in range(1, len(demands) + 1):
        found = [set(some) for some in combinations(demands, size) if not met(board, some)]
        if found:
            return found
    return []


def met(board, demands):
    budgets = {name: value for name, value in board.budgets.stated().items() if (name, 0) in demands}
    channels = tuple(c for i, c in enumerate(board.channels) if ("channel", i) in demands)
    part = replace(board, channels=channels, budgets=Budgets(**budgets))
    return any(brute.keeps(part, tried) for tried in brute.plans(part))


@pytest.mark.independent
@pytest.mark.parametrize("seed", STUCK)
def test_the_smallest_conflict_is_that_of_brute_force(seed):
    board = tiny.board(seed)
    found = conflict(board, SolveOptions(30, "cbc"))
    assert found is not None
    assert found.smallest
    named = {(name, 0) for name in found.budgets} | {("channel", i) for i in found.channels}
    assert named in smallest(board)


@pytest.mark.independent
@pytest.mark.parametrize("seed", STUCK)
def test_the_least_relaxation_of_each_budget_is_that_of_brute_force(seed):
    board = tiny.board(seed)
    for row in relaxations(board, SolveOptions(30, ("cbc", "highs")[seed % 2])):
        assert row.proven
        assert row.limit == getattr(board.budgets, row.budget)
        least = brute.least(board, row.budget)
        assert row.least == (None if least is None else pytest.approx(least, rel=1e-9))


def test_some_relaxations_help_and_some_do_not():
    rows = [row for seed in STUCK for row in relaxations(tiny.board(seed), SolveOptions(30, "cbc"))]
    assert any(row.least is None for row in rows)
    assert any(row.least is not None and row.least > row.limit for row in rows)


def test_a_board_that_can_be_met_has_no_conflict():
    seed = next(seed for seed in range(160) if brute.ranked(tiny.board(seed)))
    assert conflict(tiny.board(seed), SolveOptions(30, "cbc")) is None
