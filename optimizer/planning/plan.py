"""What planning a board returns: plain frozen records by name, in SI and in the catalogs' currency."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from optimizer.search.result import Candidate

OPTIMAL, WITHIN, INTERRUPTED, INFEASIBLE, NOTHING = (
    "proven",
    "time limit",
    "interrupted",
    "infeasible",
    "none found",
)
"""How a run ended: the first plan is proven the cheapest; the time ended first; the user stopped it; it is

proven that there is no plan; none was found, which proves nothing."""

CATALOGS, POOLS, UNPROVEN = "catalogs", "pools", "none"
"""Over what a plan is proven to be the cheapest (of those with other active parts than the plans before it):

everything that the requests admit; the pools; nothing."""

ROLES = ("photodiode", "opamp", "resistor", "capacitor")
TOTALS = ("cost", "supply_current", "area", "line_items", "opamp_parts", "packages", "placements")


@dataclass(frozen=True, slots=True)
class Place:
    """Where an amplifier serves: copy `copy` (from 1) of a channel, or the buffer of a shared level.

    `channel` is None for a buffer; `level` then names the level.
    """

    channel: str | None
    copy: int
    level: str | None = None


@dataclass(frozen=True, slots=True)
class Package:
    """One op-amp package on a board: its part, how many amplifiers it holds, and what they serve."""

    opamp: str
    maker: str
    amplifiers: int
    places: tuple[Place, ...]

    @property
    def spare(self) -> int:
        """Amplifiers that serve nothing."""
        return self.amplifiers - len(self.places)


@dataclass(frozen=True, slots=True)
class Level:
    """A reference level on the board that channels may share: a buffered divider, by a name of its own.

    Each of its resistors, its bypass capacitor and its buffer is there once.
    """

    name: str
    voltage: float
    top: float
    bottom: float
    bypass: float
    resistor_family: str
    capacitor_family: str
    opamp: str
    channels: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Build:
    """How one or more copies of a channel are built: the candidate, graded as a receiver by itself.

    The candidate's op-amp is the smallest package of its family, as its shortlist would buy it; `opamp`
    and `opamp_maker` name the package on the board that serves these copies (the same amplifier, perhaps
    two or four of them). `copies` are numbered from 1; `level` names the shared level that they use, None
    where there is none or a divider of their own.
    """

    channel: str
    copies: tuple[int, ...]
    candidate: Candidate
    level: str | None = None
    opamp: str = ""
    opamp_maker: str = ""


@dataclass(frozen=True, slots=True)
class LineItem:
    """One part number of the bill of materials.

    `role` is one of ROLES; `value` in ohm or F for passives. `pieces` a board, `buy` for the build (more
    than the need where buying up to a price break is cheaper), at `unit_price`, `cost` a build.
    `area` [m2] a piece, None where unknown.
    """

    role: str
    part: str
    maker: str
    value: float | None
    package: str | None
    pieces: int
    buy: int
    unit_price: float
    cost: float
    area: float | None


@dataclass(frozen=True, slots=True)
class Total:
    """What a plan uses of one of TOTALS a board (None: unknown), and the limit on it, if any."""

    name: str
    value: float | None
    limit: float | None

    @property
    def margin(self) -> float | None:
        """What is left of the limit, as a share of it; None without a limit, 0 at a limit of nothing."""
        if self.limit is None or self.value is None:
            return None
        return 1.0 - self.value / self.limit if self.limit else 0.0


@dataclass(frozen=True, slots=True)
class BoardPlan:
    """One whole board. Money is a board unless said otherwise; `cost` and `bound` are in cents a build.

    `cost` holds parts, line items and placements; no plan (of those with other active parts than the
    plans before) costs less than `bound`, over what `proven` says.
    """

    rank: int
    builds: tuple[Build, ...]
    packages: tuple[Package, ...]
    levels: tuple[Level, ...]
    bill: tuple[LineItem, ...]
    totals: tuple[Total, ...]
    limiting: str | None
    cost: int
    bound: int
    proven: str

    def total(self, name: str) -> Total:
        """The total of that name."""
        return next(total for total in self.totals if total.name == name)

    @property
    def spare(self) -> int:
        """Amplifiers of the board that serve nothing."""
        return sum(package.spare for package in self.packages)


@dataclass(frozen=True, slots=True)
class Pool:
    """What was looked at for one channel.

    `combinations` are declared by its request; `pairs` of photodiode and op-amp (packages of one family
    counted once) are eligible; `kept` candidates went to the solver. `complete`: every candidate that a
    plan cheaper than the first could use is among them; else `left_out` counts, at most, the settings
    within reach of such a plan that were cut (None: not known).
    """

    channel: str
    combinations: int
    pairs: int
    kept: int
    complete: bool
    left_out: int | None = 0


@dataclass(frozen=True, slots=True)
class Hopeless:
    """A channel that nothing meets by itself: its nearest misses and what stops them, as in a shortlist."""

    channel: str
    request: str
    impossible: tuple[str, ...]
    blocking: tuple[str, ...]
    near_misses: tuple[Candidate, ...]
    dropped: Mapping[str, int]


@dataclass(frozen=True, slots=True)
class Relaxation:
    """The least value of one limit with which all others can be kept; None: none was found.

    `name` is a key of [limits] or [rules]; `proven`: it is the least there is.
    """

    name: str
    limit: float
    least: float | None
    proven: bool


@dataclass(frozen=True, slots=True)
class Refusal:
    """Why there is no plan: channels that nothing meets, else limits and channels in conflict.

    `smallest`: proved that no fewer are in conflict. The relaxations stand in the order of the limits.
    """

    hopeless: tuple[Hopeless, ...] = ()
    limits: tuple[str, ...] = ()
    channels: tuple[str, ...] = ()
    smallest: bool = False
    relaxations: tuple[Relaxation, ...] = ()


@dataclass(frozen=True, slots=True)
class Alone:
    """What it comes to if each channel takes its own shortlist's first choice, priced as a board.

    Packages, line items and levels are not shared between channels; part numbers are.
    """

    cost: int
    line_items: int
    packages: int
    over: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Planned:
    """What came of it. `status` is that of the first plan; `solver` the one used; `seconds` all in all.

    `only`: there are no more plans with other active parts than these. `faults`: what went wrong with a
    solver, in words. `rounds`: how often candidates were priced in. `floor`: no plan at all, over everything
    that the requests admit, costs less [cents a build].
    """

    status: str
    plans: tuple[BoardPlan, ...]
    pools: tuple[Pool, ...]
    solver: str
    seconds: float
    rounds: int = 0
    floor: int | None = None
    only: bool = False
    faults: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    refusal: Refusal | None = None
    alone: Alone | None = None


@dataclass(frozen=True, slots=True)
class Stage:
    """How far planning is: what it does, the best cost and the bound so far [cents a build], seconds."""

    doing: str
    cost: int | None
    bound: int | None
    seconds: float
