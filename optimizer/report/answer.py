"""The answer to 'why not this part' in sentences."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.report.checks import check_words, listed
from optimizer.report.misses import missed_words
from optimizer.report.notes import at_every_corner
from optimizer.report.reached import best_words
from optimizer.report.words import beside, figure, margin_words, several, side
from optimizer.search.inquiry.best import Best
from optimizer.search.inquiry.eligibility import FAILED
from optimizer.search.inquiry.finding import CORNERS, Finding, Reach
from optimizer.search.inquiry.lookup import ONE, Part
from optimizer.search.result import SOURCES, Candidate

Record = Mapping[str, Any]


def called(part: Part) -> str:
    """A part with its maker."""
    return f"{clean(part.name)} ({clean(part.maker)})" if part.maker else clean(part.name)


def answer(finding: Finding, record: Record) -> list[str]:
    """The answer, the most important sentence first."""
    return [
        _verdict(finding, record),
        *_set_aside(finding),
        *_place(finding, record),
        *_stops(finding, record),
    ]


def _who(finding: Finding) -> str:
    parts = [subject.part for subject in finding.subjects]
    if len(parts) == 1:
        return f"{called(parts[0])}, {ONE[parts[0].role]},"
    return " with ".join(called(part) for part in parts)


def _verdict(finding: Finding, record: Record) -> str:
    who = _who(finding)
    if finding.meets:
        return f"{who} meets the request."
    if not finding.admitted:
        return f"{who} is not eligible: {_refusals(finding)}."
    if finding.largest is None:
        return f"{who} {_without_setting(finding)}."
    if finding.stopped_by == SOURCES:
        return f"{who} meets every target, but not with op-amps of as many makers as asked for."
    corners = at_every_corner(record["request"])
    at = f"at its setting of largest margin{_partner(finding)}"
    return f"{who} misses the request{corners}: {at}, {_limiting(record)}."


def _without_setting(finding: Finding) -> str:
    if not finding.pairs:
        return "is eligible, but nothing in the catalogs that it could be paired with is"
    if finding.stopped_by == CORNERS:
        return "is eligible at nominal values, but in no setting at every corner of the spreads"
    return "has no eligible setting"


def _refusals(finding: Finding) -> str:
    """Which checks each part fails: those set aside, and the one that stops it for good."""
    said = []
    for subject in finding.subjects:
        keys = dict.fromkeys((*subject.waived, *([subject.stopped] if subject.stopped else [])))
        if keys:
            who = "it" if len(finding.subjects) == 1 else called(subject.part)
            said.append(f"{who} fails {listed(tuple(keys))}")
    return "; ".join(said)


def _partner(finding: Finding) -> str:
    """' with' the op-amp and photodiode of the setting of largest margin that were not named."""
    named, row = {subject.part.role for subject in finding.subjects}, finding.largest
    if row is None:
        return ""
    others = {"photodiodes": row.photodiode, "opamps": row.opamp}
    names = [clean(name) for role, name in others.items() if role not in named]
    return f", with {listed(names)}" if names else ""


def _limiting(record: Record) -> str:
    row = record["near_misses"][0]
    target = next(target for target in row["targets"] if target["name"] == row["limiting"])
    return missed_words(target, record["request"])


def _set_aside(finding: Finding) -> Iterator[str]:
    """What refused parts would do if checks that change nothing in their figures were set aside."""
    keys = listed(tuple(dict.fromkeys(key for subject in finding.subjects for key in subject.waived)))
    stopped = [subject for subject in finding.subjects if subject.stopped is not None]
    if not keys:
        return
    if stopped:
        yield f"Nor would it be with {keys} set aside, so its figures were not looked at."
    elif finding.best is not None:
        yield f"With {keys} set aside it would meet the request. All that follows is with {keys} set aside."
    else:
        yield f"With {keys} set aside it would miss the request. All that follows is with {keys} set aside."


def _place(finding: Finding, record: Record) -> Iterator[str]:
    place, best = finding.place, finding.best
    if place is None or best is None:
        return
    by = record["request"]["ranking"]["by"]
    if place.first is None:
        yield "Nothing else in the catalogs meets the request."
        return
    if place.rank is None:
        where = f"It stands below the {several(place.rows, 'row')} of the shortlist by {by}"
    elif place.listed:
        where = f"It is row {place.rank} of the shortlist by {by}"
    else:
        where = f"It would be row {place.rank} of the shortlist by {by}"
    yield where + _against(best, place.first, record) + "."


def _against(best: Candidate, first: Candidate, record: Record) -> str:
    """What it has of the ranked figure and of cost, beside row 1 where that is another."""
    if best == first:
        return f": {_money(best.figures['cost'], record)}"
    by = record["request"]["ranking"]["by"]
    said = ""
    if by == "margin":
        said = f": {margin_words(best.margin)}, row 1 {margin_words(first.margin)}; it"
    elif by != "cost":
        mine, theirs = (figure(by, row.figures[by], record["request"]) for row in (best, first))
        said = f": {mine}, row 1 {theirs}; it"
    return f"{said or ': it'} costs {_cost(best, first, record)}"


def _cost(best: Candidate, first: Candidate, record: Record) -> str:
    mine, theirs = best.figures["cost"] or 0.0, first.figures["cost"] or 0.0
    if mine == theirs:
        return f"{_money(mine, record)}, as much as row 1"
    which = "more" if mine > theirs else "less"
    return (
        f"{_money(mine, record)}, {figure('cost', abs(mine - theirs), record['request'])} {which} than row 1"
    )


def _money(value: float | None, record: Record) -> str:
    currency = f" {record['currency']}" if record.get("currency") else ""
    return f"{figure('cost', value, record['request'])}{currency}"


def _stops(finding: Finding, record: Record) -> Iterator[str]:
    """The targets that are out of reach, and the single ones that stand in the way."""
    request = record["request"]
    failed = [check for check in finding.settings if check.verdict == FAILED]
    for check in failed:
        yield f"The setting that gets furthest fails {check.key}: {check_words(check)}."
    if finding.best is not None or finding.largest is None or finding.largest.margin >= 0.0:
        return
    hopeless = [reach for reach in finding.reaches if _misses(reach, reach.alone)]
    if hopeless:
        said = "; ".join(f"{r.name} ({_best_of(r, r.alone, request)})" for r in hopeless)
        yield f"Out of reach even alone, whatever the others do: {said}."
    single = [reach for reach in finding.reaches if reach.together.value is not None]
    if single:
        said = "; ".join(f"{r.name} ({_best_of(r, r.together, request)})" for r in single)
        which = "this one target" if len(single) == 1 else "any one of these targets"
        yield f"Dropping {which} would let it through. With all others met: {said}."
    else:
        each = "Each target can be met alone, but d" if all(map(_met_alone, finding.reaches)) else "D"
        yield f"{each}ropping no single target would let it through."


def _misses(reach: Reach, found: Best) -> bool:
    """Whether the best value is proven to miss the limit."""
    most = found.value if found.bound is None else found.bound
    return most is not None and not _holds(reach, most)


def _met_alone(reach: Reach) -> bool:
    return reach.alone.value is not None and _holds(reach, reach.alone.value)


def _holds(reach: Reach, value: float) -> bool:
    """Whether a value meets the limit; one that does not exist (NaN) does not."""
    return value >= reach.limit if side(reach.name) == "at least" else value <= reach.limit


def _best_of(reach: Reach, found: Best, request: Mapping[str, Any]) -> str:
    _value, limit = beside(reach.name, found.value, reach.limit, request)
    needs = "needs" if side(reach.name) == "at least" else "at most"
    return f"{best_words(reach, found, request)} at best, {needs} {limit}"
