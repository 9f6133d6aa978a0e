"""A solver that is absent, dies, is killed or runs out of time: said so, and the best plan known is given."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from optimizer.board import cbc, highs, runs, solvers
from optimizer.board.check import UnsoundPlanError, examined
from optimizer.board.problem import Board, BoardError
from optimizer.board.solution import FAILED, INTERRUPTED, PROVEN, TIME_LIMIT, Solution, SolveOptions
from optimizer.board.solve import solve
from tests.benchmarks import synthetic_boards
from tests.board import brute, tiny

SOLVERS = ("cbc", "highs")
ROOT = Path(__file__).parents[2]


@pytest.fixture(scope="module")
def small() -> Board:
    return synthetic_boards.board(1, 6, 60)


@pytest.fixture(scope="module")
def hard() -> Board:
    """Far too hard for a second."""
    return synthetic_boards.board(1, 14, 200)


@pytest.fixture(scope="module")
def optimum(small: Board) -> int:
    return solve(small, SolveOptions(30, "cbc")).plans[0].totals.cost


def sound(board: Board, solution: Solution) -> None:
    for plan in solution.plans:
        assert examined(board, plan.chosen, {line.part: line.pieces for line in plan.lines}) == plan.totals
        assert plan.bound <= plan.totals.cost
        assert plan.proven == (plan.bound == plan.totals.cost)


def script(folder, text: str) -> str:
    path = folder / "solver"
    path.write_text(f"#!/bin/sh\n{text}\n")
    path.chmod(0o755)
    return str(path)


@pytest.mark.parametrize("name", SOLVERS)
def test_a_solver_that_is_absent_is_named(name, small, optimum, monkeypatch):
    monkeypatch.setattr({"cbc": cbc, "highs": highs}[name], "available", lambda: False)
    found = solve(small, SolveOptions(30, name))
    assert found.status == FAILED
    (fault,) = found.faults
    assert fault.startswith(f"the solver {name} is not available here (")
    assert "extra 'highs'" in fault
    assert found.plans[0].totals.cost >= optimum >= found.bound
    sound(small, found)


def test_auto_takes_the_better_one_there_is(small, monkeypatch):
    assert solvers.resolved("auto") == "highs"
    monkeypatch.setattr(highs, "available", lambda: False)
    assert solvers.resolved("auto") == "cbc"
    assert solve(small, SolveOptions(30)).solver == "cbc"


@pytest.mark.parametrize(
    ("text", "said"),
    [("exit 3", "CBC ended with status 3"), ("kill -9 $$", "CBC was ended by signal 9")],
)
def test_cbc_that_dies_is_named(text, said, small, tmp_path, monkeypatch):
    monkeypatch.setattr(cbc, "program", lambda: script(tmp_path, text))
    found = solve(small, SolveOptions(30, "cbc"))
    assert found.status == FAILED
    assert found.faults == (f"{said} before it had an answer",)
    assert found.plans
    sound(small, found)


def die(*_args):
    os.kill(os.getpid(), signal.SIGKILL)


def test_highs_that_is_killed_is_named_and_auto_goes_on_with_cbc(small, optimum, monkeypatch):
    monkeypatch.setattr(highs, "_solved", die)
    found = solve(small, SolveOptions(30, "highs"))
    assert found.status == FAILED
    assert found.faults == ("HiGHS was ended by signal 9 before it had an answer",)
    sound(small, found)
    other = solve(small, SolveOptions(30, "auto"))
    assert other.status == PROVEN
    assert other.solver == "cbc"
    assert other.plans[0].totals.cost == optimum
    assert other.faults == found.faults


def test_highs_that_fails_says_why(small, monkeypatch):
    def broken(*_args):
        raise RuntimeError("out of order")

    monkeypatch.setattr(highs, "_solved", broken)
    assert solve(small, SolveOptions(30, "highs")).faults == ("HiGHS failed: RuntimeError: out of order",)


def test_a_plan_that_is_wrong_is_not_shown(small, optimum, monkeypatch):
    """Both an answer that builds no board, and one whose values cost other than stated."""

    def lying(name, task):
        values = {variable.name: 0.0 for variable in task.problem.variables()}
        return runs.Run(runs.OPTIMAL, values, 0.0)

    monkeypatch.setattr(solvers, "run", lying)
    found = solve(small, SolveOptions(30, "cbc"))
    assert found.status == FAILED
    assert "did not stand the check" in found.faults[0]
    assert found.plans[0].totals.cost >= optimum
    sound(small, found)


@pytest.mark.parametrize("name", SOLVERS)
def test_a_plan_that_the_clock_cut_short_is_not_called_proven(name, hard, capfd):
    found = solve(hard, SolveOptions(2.0, name))
    assert found.status == TIME_LIMIT
    assert 0 < found.bound < found.plans[0].totals.cost
    assert found.plans[0].gap == found.plans[0].totals.cost - found.bound
    assert not found.plans[0].proven
    sound(hard, found)
    assert capfd.readouterr().out == ""


def test_no_time_at_all_still_gives_a_plan(hard):
    found = solve(hard, SolveOptions(0.0, "cbc"))
    assert found.status == TIME_LIMIT
    assert found.plans
    sound(hard, found)


STOPPED = """
import os, signal, threading
from optimizer.board.check import examined
from optimizer.board.solution import SolveOptions
from optimizer.board.solve import solve
from tests.benchmarks.synthetic_boards import board

