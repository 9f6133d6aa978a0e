"""What is asked of the board's solver and what it answers: plans, bounds, and how far they are proved."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from optimizer.board.pools import Chosen
from optimizer.board.prices import Purchase

PROVEN, TIME_LIMIT, INTERRUPTED, FAILED, INFEASIBLE = (
    "proven",
    "time limit",
    "interrupted",
    "failed",
    "infeasible",
)


@dataclass(frozen=True, slots=True)
class Totals:
    """What a plan uses of each budget: cents a build, A, m2 (None: an area is unknown), counts a board.

    `spare` holds the amplifiers a board that no channel or buffer uses, by family (those without left out).
    """

    cost: int
    current: float
    area: float | None
    line_items: int
    opamp_parts: int
    placements: int
    spare: tuple[tuple[int, int], ...]


@dataclass(frozen=True, slots=True)
class Line:
    """One part of a plan: pieces a board, and what is bought for the build."""

    part: int
    pieces: int
    purchase: Purchase


@dataclass(frozen=True, slots=True)
class Plan:
    """A whole board: for each channel the options of its copies, and the parts to buy, in part order.

    `bound`: no plan (of those with other active parts than the plans before) costs less [cents];
    `proven`: none does cost less than this one.
    """

    chosen: Chosen
    lines: tuple[Line, ...]
    references: tuple[int, ...]
    totals: Totals
    bound: int
    proven: bool

    @property
    def gap(self) -> int:
        """How much less a plan might cost [cents]."""
        return max(0, self.totals.cost - self.bound)


@dataclass(frozen=True, slots=True)
class Progress:
    """Where the work stands: the stage in words, the best cost and the bound so far [cents], seconds."""

    stage: str
    cost: int | None
    bound: int | None
    seconds: float


@dataclass(frozen=True, slots=True)
class SolveOptions:
    """How to solve: seconds for all, 'auto', 'cbc' or 'highs', ranked plans wanted, whom to tell.

    `narrow`: whether options that no better plan can use are proved away first (they need not be).
    `enough`: stop at the first plans met, however dear.
    """

    time: float = 60.0
    solver: str = "auto"
    plans: int = 1
    progress: Callable[[Progress], None] | None = None
    narrow: bool = True
    seed: int = 1
    enough: bool = False


@dataclass(frozen=True, slots=True)
class Solution:
    """What came of it. `status` is that of the first plan; `complete`: there are no more different plans.

    `solver` says which solver was used, `faults` what went wrong with it, in words; `interrupted`: the user
    stopped it, perhaps after the first plan was proven.
    """

    status: str
    plans: tuple[Plan, ...]
    bound: int | None
    solver: str
    complete: bool = False
    faults: tuple[str, ...] = ()
    seconds: float = 0.0
    options: int = 0
    considered: int = 0
    interrupted: bool = False

    @property
    def best(self) -> Plan | None:
        """The first plan."""
        return self.plans[0] if self.plans else None
