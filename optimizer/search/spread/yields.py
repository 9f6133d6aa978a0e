"""The yields of the candidates that a search found, and what they change in its order."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from optimizer.catalog.parts import Catalogs
from optimizer.search.result import Candidate
from optimizer.search.space import Choice, Space
from optimizer.search.spread.montecarlo import monte_carlo


def drawn(
    space: Space, catalogs: Catalogs, choice: Choice, candidates: Sequence[Candidate]
) -> tuple[Candidate, ...]:
    """`candidates`, those of `choice` in its order, with their draws, in the order that the yield asks for.

    As they are where the request states no [tolerance].
    """
    tolerance = space.request.tolerance
    if not tolerance.stated:
        return tuple(candidates)
    simulated = monte_carlo(space, catalogs, choice)
    rows = [replace(row, simulated=found) for row, found in zip(candidates, simulated, strict=True)]
    return ordered(rows, tolerance.yield_)


def ordered(candidates: Sequence[Candidate], wanted: float | None) -> tuple[Candidate, ...]:
    """`candidates` with those that do not reach the yield `wanted` moved behind the others."""
    if wanted is None:
        return tuple(candidates)
    return tuple(sorted(candidates, key=lambda row: not _reaches(row, wanted)))


def _reaches(candidate: Candidate, wanted: float) -> bool:
    return candidate.simulated is not None and candidate.simulated.reaches(wanted)
