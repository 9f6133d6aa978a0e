"""What each target costs: the cheapest receiver with one limit moved or dropped, for every target and step.

Each is what a shortlist by cost would show first under the limits so changed; only the limit moves (see
`steps`), the bench stays as stated: slew keeps the stated bandwidth and the strongest light.

The work is shared. Every setting that is evaluated is offered to all questions, so most start with
their answer and only have to prove it. What a looser question could not beat in cost, a tighter one
cannot either; and where the best setting of a looser question ranks the same under tighter limits, it is
the best there too, for everything else only ranks lower.
"""

from __future__ import annotations

import time
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import assemble, impossible
from optimizer.search.crew import REPORT_EVERY
from optimizer.search.result import Candidate, Progress, TargetValue
from optimizer.search.shortlist import Report
from optimizer.search.space import Choice, Space
from optimizer.search.weigh import many, steps
from optimizer.search.weigh.conflicts import Conflicts, conflicts
from optimizer.search.weigh.ground import NOTHING_GRADED, Ground, lay_out
from optimizer.search.weigh.questions import COST, Questions, choice_of, offer
from optimizer.search.weigh.screen import Screen
from optimizer.search.weigh.valued import valued

POSITIONS = (
    "photodiode",
    "opamp",
    "wiring",
    "reference",
    "feedback_resistance",
    "feedback_capacitance",
    "low_pass",
)
"""What of a receiver may change, in the order in which it is named."""


@dataclass(frozen=True, slots=True)
class Step:
    """One limit moved by `step` (margin against the stated limit; None: dropped) to `limit`.

    `candidate` is the cheapest under the limits so changed, its margins against those; None where nothing
    meets them. `changes` are the positions in which it differs from the best of the request as it stands.
    """

    step: float | None
    limit: float | None
    candidate: Candidate | None
    changes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Row:
    """All steps of one target, the loosest first."""

    target: str
    limit: float
    steps: tuple[Step, ...]


@dataclass(frozen=True, slots=True)
class Tradeoff:
    """What each target costs. `base` is the cheapest receiver of the request as it stands, if any meets it;

    else `conflicts` say why nothing does. `impossible` is what no part could meet. `questions` is how many
    sets of limits were decided, `evaluated` how many settings for all of them.
    """

    base: Candidate | None
    rows: tuple[Row, ...]
    conflicts: Conflicts | None
    impossible: tuple[str, ...]
    combinations: int
    questions: int
    evaluated: int
    seconds: float


def tradeoff(request: Request, catalogs: Catalogs, *, progress: Report | None = None) -> Tradeoff:
    """What each target of `request` costs, proven; `progress` is told how many questions are decided."""
    begun = time.perf_counter()
    space, ground = lay_out(request, catalogs)
    known = impossible.reasons(space)
    if ground is None:
        return Tradeoff(None, (), None, known, space.combinations, 0, 0, time.perf_counter() - begun)
    table = _Table.of(ground, progress)
    table.solve([0])
    why = None
    if table.work.best.found[0]:
        table.solve(table.dropped)
        table.solve(table.loosest)
        table.solve(table.open)
    else:
        why, choices = conflicts(ground, space.limits)
        table.seed(choices)
    found = _candidates(table)
    return Tradeoff(
        found[0],
        _rows(space, found),
        why,
        known,
        space.combinations,
        table.questions.size,
        table.work.evaluated + (0 if why is None else why.evaluated),
        time.perf_counter() - begun,
    )


def questions_of(space: Space) -> Questions:
    """The request as it stands, then every step of every target."""
    names, stated = tuple(space.limits), np.array(list(space.limits.values()))
    limits = np.tile(stated, (1 + len(names) * len(steps.STEPS), 1))
    for k, name in enumerate(names):
        here = slice(1 + k * len(steps.STEPS), 1 + (k + 1) * len(steps.STEPS))
        limits[here, k] = [steps.moved(name, float(stated[k]), step) for step in steps.STEPS]
    return Questions(names, limits, space.comfort)


@dataclass(slots=True)
class _Table:
    """The work on all questions; `settled` are those with a proven answer."""

    ground: Ground
    questions: Questions
    work: many.Many
    settled: set[int]
    progress: Report | None
    asked: int = 0
    told: float = 0.0

    @staticmethod
    def of(ground: Ground, progress: Report | None) -> _Table:
        """Nothing settled yet."""
        questions = questions_of(ground.space)
        index = ground.asked.index
        work = many.Many.of(index, questions, ground.pairs, Screen.of(index, ground.pairs, questions))
        return _Table(ground, questions, work, set(), progress)

    @property
    def dropped(self) -> list[int]:
        """The questions with a target dropped: the loosest of each target."""
        return list(range(1, self.questions.size, len(steps.STEPS)))

    @property
    def open(self) -> list[int]:
        """The questions that are not settled."""
        return [k for k in range(self.questions.size) if k not in self.settled]

    @property
    def loosest(self) -> list[int]:
        """Of each target the loosest open question to either side of the stated limit: they settle others."""
        sides = (part for chain in _chains(self.questions) for part in _split(chain))
        open_ = ([k for k in side if k not in self.settled] for side in sides)
        return [side[0] for side in open_ if side]

    def solve(self, asked: Sequence[int]) -> None:
        """Settle the questions `asked`."""
        self.asked = len(asked)
        many.solve(self.work, np.array(asked, dtype=np.int64), self._watch)
        self.settled |= set(asked)
        self._settle()

    def _settle(self) -> None:
        """Settle, and set floors, by what is known of looser limits of the same target."""
        best = self.work.best
        for chain in _chains(self.questions):
            for looser, tighter in pairwise(chain):
                best.floor[tighter] = max(best.floor[tighter], best.floor[looser])
                if looser not in self.settled:
                    continue
                best.floor[tighter] = max(best.floor[tighter], best.key[looser, COST])
                if tighter not in self.settled and np.array_equal(best.key[looser], best.key[tighter]):
                    self.settled.add(tighter)

    def seed(self, choices: Sequence[Choice]) -> None:
        """Settle everything where nothing meets the request: `choices` are the least relaxations' settings.

        A question that none of them meets has no answer.
        """
        space, questions, best = self.ground.space, self.questions, self.work.best
        for choice in choices:
            offer(space, questions, best, valued(space, choice, questions.names))
        self.solve(np.flatnonzero(best.found).tolist())

    def _watch(self, work: many.Many, pool: many.Pool) -> None:
        now = time.monotonic()
        if self.progress is None or now - self.told < REPORT_EVERY:
            return
        self.told = now
        done = len(self.settled) + self.asked - np.unique(pool.question).size
        self.progress(Progress(self.questions.size, done, work.evaluated, None))


