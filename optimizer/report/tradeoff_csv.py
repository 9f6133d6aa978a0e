"""What targets cost as CSV text, in SI units."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from optimizer.record.rows import CHOICE, flat
from optimizer.report.csv_file import table_text
from optimizer.report.stepped import as_row
from optimizer.search.result import Candidate
from optimizer.search.weigh.front import Front
from optimizer.search.weigh.tradeoff import Tradeoff

CHOSEN = tuple(name for name in CHOICE if name != "rank")
STEPS = ("target", "step", "limit", "cost", "margin", "limiting", "changes", *CHOSEN)
POINTS = ("target", "value", "cost", *CHOSEN)


def tradeoff_csv(found: Tradeoff) -> str:
    """A row a step: a margin, empty where the target is dropped; cells are empty where nothing meets."""
    return table_text(STEPS, ([step.get(name) for name in STEPS] for step in _steps(found)))


def front_csv(front: Front) -> str:
    """A row a point, the cheapest first."""
    points = (
        {"target": front.target, "value": p.value, "cost": p.cost, **_chosen(p.candidate)}
        for p in front.points
    )
    return table_text(POINTS, ([point[name] for name in POINTS] for point in points))


def _steps(found: Tradeoff) -> Iterator[dict[str, Any]]:
    for row in found.rows:
        for step in row.steps:
            out: dict[str, Any] = {"target": row.target, "step": step.step, "limit": step.limit}
            if step.candidate is not None:
                own: dict[str, Any] = {
                    "cost": step.candidate.figures["cost"],
                    "margin": step.candidate.margin,
                }
                own |= {"limiting": step.candidate.limiting, "changes": "; ".join(step.changes)}
                out |= own | _chosen(step.candidate)
            yield out


def _chosen(candidate: Candidate) -> dict[str, Any]:
    row = flat(as_row(candidate))
    return {name: row[name] for name in CHOSEN}