hard = board(1, 14, 200)
threading.Timer(2.5, os.kill, (os.getpid(), signal.SIGINT)).start()
found = solve(hard, SolveOptions(60, {name!r}, narrow={narrow}))
for plan in found.plans:
    examined(hard, plan.chosen, {{line.part: line.pieces for line in plan.lines}})
print(found.status, len(found.plans))
"""
"""In a process of its own: a signal that comes too late must not stop the tests."""


@pytest.mark.parametrize("narrow", [True, False])
@pytest.mark.parametrize("name", SOLVERS)
def test_an_interrupt_gives_what_is_known(name, narrow):
    words = [sys.executable, "-c", STOPPED.format(name=name, narrow=narrow)]
    done = subprocess.run(words, cwd=ROOT, capture_output=True, encoding="utf-8", check=True)
    status, plans = done.stdout.split()
    assert status == INTERRUPTED
    assert int(plans) or not narrow


def test_several_plans_are_filled_up_where_there_was_no_time_to_prove_them(hard):
    found = solve(hard, SolveOptions(2.0, "cbc", plans=3))
    assert len(found.plans) == 3
    assert not any(plan.proven for plan in found.plans[1:])
    costs = [plan.totals.cost for plan in found.plans]
    assert costs == sorted(costs)
    sound(hard, found)


def test_progress_says_stage_cost_and_bound(small):
    heard = []
    found = solve(small, SolveOptions(30, "cbc", progress=heard.append, narrow=True))
    assert {"plans", "bound"} <= {step.stage for step in heard}
    assert heard[-1].cost == found.plans[0].totals.cost
    assert all(step.bound is None or step.bound <= found.plans[0].totals.cost for step in heard)
    assert [step.seconds for step in heard] == sorted(step.seconds for step in heard)


def test_the_same_seed_gives_the_same_plans(small):
    first, second = (solve(small, SolveOptions(30, "cbc", 3, seed=5)) for _ in range(2))
    assert replace(first, seconds=0.0) == replace(second, seconds=0.0)


def test_a_channel_without_options_cannot_be_built(small):
    empty = replace(small.channels[0], options=())
    board = replace(small, channels=(empty, *small.channels[1:]))
    assert solve(board, SolveOptions(5, "cbc")).status == "infeasible"


def test_boards_that_do_not_hang_together_are_refused(small):
    bad = replace(small, boards=0, line_item=-1, channels=(replace(small.channels[0], count=0),))
    with pytest.raises(
        BoardError, match=r"0 boards to build; a negative cost.*; channel kind 0 has the count 0"
    ):
        solve(bad)


def test_the_check_finds_every_kind_of_fault():
    seed = next(s for s in range(99) if brute.ranked(tiny.board(s)) and tiny.board(s).budgets.stated() == {})
    board = tiny.board(seed)
    plan = solve(board, SolveOptions(30, "cbc")).plans[0]
    pieces = {line.part: line.pieces for line in plan.lines}
    opamp = next(part for part in pieces if board.parts[part].amplifiers)
    plain = next(part for part in pieces if not board.parts[part].amplifiers)
    assert examined(board, plan.chosen, pieces) == plan.totals
    for wrong in (
        pieces | {opamp: pieces[opamp] + 2},
        {part: n for part, n in pieces.items() if part != opamp},
        pieces | {plain: pieces[plain] + 1},
    ):
        with pytest.raises(UnsoundPlanError):
            examined(board, plan.chosen, wrong)
    with pytest.raises(UnsoundPlanError, match="is built 0 times"):
        examined(board, ((), *plan.chosen[1:]), pieces)
    for name in ("cost", "current", "area", "line_items", "opamp_parts"):
        tight = replace(board, budgets=replace(board.budgets, **{name: 0.9 * getattr(plan.totals, name)}))
        with pytest.raises(UnsoundPlanError, match=f"the {name} of"):
            examined(tight, plan.chosen, pieces)
