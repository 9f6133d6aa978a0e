"""Random tiny boards: the plans found are those of brute force, for every solver, narrowed first or not."""

from __future__ import annotations

import pytest

from optimizer.board import solvers
from optimizer.board.solution import INFEASIBLE, PROVEN, SolveOptions
from optimizer.board.solve import solve
from tests.board import brute, tiny

SOLVERS = ("cbc", "highs")
SEEDS = range(120)
WANTED = 3


def test_both_solvers_are_here():
    assert all(solvers.available(name) for name in SOLVERS)


@pytest.mark.independent
@pytest.mark.parametrize("solver", SOLVERS)
@pytest.mark.parametrize("seed", SEEDS)
def test_plans_are_those_of_brute_force(seed, solver):
    board = tiny.board(seed)
    expected = brute.ranked(board)
    wanted = 1 + seed % WANTED
    found = solve(board, SolveOptions(30, solver, wanted, narrow=bool(seed % 4)))
    assert not found.faults
    assert [plan.totals.cost for plan in found.plans] == [cost for cost, _ in expected[:wanted]]
    assert found.status == (PROVEN if expected else INFEASIBLE)
    assert all(plan.proven and plan.gap == 0 for plan in found.plans)
    assert found.complete == (len(expected) < wanted)
    costs = {active: cost for cost, active in expected}
    for plan in found.plans:
        active = frozenset(line.part for line in plan.lines if board.is_active(line.part))
        assert costs.pop(active) == plan.totals.cost


def test_the_boards_hold_every_feature_and_some_cannot_be_built():
    boards = [tiny.board(seed) for seed in SEEDS]
    ranked = [brute.ranked(board) for board in boards]
    assert 10 < sum(not rows for rows in ranked) < 60
    assert sum(len(rows) > 2 for rows in ranked) > 20
    for budget in ("cost", "current", "area", "line_items", "opamp_parts"):
        assert sum(getattr(board.budgets, budget) is not None for board in boards) > 10
    assert any(part.stock is not None for board in boards for part in board.parts)
    assert any(board.channels[0].options == board.channels[-1].options for board in boards)
