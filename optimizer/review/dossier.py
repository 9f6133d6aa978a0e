"""Everything that a page about one candidate shows, gathered as data: no words, no drawing.

Entry point: `gather`. What is computed again here must agree with the record, or nothing is given.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

from optimizer.errors import InputError, Problem
from optimizer.record import Record
from optimizer.review.findings import Findings, Floats
from optimizer.review.reopen import Changed, Reopened, chosen_of
from optimizer.search import assemble
from optimizer.search.change import dividers
from optimizer.search.examine import Glass, examine
from optimizer.search.locate import NotFound, locate
from optimizer.search.query import whole
from optimizer.search.space import Choice, Space
from optimizer.search.spread.montecarlo import samples
from optimizer.study import Study

AGREES = 1e-7  # relative; both sides were rounded to 9 digits
AGAIN = "run luxsift shortlist again and take its new record, or put the files back as they were"


@dataclass(frozen=True, slots=True)
class Place:
    """Where the record and its request are, and where the page goes, each as typed."""

    record: str
    request: str
    output: str


@dataclass(frozen=True, slots=True)
class Dossier:
    """One candidate of a record with all that a page about it shows.

    `changed` are the input files that differ from the record's although the candidate does not.
    """

    record: Record
    study: Study
    changed: tuple[Changed, ...]
    candidate: Mapping[str, Any]
    glass: Glass
    findings: Findings
    place: Place

    @property
    def data(self) -> Mapping[str, Any]:
        """The record's document."""
        return self.record.data

    @property
    def request(self) -> Mapping[str, Any]:
        """The request as it was in force."""
        asked: Mapping[str, Any] = self.record.data["request"]
        return asked


def gather(reopened: Reopened, place: Place, rank: int | None = None) -> Dossier:
    """The dossier of the candidate with `rank`, or of the chosen one; see `weighing.weigh` for the rest.

    Raises InputError where there is none, where what it chooses is not in the catalogs any more, and
    where its figures are not those of the record any more.
    """
    candidate = chosen_of(reopened.record, rank)
    study = reopened.study
    spot = Spot(place.record, f"row {candidate['rank']}", AGAIN)
    return examined(whole(study.request, study.catalogs), reopened, candidate, (place, spot))


@dataclass(frozen=True, slots=True)
class Spot:
    """Where in a record a candidate stands, and what to do where it no longer follows from the files."""

    file: str
    where: str
    again: str


def examined(
    space: Space, reopened: Reopened, candidate: Mapping[str, Any], at: tuple[Place, Spot]
) -> Dossier:
    """The dossier of one `candidate` of `space`, computed again; raises InputError as `gather` does."""
    place, spot = at
    study = reopened.study
    space = dividers.recorded(space, study.catalogs, candidate)
    choice = _located(space, reopened, candidate, spot)
    _refuse_other_figures(space, choice, reopened, candidate, spot)
    return Dossier(
        record=reopened.record,
        study=study,
        changed=reopened.changed,
        candidate=candidate,
        glass=examine(space, choice),
        findings=Findings(drawn=_draws(space, reopened, choice, candidate)),
        place=place,
    )


def _located(space: Space, reopened: Reopened, candidate: Mapping[str, Any], spot: Spot) -> Choice:
    try:
        return locate(space, reopened.study.catalogs, candidate)
    except NotFound as lack:
        problems = [
            Problem(spot.file, None, f"{spot.where}, {position}", None, words, spot.again)
            for position, words in lack.missing
        ]
        raise InputError([*problems, *changed_problems(reopened.changed)]) from None


def _refuse_other_figures(
    space: Space, choice: Choice, reopened: Reopened, candidate: Mapping[str, Any], spot: Spot
) -> None:
    """Raise InputError with every figure, limit and margin of `candidate` that is not what it was."""
    (now,) = assemble.candidates(space, reopened.study.catalogs, choice)
    differing = list(differences(candidate, asdict(now)))
    if not differing:
        return
    problems = [
        Problem(spot.file, None, f"{spot.where}, {name}", said(then), f"it is {said(found)} now")
        for name, then, found in differing
    ]
    reason = "its figures do not follow from its request and catalogs as they are now"
    problems.append(Problem(spot.file, None, None, None, reason, spot.again))
    raise InputError([*problems, *changed_problems(reopened.changed)])


def differences(
    then: Mapping[str, Any], now: Mapping[str, Any]
) -> Iterator[tuple[str, float | None, float | None]]:
    """Names and both values of the figures, limits and margins in which two candidates differ."""
    for name, value in now["figures"].items():
        if not agree(then["figures"].get(name), value):
            yield name, then["figures"].get(name), value
    before = {target["name"]: target for target in then["targets"]}
    after = {target["name"]: target for target in now["targets"]}
    for name in dict.fromkeys((*before, *after)):
        for part in ("limit", "margin"):
            was, found = (side.get(name, {}).get(part) for side in (before, after))
            if not agree(was, found):
                yield f"{part} of {name}", was, found


def agree(then: float | None, now: float | None) -> bool:
    """Whether two values are the same but for rounding."""
    if then is None or now is None:
        return then is now
    return math.isclose(then, now, rel_tol=AGREES, abs_tol=AGREES * 1e-9)


def said(value: float | None) -> str:
    """A value in a problem's words."""
    return "no value" if value is None else f"{value:.9g}"


def changed_problems(changed: Sequence[Changed]) -> Iterator[Problem]:
    """Which input files are not what they were."""
    for change in changed:
        what = "changed" if change.then and change.now else "new" if change.now else "gone"
        yield Problem(change.file, None, None, None, f"this input is {what} since the record was made")


def _draws(
    space: Space, reopened: Reopened, choice: Choice, candidate: Mapping[str, Any]
) -> Mapping[str, Floats]:
    """Each target in the draws that the record's yield counts; empty where it counts none."""
    if "yield" not in candidate:
        return {}
    return samples(space, reopened.study.catalogs, choice)


def place_of(record: str | Path, reopened: Reopened, output: str) -> Place:
    """Where everything is, the request as the study was read from."""
    return Place(str(record), reopened.study.request.path.as_posix(), output)
