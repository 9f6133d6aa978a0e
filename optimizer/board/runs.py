"""One run of a solver: what it is given and what it gave."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

GAP = 0.99
"""The absolute gap [cents] at which a solver stops: plans cost whole cents, so nothing lies between."""
GRACE = 5.0
"""Seconds that a solver may take to stop after its time."""
POLL = 0.02

OPTIMAL, INFEASIBLE, STOPPED, INTERRUPTED, FAILED = (
    "optimal",
    "infeasible",
    "stopped",
    "interrupted",
    "failed",
)


@dataclass(frozen=True, slots=True)
class Task:
    """A PuLP problem, seconds for it, values to start from by name, and whom to tell (best, bound).

    `below`: only plans that cost less than this are of interest; without one the run may end infeasible.
    """

    problem: Any
    seconds: float
    start: Mapping[str, float] | None = None
    told: Callable[[float | None, float | None], None] | None = None
    below: float | None = None


@dataclass(frozen=True, slots=True)
class Run:
    """How a run ended, the best values by variable name (None: no plan), and the solver's own bound."""

    outcome: str
    values: Mapping[str, float] | None = None
    bound: float | None = None
    fault: str = ""
    seconds: float = field(default=0.0)
