"""What was found out about a part (or two) against a request: plain frozen records, no words."""

from __future__ import annotations

from dataclasses import dataclass

from optimizer.search.inquiry.best import Best
from optimizer.search.inquiry.eligibility import FAILED, Check
from optimizer.search.inquiry.lookup import Part
from optimizer.search.result import SOURCES, Candidate

CORNERS = "corners"
"""What stops parts that are eligible at nominal values, at every corner of the spreads in no setting."""


@dataclass(frozen=True, slots=True)
class Subject:
    """One part that was asked about, its checks, and those among them that were set aside to look further.

    `stopped` is the check by which it has no setting at all, those set aside left out; None where it has.
    """

    part: Part
    checks: tuple[Check, ...]
    waived: tuple[str, ...]
    stopped: str | None

    @property
    def eligible(self) -> bool:
        """Whether it passes its own checks, as the request stands, in some wiring and reference."""
        return self.stopped is None and not self.waived


@dataclass(frozen=True, slots=True)
class Wired:
    """Which references of one wiring pass the checks of each part: ground (None: not a choice), and how

    many of the divider's `levels`, from `low` to `high` [V].
    """

    wiring: str
    ground: bool | None
    levels: int
    passing: int
    low: float | None
    high: float | None


@dataclass(frozen=True, slots=True)
class Reach:
    """What is reached of one target: the best alone, the best with all others met, and `value` and `margin`

    of the setting of largest margin (of its worst corner where corners are graded).
    """

    name: str
    limit: float
    alone: Best
    together: Best
    value: float | None
    margin: float


@dataclass(frozen=True, slots=True)
class Place:
    """Where the best setting stands in the request's own shortlist.

    `rank` is None below the `rows` that are shown; `listed` says whether it is that very row. `first` is
    row 1, None where nothing meets.
    """

    rank: int | None
    rows: int
    listed: bool
    first: Candidate | None


@dataclass(frozen=True, slots=True)
class Finding:
    """Everything that was found out.

    `impossible` says why no part could meet the request (nothing else is then looked at). `pairs` are
    those that were tried, `eligible` those with an eligible setting; `settings` the checks that depend on
    the setting, with the numbers of the setting of largest margin, or where none is eligible of the one
    that comes nearest. `largest` is the setting of largest margin, `best` the best by the request's own
    ranking where one meets, whether or not checks were waived.
    """

    subjects: tuple[Subject, ...]
    impossible: tuple[str, ...] = ()
    wired: tuple[Wired, ...] = ()
    pairs: int = 0
    eligible: int = 0
    settings: tuple[Check, ...] = ()
    reaches: tuple[Reach, ...] = ()
    largest: Candidate | None = None
    best: Candidate | None = None
    place: Place | None = None

    @property
    def admitted(self) -> bool:
        """Whether every part passes its own checks without any being set aside."""
        return all(subject.eligible for subject in self.subjects)

    @property
    def meets(self) -> bool:
        """Whether the parts meet the request in some setting."""
        return self.best is not None and self.admitted

    @property
    def stopped_by(self) -> str | None:
        """The check or target that stops the parts, those set aside left out; None where nothing does."""
        if self.best is not None or self.impossible:
            return None
        own = next((s.stopped for s in self.subjects if s.stopped is not None), None)
        failed = next((check.key for check in self.settings if check.verdict == FAILED), None)
        if self.largest is None:
            return own or failed or (CORNERS if self.eligible else None)
        return self.largest.limiting if self.largest.margin < 0.0 else SOURCES
