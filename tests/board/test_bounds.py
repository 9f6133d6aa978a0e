"""Bound, useful options and sweep never drop a plan within the target: held to brute force."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import combinations_with_replacement, product

import numpy as np
import pytest

from optimizer.board import bound, runs, solvers, supplies, sweep
from optimizer.board.model import Model, build
from optimizer.board.pools import with_options
from optimizer.board.problem import Board
from optimizer.board.supplies import PLAIN, Weights
from optimizer.board.tighten import tighten
from tests.board import brute, tiny

PACE = bound.Pace(200, 10, 0.7)
SEEDS = range(60)


def choices(board: Board):
    """Every choice of options, by place, with the least cost of the plans that have it."""
    each = [list(combinations_with_replacement(range(len(c.options)), c.count)) for c in board.channels]
    for chosen in product(*each):
        options = [board.channels[i].options[j] for i, js in enumerate(chosen) for j in js]
        costs = [t.cost for t in brute.bought(board, options) if brute.keeps(board, t)]
        if costs:
            yield chosen, min(costs)


def priced(board: Board, draw: np.random.Generator) -> Weights:
    """Prices on the budgets that the board states."""
    some = draw.random(4) * [2e5, 2e7, 50.0, 200.0]
    stated = board.budgets.stated()
    names = ("current", "area", "line_items", "opamp_parts")
    return Weights(1.0, *(float(p) if n in stated else 0.0 for n, p in zip(names, some, strict=True)))


@pytest.mark.independent
@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("weighted", [False, True])
def test_no_plan_within_the_target_is_dropped(seed, weighted):
    board = tiny.board(seed)
    plans = dict(choices(board))
    draw = np.random.default_rng(seed)
    weights = priced(board, draw) if weighted else PLAIN
    seen = bound.layout(board, weights)
    for target in {min(plans.values(), default=1000), max(plans.values(), default=1000), 5000}:
        best = bound.climb(seen, float(target), PACE)
        wild = best.prices * draw.uniform(0.5, 1.5, best.prices.size)
        assert best.value <= min(plans.values(), default=np.inf) + 1e-6
        for prices in (best.prices, wild):
            answer = bound.ask(seen, prices)
            kept = bound.useful(seen, bound.Bound(answer.bound, prices, answer), target + 0.01)
            swept = sweep.sweep(board, bound.Terms(seen, prices, weights), target + 0.01)
            for chosen, cost in plans.items():
                if cost <= target:
                    for i, js in enumerate(chosen):
                        assert set(js) <= set(kept[i])
                        assert set(js) <= set(swept.options[i])


@pytest.mark.parametrize("seed", SEEDS)
def test_the_slope_is_that_of_the_bound(seed):
    """A concave function of the prices: below its tangents everywhere, and on them close by."""
    board = tiny.board(seed)
    draw = np.random.default_rng(seed)
    seen = bound.layout(board, priced(board, draw))
    first = bound.first_prices(seen)
    here = first * draw.uniform(0.5, 1.5, first.size)
    answer = bound.ask(seen, here)
    far = first * draw.uniform(0.0, 3.0, first.size)
    near = here * (1 + 1e-7 * draw.uniform(-1, 1, first.size))
    assert bound.ask(seen, far).bound <= answer.bound + answer.slope @ (far - here) + 1e-6
    change = answer.slope @ (near - here)
    assert bound.ask(seen, near).bound - answer.bound == pytest.approx(change, abs=1e-7)


@pytest.mark.parametrize("seed", SEEDS)
def test_a_sweep_begins_at_the_bound(seed):
    board = tiny.board(seed)
    for prices in terms(board, seed):
        begun = sweep._Sweep(board, prices, 0.0)
        losses = sum(float(thing.losses[0, 0]) for thing in begun.things)
        at_bound = losses + begun._ahead(0) - prices.seen.allowance
        assert at_bound == pytest.approx(bound.ask(prices.seen, prices.prices).bound, abs=1e-6)


@pytest.mark.parametrize("seed", SEEDS)
def test_a_sweep_to_the_end_leaves_little(seed):
    """With every channel decided the bound of a partial plan is its cost, idle references aside."""
    board = tiny.board(seed)
    plans = dict(choices(board))
    if not plans or board.budgets.stated():
        return
    target = min(plans.values())
    seen = bound.layout(board)
    best = bound.climb(seen, float(target), PACE)
    swept = sweep.sweep(board, bound.Terms(seen, best.prices), target + 0.01)
    assert swept.complete
    if not board.references:
        needed = [
            {j for chosen, cost in plans.items() if cost <= target for j in chosen[i]}
            for i in range(len(board.channels))
        ]
        assert [set(options) for options in swept.options] == needed


def terms(board: Board, seed: int) -> tuple[bound.Terms, bound.Terms]:
    """A board's best prices, budgets with prices too, and wild ones."""
    draw = np.random.default_rng(seed)
    weights = priced(board, draw)
    seen = bound.layout(board, weights)
    best = bound.climb(seen, 5000.0, PACE).prices
    wild = best * draw.uniform(0.5, 1.5, best.size)
    return bound.Terms(seen, best, weights), bound.Terms(seen, wild, weights)


@pytest.mark.independent
@pytest.mark.parametrize("seed", SEEDS)
def test_rows_of_any_prices_leave_the_best_plan(seed):
    board = tiny.board(seed)
    ranked = brute.ranked(board)
    for prices in terms(board, seed):
        model = build(board)
        tighten(model, prices)
        run = solvers.run("cbc", runs.Task(model.problem, 20.0))
        assert (run.outcome == runs.OPTIMAL) == bool(ranked)
        if ranked:
            assert worth(model, run.values) == pytest.approx(ranked[0][0], abs=1e-6)


def worth(model: Model, values: Mapping[str, float]) -> float:
    """The objective at a solver's values."""
    return sum(c * values[variable.name] for variable, c in model.problem.objective.items())


@pytest.mark.parametrize("seed", SEEDS)
def test_rows_lift_the_relaxation_to_the_bound(seed):
    """What solvers begin from is no less than the Lagrangian bound, budgets with prices or not."""
    board = tiny.board(seed)
    shared = [[j for j, o in enumerate(c.options) if o.reference is not None] for c in board.channels]
    board = with_options(board, [keep or [0] for keep in shared])
    for prices in terms(board, seed):
        model = build(board)
        tighten(model, prices)
        for variable in model.problem.variables():
            variable.cat = "Continuous"
        run = solvers.run("cbc", runs.Task(model.problem, 20.0))
        if run.values is not None:
            assert worth(model, run.values) >= bound.ask(prices.seen, prices.prices).bound - 1.0


def test_tables_hold_the_least_cost_of_every_number():
    for seed in SEEDS:
        board = tiny.board(seed)
        costs = supplies.tables(board)
        for part, entry in enumerate(board.parts):
            for number in range(1, costs.shape[1]):
                if np.isfinite(costs[part, number]):
                    paid = brute.paid(entry.breaks, entry.stock, number * board.boards)
                    assert costs[part, number] == paid + board.line_item + number * board.placement
