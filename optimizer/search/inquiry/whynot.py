"""Why a part (or two) is not what meets a request, and how close it comes.

The part is put to every check with its numbers. What a request refuses for reasons that are not
electrical (WAIVABLE) is set aside, for that part alone, to see what it would do. The space is then
restricted to the part, and asked: the best value of each target alone, and with the others met; the
setting of largest margin; the best setting by the request's own ranking.

The setting of largest margin is found by the shortlist's rules, so that it is the near miss that the
shortlist would show; only where all margins are comfortable is it sought once more without comfort.
Second sources (`[resilience]`) count for the best setting alone.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.figures import CHECKS
from optimizer.request.types import WIRINGS, Request
from optimizer.search import assemble, impossible, keys
from optimizer.search.crew import Found
from optimizer.search.hunt import Rules
from optimizer.search.inquiry import eligibility
from optimizer.search.inquiry.best import best, ground
from optimizer.search.inquiry.eligibility import FAILED, NOT_CHECKED, NOT_REACHED, PASSED, Check
from optimizer.search.inquiry.families import admitting, family_checks
from optimizer.search.inquiry.finding import Finding, Place, Reach, Subject, Wired
from optimizer.search.inquiry.lookup import Part, lookup
from optimizer.search.inquiry.nearest import NUMBERS, nearest
from optimizer.search.query import Masks, Query, ask, graded, query, restricted
from optimizer.search.reach import furthest
from optimizer.search.result import Candidate
from optimizer.search.roles import PASSES, Verdicts
from optimizer.search.space import Choice, Space, build, build_whole, settings
from optimizer.search.values import Passives

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]
Pairs = tuple[Ints, Ints]
Tell = Callable[[str], None]

WAIVABLE = ("status", "excluded", "stock", "temperature")
"""Checks that are set aside to see what a part would do: they change nothing in its figures."""

LARGEST_MARGIN, SHORTLIST = "largest margin", "shortlist"

SETTING = CHECKS[CHECKS.index("window") + 1 :]
"""Checks that depend on the whole setting."""


def whynot(
    request: Request, catalogs: Catalogs, words: Sequence[str], *, tell: Tell = lambda _step: None
) -> Finding:
    """What was found out about the one or two parts named by `words` (name, or maker/part).

    `tell` is called with each of `steps(request)` as it begins, if it does.
    Raises InputError where a name is unknown or stands for several parts.
    """
    parts = lookup(catalogs, words)
    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        return _looked_at(request, catalogs, parts, tell)


def steps(request: Request) -> tuple[str, ...]:
    """What takes time, in order."""
    return (LARGEST_MARGIN, *margins.limits(request), SHORTLIST)


def _looked_at(request: Request, catalogs: Catalogs, parts: Sequence[Part], tell: Tell) -> Finding:
    stated = build(request, catalogs)
    known = impossible.reasons(stated)
    if known:
        return Finding(tuple(Subject(part, (), (), None) for part in parts), impossible=known)
    space, subjects = _admitted(request, catalogs, parts)
    finding = Finding(subjects)
    if any(subject.stopped for subject in subjects):
        return finding
    space = restricted(space, _masks(space, parts))
    pairs = _pairs(space, parts)
    finding = replace(finding, wired=tuple(_wired(space, parts)), pairs=pairs[0].size * pairs[1].size)
    if not finding.pairs:
        return finding
    work = Work(catalogs, stated, query(space), pairs, tell)
    return _searched(work, finding)


def _admitted(
    request: Request, catalogs: Catalogs, parts: Sequence[Part]
) -> tuple[Space, tuple[Subject, ...]]:
    """The space in which the parts are let in as far as may be, and what was set aside for it."""
    lenient = request
    subjects = {}
    for part in parts:
        if part.role in ("resistors", "capacitors"):
            subjects[part] = _family(request, catalogs, part)
            lenient = admitting(lenient, catalogs, part)
    space = build_whole(lenient, catalogs) if _of_role(parts, "capacitors") else build(lenient, catalogs)
    for part in parts:
        if part not in subjects:
            space, subjects[part] = _active(space, catalogs, part)
    return space, tuple(subjects[part] for part in parts)


def _family(request: Request, catalogs: Catalogs, part: Part) -> Subject:
    checks = family_checks(request, catalogs, part)
    failed = [check.key for check in checks if check.verdict != PASSED]
    waived = tuple(key for key in failed if key in WAIVABLE)
    return Subject(part, checks, waived, next((key for key in failed if key not in WAIVABLE), None))


def _active(space: Space, catalogs: Catalogs, part: Part) -> tuple[Space, Subject]:
    """`space` with the part let in, and how."""
    rulings = eligibility.rulings(space, catalogs, part)
    checks = tuple(ruling.check() for ruling in rulings)
    code = eligibility.code(rulings)
    if code.max() == PASSES:
        return space, Subject(part, checks, (), None)
    waived = frozenset(r.key for r in rulings if r.key in WAIVABLE and r.fails.any())
    ordered = tuple(key for key in WAIVABLE if key in waived)
    code = eligibility.code(rulings, waived=waived)
    reached = int(code.max())
    if reached < PASSES:
        return space, Subject(part, checks, ordered, CHECKS[reached])
    if part.role == "opamps":
        space = replace(space, opamp_verdicts=_with_row(space.opamp_verdicts, part.row, code))
    else:
        space = replace(space, diode_verdicts=_with_row(space.diode_verdicts, part.row, code))
    return space, Subject(part, checks, ordered, None)


def _with_row(verdicts: Verdicts, row: int, code: Ints) -> Verdicts:
    codes, alone, column = verdicts.code.copy(), verdicts.alone.copy(), verdicts.column.copy()
    codes[row], alone[row], column[row] = code, code.max(), ""
    return replace(verdicts, code=codes, alone=alone, column=column)


def _of_role(parts: Sequence[Part], role: str) -> Part | None:
    return next((part for part in parts if part.role == role), None)


def _masks(space: Space, parts: Sequence[Part]) -> Masks:
    """What is left of the passives where a family was named."""
    resistor, capacitor = _of_role(parts, "resistors"), _of_role(parts, "capacitors")
    return Masks(
        resistors=None if resistor is None else _in_family(space.resistors, resistor),
        capacitors=None if capacitor is None else _in_family(space.capacitors, capacitor),
    )


def _in_family(passives: Passives, part: Part) -> Bools:
    return np.asarray(passives.family == passives.rows.index(part.row))


def _pairs(space: Space, parts: Sequence[Part]) -> Pairs:
    """The op-amps and photodiodes to be paired: those that were named, or all that are eligible."""
    opamp, diode = _of_role(parts, "opamps"), _of_role(parts, "photodiodes")
    opamps = np.flatnonzero(space.opamp_verdicts.alone == PASSES) if opamp is None else np.array([opamp.row])
    diodes = np.flatnonzero(space.diode_verdicts.alone == PASSES) if diode is None else np.array([diode.row])
    return opamps, diodes


def _wired(space: Space, parts: Sequence[Part]) -> Iterator[Wired]:
    """Where the named op-amp and photodiode pass their own checks; nothing where neither was named."""
    rows = [part for part in parts if part.role in ("opamps", "photodiodes")]
    if not rows:
        return
    x = space.contexts
    tables = {"opamps": space.opamp_verdicts, "photodiodes": space.diode_verdicts}
    passes = np.all([tables[part.role].code[part.row] == PASSES for part in rows], axis=0)
    for wiring in np.unique(x.wiring).tolist():
        here = x.wiring == wiring
        ground, levels = here & ~x.divided, here & x.divided
        vref = x.vref[levels & passes]
        yield Wired(
            wiring=WIRINGS[wiring],
            ground=bool(passes[ground].any()) if ground.any() else None,
            levels=int(levels.sum()),
            passing=int(vref.size),
            low=float(vref.min()) if vref.size else None,
            high=float(vref.max()) if vref.size else None,
        )


@dataclass(frozen=True, slots=True)
class Work:
    """What is looked through: `pairs` in the space of `asked`, cut to the parts; `stated` is the whole."""

    catalogs: Catalogs
    stated: Space
    asked: Query
    pairs: Pairs
    tell: Tell


def _searched(work: Work, finding: Finding) -> Finding:
    asked, pairs = work.asked, work.pairs
    space = asked.space
    opamp, diode = np.repeat(pairs[0], pairs[1].size), np.tile(pairs[1], pairs[0].size)
    reach = furthest(space, opamp, diode)
    finding = replace(finding, eligible=int((reach == PASSES).sum()))
    if not finding.eligible:
        return replace(finding, settings=tuple(_stopped(space, (opamp, diode), reach)))
    unsourced = replace(space, sources=1)
    freely = Query(unsourced, replace(asked.index, space=unsourced))
    work.tell(LARGEST_MARGIN)
    found = _largest(freely, pairs)
    if not found.choice.opamp.size:  # eligible at nominal values, in no setting at every corner
        return finding
    largest = assemble.candidates(space, work.catalogs, found.choice)[0]
    finding = replace(
        finding,
        settings=tuple(_numbers(space, found.choice, SETTING)),
        largest=largest,
        reaches=tuple(_reaches(replace(work, asked=freely), found.choice, largest)),
    )
    work.tell(SHORTLIST)
    met = ask(asked, *pairs, Rules(space.request.ranking.by, 1, 0.0))
    if not met.choice.opamp.size:
        return finding
    chosen = assemble.candidates(space, work.catalogs, met.choice)[0]
    return replace(finding, best=chosen, place=_place(work, met, chosen))


def _stopped(space: Space, pairs: Pairs, reach: Ints) -> Iterator[Check]:
    """The checks that depend on the setting where none passes all, with the numbers of the nearest one."""
    key = CHECKS[int(reach.max())]
    if key not in SETTING:  # each part passes somewhere, but nowhere both
        yield Check(key, FAILED, {})
        return
    rows = reach == reach.max()
    at = SETTING.index(key)
    choice, numbers = nearest(space, (pairs[0][rows], pairs[1][rows]), key)
    yield from _numbers(space, choice, SETTING[:at])
    yield Check(key, FAILED, {**numbers})
    yield from (Check(later, NOT_REACHED, {}) for later in SETTING[at + 1 :])


def _numbers(space: Space, choice: Choice, checks: Sequence[str]) -> Iterator[Check]:
    """The numbers of checks that one setting passes."""
    for key in checks:
        if key == "load" and space.bench.load is None:
            yield Check(key, NOT_CHECKED, {})
        else:
            columns = NUMBERS[key](space.bench, settings(space, choice))
            yield Check(key, PASSED, {name: float(column[0]) for name, column in columns.items()})


def _largest(asked: Query, pairs: Pairs) -> Found:
    """The setting of largest margin; nothing where none is eligible at every corner that is graded."""
    space = asked.space
    found = ask(asked, *pairs, Rules("margin", 1, -1.0))
    if not found.choice.opamp.size or found.vector[0, 0] < space.comfort:
        return found
    comfortless = graded(asked, space.limits, musts={}, comfort=margins.LARGEST)
    return ask(comfortless, *pairs, Rules("margin", 1, space.comfort))


def _reaches(work: Work, hint: Choice, largest: Candidate) -> Iterator[Reach]:
    on = ground(work.asked, *work.pairs, hint)
    limits = work.asked.space.limits
    for target in largest.targets:
        work.tell(target.name)
        others = {name: limit for name, limit in limits.items() if name != target.name}
        yield Reach(
            name=target.name,
            limit=target.limit,
            alone=best(on, target.name, {}),
            together=best(on, target.name, others),
            value=target.value if target.corner is None else target.worst,
            margin=target.margin,
        )


def _place(work: Work, met: Found, chosen: Candidate) -> Place:
    """Where `chosen`, the first of `met`, would stand among the rows of the request's own shortlist."""
    stated = work.stated
    ranking = stated.request.ranking
    whole = query(stated)
    rows = ask(whole, *whole.eligible, Rules(ranking.by, ranking.show, 0.0))
    table = assemble.candidates(stated, work.catalogs, rows.choice)
    own = _key(work.asked.space, met)
    before = int(keys.less(_key(stated, rows), own).sum()) if table else 0
    listed = before < len(table) and table[before] == chosen
    return Place(
        rank=before + 1 if before < ranking.show else None,
        rows=len(table),
        listed=listed,
        first=table[0] if table else None,
    )


def _key(space: Space, found: Found) -> NDArray[np.float64]:
    return keys.between_pairs(space, found.choice, (found.primary, found.cost, found.vector))
