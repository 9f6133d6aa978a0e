"""A board as its file states it: channels with their requests, limits, costs, rules and how to solve."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from optimizer.catalog.parts import Source
    from optimizer.study import Study

SOLVERS = ("auto", "cbc", "highs")


@dataclass(frozen=True, slots=True)
class Wanted:
    """One kind of channel: its name, its request's path as written, how many alike, and the study.

    The study's request has the board's quantity.
    """

    name: str
    request: str
    count: int
    study: Study


@dataclass(frozen=True, slots=True)
class Limits:
    """Limits on the whole board, None where there is none: money a board, A, m2, part numbers."""

    cost: float | None = None
    supply_current: float | None = None
    area: float | None = None
    line_items: int | None = None


@dataclass(frozen=True, slots=True)
class Costs:
    """Money a build for each part number, and for each placed part of each board."""

    line_item: float = 0.0
    placement: float = 0.0


@dataclass(frozen=True, slots=True)
class Rules:
    """From how many makers each op-amp position must be had; op-amp part numbers at most (0: no limit)."""

    opamp_sources: int = 1
    opamp_parts: int = 0


@dataclass(frozen=True, slots=True)
class Solve:
    """Ranked plans wanted, seconds for all of the work, and 'auto', 'cbc' or 'highs'."""

    plans: int = 5
    time: float = 60.0
    solver: str = "auto"


@dataclass(frozen=True, slots=True)
class Outline:
    """One board file, whole: every key with the value in force, and the studies of its channels.

    `currency` is that of the catalogs, or "catalog currency".
    """

    name: str
    path: Path
    source: Source
    channels: tuple[Wanted, ...]
    quantity: int = 1
    currency: str = "catalog currency"
    limits: Limits = Limits()
    costs: Costs = Costs()
    rules: Rules = Rules()
    solve: Solve = Solve()
