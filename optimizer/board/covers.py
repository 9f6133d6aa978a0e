"""The smallest set that meets every one of some sets (set cover, seen from its other side), in PuLP."""

from __future__ import annotations

from collections.abc import Collection, Hashable, Mapping, Sequence
from typing import Any, TypeVar

from optimizer.board import runs, solvers

T = TypeVar("T", bound=Hashable)


def smallest_hitting(
    sets: Sequence[Collection[T]], weights: Mapping[T, float], solver: str, seconds: float
) -> frozenset[T] | None:
    """Elements of least total weight of which every set holds one; None where that could not be proved.

    Of equal ones any. An empty set among `sets` cannot be met, and gives None.
    """
    if not sets:
        return frozenset()
    if not all(sets):
        return None
    problem, taken = _problem(sets, weights)
    run = solvers.run(solver, runs.Task(problem, seconds))
    if run.outcome != runs.OPTIMAL or run.values is None:
        return None
    return frozenset(key for key, x in taken.items() if run.values[x.name] > 0.5)


def _problem(sets: Sequence[Collection[T]], weights: Mapping[T, float]) -> tuple[Any, dict[T, Any]]:
    from pulp import LpMinimize, LpProblem, lpSum

    problem = LpProblem("cover", LpMinimize)
    elements = {key: None for keys in sets for key in keys}
    taken = {key: problem.add_variable(f"take_{k}", 0, 1, "Binary") for k, key in enumerate(elements)}
    for k, keys in enumerate(sets):
        problem.addConstraint(lpSum(taken[key] for key in set(keys)) >= 1, f"meet_{k}")
    problem.setObjective(lpSum(weights[key] * x for key, x in taken.items()))
    return problem, taken
