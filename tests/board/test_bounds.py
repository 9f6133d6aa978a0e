"""Bound, useful options and sweep never drop a plan within the target: held to brute force."""

from __future__ import annotations

from itertools import combinations_with_replacement, product

import numpy as np
import pytest

from optimizer.board import bound, supplies, sweep
from optimizer.board.problem import Board
from optimizer.board.supplies import PLAIN, Weights
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
            swept = sweep.sweep(board, sweep.Terms(seen, prices, weights), target + 0.01)
            for chosen, cost in plans.items():
                if cost <= target:
                    for i, js in enumerate(chosen):
                        assert set(js) <= set(kept[i])
                        assert set(js) <= set(swept.options[i])


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
    swept = sweep.sweep(board, sweep.Terms(seen, best.prices), target + 0.01)
    assert swept.complete
    if not board.references:
        needed = [
            {j for chosen, cost in plans.items() if cost <= target for j in chosen[i]}
            for i in range(len(board.channels))
        ]
        assert [set(options) for options in swept.options] == needed


def test_tables_hold_the_least_cost_of_every_number():
    for seed in SEEDS:
        board = tiny.board(seed)
        costs = supplies.tables(board)
        for part, entry in enumerate(board.parts):
            for number in range(1, costs.shape[1]):
                if np.isfinite(costs[part, number]):
                    paid = brute.paid(entry.breaks, entry.stock, number * board.boards)
                    assert costs[part, number] == paid + board.line_item + number * board.placement
