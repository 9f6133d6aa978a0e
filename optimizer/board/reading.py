"""A solver's values read off as a plan of the original board, and checked."""

from __future__ import annotations

from collections.abc import Mapping

from optimizer.board.check import UnsoundPlanError, examined
from optimizer.board.heuristic import Met
from optimizer.board.model import Model
from optimizer.board.pools import Pools


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
