"""Why there is no plan: the smallest set of limits and channels in conflict, and what would help."""

from __future__ import annotations

from optimizer.board.conflicts import conflict, relaxations
from optimizer.board.prices import CENTS
from optimizer.board.solution import SolveOptions
from optimizer.planning.columns import Assembled, Field
from optimizer.planning.kinds import names_of
from optimizer.planning.plan import Refusal, Relaxation

NAMES = {"current": "supply_current"}
SHARE = 0.5
"""The share of the time that the conflict takes; the relaxations have the rest."""


def refusal(field: Field, made: Assembled, seconds: float, *, told: bool) -> Refusal:
    """The limits and channels of `made` that cannot be met together, looked into for `seconds`.

    What is proved of it holds over the pools behind `made`; it is said only if that is `told` with it.
    """
    solver = field.outline.solve.solver
    options = SolveOptions(time=seconds * SHARE, solver=solver)
    found = conflict(made.board, options)
    eased = relaxations(made.board, SolveOptions(time=seconds * (1.0 - SHARE), solver=solver))
    return Refusal(
        limits=() if found is None else tuple(NAMES.get(name, name) for name in found.budgets),
        channels=() if found is None else tuple(names_of([field.kinds[i] for i in found.channels])),
        smallest=found is not None and found.smallest and told,
        relaxations=tuple(
            Relaxation(
                name=NAMES.get(one.budget, one.budget),
                limit=_shown(field, one.budget, one.limit),
                least=None if one.least is None else _shown(field, one.budget, one.least),
                proven=one.proven and told,
            )
            for one in eased
        ),
    )


def _shown(field: Field, budget: str, value: float) -> float:
    """A budget as the board file states it: money a board."""
    return value / CENTS / field.outline.quantity if budget == "cost" else float(value)
