"""Rows that bring the bound of `bound` into the model: what each supply is paid covers what it costs.

At any prices a supply's cost is at least its takings and its least loss. At the best prices these rows, one
for each supply, make the linear relaxation of the model as good as the Lagrangian bound, so that a solver
begins where that ends: its own cuts and branches come on top. (Lagrangian duality; Geoffrion, Lagrangean
relaxation for integer programming, Mathematical Programming Study 2 (1974).)
"""

from __future__ import annotations

from collections import defaultdict
from typing import Any

from optimizer.board.bound import Key, Terms, least_losses
from optimizer.board.model import Model
from optimizer.board.supplies import Weights, budget_dues, reference_uses, taken, used_references

DIGITS = 2
"""Of the prices in the rows: rounded first, so that the losses are those of the rows as they stand."""
SLACK = 0.01
"""Cents by which a row is eased, for rounding in the sums."""


def tighten(model: Model, terms: Terms) -> None:
    """Add the rows of some prices to the model of the board that they are for."""
    prices, keys = terms.prices.round(DIGITS), terms.seen.keys
    takings: dict[int, list[Any]] = defaultdict(list)
    for key, sold in _sold(model).items():
        takings[key[2]] += [float(prices[keys[key]]) * number for number in sold]
    for supply, loss in least_losses(terms.seen, prices).items():
        row = _cost(model, supply, terms.weights) >= _sum(takings[supply]) + (loss - SLACK)
        model.problem.addConstraint(row, f"covers_{supply}")


def _sold(model: Model) -> dict[Key, list[Any]]:
    """What each supply sells to whom, by the key of its price."""
    sold: dict[Key, list[Any]] = defaultdict(list)
    for (i, j), x in model.x.items():
        for supply in taken(model.board, model.board.channels[i].options[j]):
            sold[0, i, supply].append(x)
    for reference in used_references(model.board):
        for supply, count in reference_uses(model.board, reference):
            sold[2, reference, supply].append(count * model.v[reference])
    return sold


def _cost(model: Model, supply: int, weights: Weights) -> Any:
    """What a supply costs, with what it uses of the budgets that have prices."""
    parts = len(model.board.parts)
    packages = [supply] if supply < parts else model.board.families[supply - parts].packages
    return _sum(_weighted(model, part, weights) for part in packages)


def _weighted(model: Model, part: int, weights: Weights) -> Any:
    each, opens = budget_dues(model.board.parts[part], weights)
    return weights.cost * model.cost[part] + each * model.number[part] + opens * model.z[part]


def _sum(terms: Any) -> Any:
    from pulp import lpSum

    return lpSum(list(terms))
