"""Random tiny boards: the plans found are those of brute force, for every solver, narrowed first or not."""

from __future__ import annotations

import pytest

from optimizer.board import heuristic, narrow, runs, solvers
from optimizer.board import solve as solving
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


@pytest.mark.independent
@pytest.mark.parametrize("solver", SOLVERS)
def test_a_wide_gap_is_closed_in_on_first(solver, monkeypatch):
    """With a poor first plan and a large share, plans cheaper by it are found or proved away, both often."""
    monkeypatch.setattr(solving, "WIDE", -1.0)
    monkeypatch.setattr(narrow, "look", _poor)
    told, run = [], solvers.run

    def heard(name, task):
        answer = run(name, task)
        if task.below is not None:
            told.append(answer.outcome)
            assert answer.outcome != runs.INFEASIBLE or task.below <= cost
        return answer

    monkeypatch.setattr(solvers, "run", heard)
    for seed in SEEDS[:60]:
        board = tiny.board(seed)
        expected = brute.ranked(board)
        if expected:
            cost = expected[0][0]
            monkeypatch.setattr(solving, "SHARES", ((0.001,), (0.1, 0.01))[seed % 2])
            found = solve(board, SolveOptions(30, solver, 1 + seed % WANTED))
            assert not found.faults
            assert all(plan.proven for plan in found.plans)
            assert [plan.totals.cost for plan in found.plans] == [c for c, _ in expected[: 1 + seed % WANTED]]
    assert told.count(runs.INFEASIBLE) > 5
    assert told.count(runs.OPTIMAL) > 0


def test_what_is_proved_of_cheaper_plans_says_nothing_of_dearer_ones():
    """A bound of a run on the options of plans below some cost counts up to that cost only."""
    work = solving.Solving(tiny.board(0), SolveOptions())
    for outcome in (runs.STOPPED, runs.OPTIMAL, runs.INTERRUPTED):
        work._note(runs.Run(outcome, None, 900.0), None, 700)
        assert work.bound == 700.0
    work._note(runs.Run(runs.STOPPED, None, 800.0), None, 1000)
    assert work.bound == 800.0


def _poor(board, best, effort, told=None):
    """One plan, put together without a search."""
    return heuristic.look(board, best, heuristic.Effort(0, effort.seconds, effort.seed), told)


def test_the_boards_hold_every_feature_and_some_cannot_be_built():
    boards = [tiny.board(seed) for seed in SEEDS]
    ranked = [brute.ranked(board) for board in boards]
    assert 10 < sum(not rows for rows in ranked) < 60
    assert sum(len(rows) > 2 for rows in ranked) > 20
    for budget in ("cost", "current", "area", "line_items", "opamp_parts"):
        assert sum(getattr(board.budgets, budget) is not None for board in boards) > 10
    assert any(part.stock is not None for board in boards for part in board.parts)
    assert any(board.channels[0].options == board.channels[-1].options for board in boards)