def _chains(questions: Questions) -> Iterator[list[int]]:
    """The questions of each target from the loosest to the tightest, the request as it stands among them."""
    each, loose = len(steps.STEPS), 1 + len(steps.RELAXED)
    for begin in range(1, questions.size, each):
        yield [*range(begin, begin + loose), 0, *range(begin + loose, begin + each)]


def _split(chain: Sequence[int]) -> tuple[Sequence[int], Sequence[int]]:
    """A chain up to the request as it stands, and from there."""
    middle = chain.index(0)
    return chain[:middle], chain[middle + 1 :]


def _candidates(table: _Table) -> list[Candidate | None]:
    """The answer to every question."""
    ground, questions, best = table.ground, table.questions, table.work.best
    answered = np.flatnonzero(best.found)
    found: list[Candidate | None] = [None] * questions.size
    if not answered.size:
        return found
    distinct, place = np.unique(best.choice[answered], axis=0, return_inverse=True)
    every = assemble.candidates(ground.space, ground.catalogs, Choice(*distinct.T))
    for k, p in zip(answered.tolist(), place.ravel().tolist(), strict=True):
        limits = dict(zip(questions.names, questions.limits[k].tolist(), strict=True))
        stated = {name: limit for name, limit in limits.items() if limit != steps.free(name)}
        candidate = (
            _with_sources(ground, choice_of(best, [k]), stated) if ground.space.sources > 1 else every[p]
        )
        found[k] = regraded(candidate, stated)
    return found


def _with_sources(ground: Ground, choice: Choice, limits: Mapping[str, float]) -> Candidate:
    """One setting with the alternates that it has under `limits`."""
    space = replace(ground.space, limits=limits or NOTHING_GRADED)
    candidate = assemble.candidates(space, ground.catalogs, choice)[0]
    if limits:
        return candidate
    alternates = tuple(replace(other, limiting="") for other in candidate.alternates)
    return replace(candidate, alternates=alternates)


def regraded(candidate: Candidate, limits: Mapping[str, float]) -> Candidate:
    """`candidate` against other limits of its targets; those without a limit are not graded.

    Where none is left, its margin is the largest and no target limits it.
    """
    known = {target.name: target for target in candidate.targets}
    targets = tuple(_against(known[name], limit) for name, limit in limits.items())
    graded = [target.margin for target in targets]
    return replace(
        candidate,
        targets=targets,
        limiting=margins.limiting(graded, limits) if graded else "",
        margin=min(graded, default=margins.LARGEST),
        missed=tuple(target.name for target in targets if target.margin < 0.0),
    )


def _against(target: TargetValue, limit: float) -> TargetValue:
    value = target.value if target.corner is None else target.worst
    number = np.array(np.nan if value is None else value)
    return replace(target, limit=limit, margin=float(margins.margin(target.name, number, limit)))


def _rows(space: Space, found: Sequence[Candidate | None]) -> tuple[Row, ...]:
    base, answers = found[0], iter(found[1:])
    return tuple(
        Row(name, limit, tuple(_step(name, limit, step, (base, next(answers))) for step in steps.STEPS))
        for name, limit in space.limits.items()
    )


def _step(
    name: str, limit: float, step: float | None, pair: tuple[Candidate | None, Candidate | None]
) -> Step:
    base, candidate = pair
    changes = () if base is None or candidate is None else differences(base, candidate)
    return Step(step, None if step is None else steps.moved(name, limit, step), candidate, changes)


def differences(one: Candidate, other: Candidate) -> tuple[str, ...]:
    """The positions in which two receivers differ."""
    pairs = zip(POSITIONS, _fitted(one), _fitted(other), strict=True)
    return tuple(position for position, left, right in pairs if left != right)


def _fitted(candidate: Candidate) -> tuple[object, ...]:
    """What is at each of POSITIONS."""
    reference = candidate.reference
    return (
        (candidate.photodiode, candidate.photodiode_maker),
        (candidate.opamp, candidate.opamp_maker),
        candidate.wiring,
        (reference.kind, reference.top, reference.bottom),
        (candidate.feedback_resistance, candidate.resistor_family),
        (candidate.feedback_capacitance, candidate.capacitor_family),
        candidate.low_pass,
    )
