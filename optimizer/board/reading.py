"""A solver's values read off as a plan of the original board, checked, and told with its purchases."""

from __future__ import annotations

from collections.abc import Mapping

from optimizer.board.check import UnsoundPlanError, examined
from optimizer.board.heuristic import Met
from optimizer.board.model import Model
from optimizer.board.pools import Pools
from optimizer.board.prices import purchase
from optimizer.board.problem import Board
from optimizer.board.solution import Line, Plan


def read(model: Model, pools: Pools, values: Mapping[str, float]) -> Met:
    """The plan that `values` stand for; raises UnsoundPlanError where it does not stand the check.

    The check prices it anew; what the model itself makes of the rounded values must be the same.
    """
    for variable in model.problem.variables():
        variable.varValue = float(round(values.get(variable.name, 0.0)))
    small: list[list[int]] = [[] for _ in model.board.channels]
    for (i, j), x in model.x.items():
        small[i] += [j] * int(x.varValue)
    chosen = pools.whole(tuple(map(tuple, small)))
    number = {part: round(bought.value() or 0) for part, bought in model.number.items()}
    pieces = {part: n for part, n in sorted(number.items()) if n}
    totals = examined(pools.original, chosen, pieces)
    cost = round(model.use["cost"].value())
    if cost != totals.cost:
        raise UnsoundPlanError(f"the model says {cost} cents, the check {totals.cost}")
    return Met(cost, chosen, tuple(pieces.items()))


def plan_of(board: Board, met: Met, least: int) -> Plan:
    """A plan that was met, checked anew; no plan costs less than `least` [cents]."""
    totals = examined(board, met.chosen, dict(met.pieces))
    least = min(least, totals.cost)
    options = [board.channels[i].options[j] for i, js in enumerate(met.chosen) for j in js]
    references = {option.reference for option in options if option.reference is not None}
    return Plan(
        chosen=met.chosen,
        lines=tuple(_line(board, part, n) for part, n in met.pieces),
        references=tuple(sorted(references)),
        totals=totals,
        bound=least,
        proven=least == totals.cost,
    )


def _line(board: Board, part: int, pieces: int) -> Line:
    entry = board.parts[part]
    bought = purchase(entry.breaks, board.boards, pieces, entry.stock)
    assert bought is not None  # the check has priced it
    return Line(part, pieces, bought)
