"""What a part reaches of each target, in columns; and what is proven of it."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.report.layout import Column
from optimizer.report.paragraphs import bound
from optimizer.report.words import beside, figure, margin_words, several, side
from optimizer.search.inquiry.best import Best
from optimizer.search.inquiry.finding import Finding, Reach

Request = Mapping[str, Any]
UNPROVEN = "+"
NEVER, NONE = "never", "does not exist"


def best_words(reach: Reach, found: Best, request: Request) -> str:
    """A best value: 'never' where the other targets cannot be met, marked where it is not proven."""
    if found.value is None:
        return NEVER
    if math.isnan(found.value):
        return NONE
    said, _limit = beside(reach.name, found.value, reach.limit, request)
    return said + UNPROVEN if is_open(reach, found, request) else said


def is_open(reach: Reach, found: Best, request: Request) -> bool:
    """Whether something better than the value shown is not ruled out: its bound reads otherwise."""
    if found.bound is None or found.value is None or math.isnan(found.value):
        return found.bound is not None
    shown, most = (figure(reach.name, value, request) for value in (found.value, found.bound))
    return shown != most


def limit_words(reach: Reach, request: Request) -> str:
    """The limit and its side: 'at least 20 kHz'."""
    _value, limit = beside(reach.name, reach.value, reach.limit, request)
    return bound(f"{side(reach.name)} {limit}")


def value_words(reach: Reach, request: Request) -> str:
    """The value at the setting of largest margin."""
    return beside(reach.name, reach.value, reach.limit, request)[0]


def reach_margin(reach: Reach, limiting: str) -> str:
    """The margin at the setting of largest margin, and whether it limits."""
    words = NONE if reach.value is None else margin_words(reach.margin)
    return bound(f"{words}, limiting" if reach.name == limiting else words)


def reach_columns(finding: Finding, request: Request) -> tuple[Column, ...]:
    """One row a target: its limit, the best alone and together, and the setting of largest margin."""
    reaches = finding.reaches
    limiting = "" if finding.largest is None else finding.largest.limiting
    at = "worst at\nlargest\nmargin" if _corners(finding) else "at\nlargest\nmargin"
    return (
        Column("target", tuple(reach.name for reach in reaches)),
        Column("limit", tuple(limit_words(reach, request) for reach in reaches), gives=True),
        Column("best\nalone", tuple(best_words(r, r.alone, request) for r in reaches), right=True),
        Column(
            "with the\nothers\nmet", tuple(best_words(r, r.together, request) for r in reaches), right=True
        ),
        Column(at, tuple(value_words(reach, request) for reach in reaches), right=True),
        Column("margin there", tuple(reach_margin(reach, limiting) for reach in reaches), gives=True),
    )


def _corners(finding: Finding) -> bool:
    return finding.largest is not None and any(t.corner is not None for t in finding.largest.targets)


def proof(finding: Finding, request: Request) -> Iterator[str]:
    """What is proven, and the bounds of what is not."""
    open_ = list(_open(finding, request))
    save = f", those marked {UNPROVEN} apart," if open_ else ""
    yield (
        f"Proven over every setting of {several(finding.pairs, 'pair')}: none reads better than a best value"
        f"{save} and none has a smallest margin above that of the setting shown below."
    )
    if open_:
        yield f"{UNPROVEN} found, but not proven the best: {'; '.join(open_)}."


def _open(finding: Finding, request: Request) -> Iterator[str]:
    """What bounds the values that are not proven."""
    for reach in finding.reaches:
        for how, found in (("alone", reach.alone), ("with the others met", reach.together)):
            if is_open(reach, found, request):
                yield f"{reach.name} {how} is {_bound(reach, found, request)}"


def _bound(reach: Reach, found: Best, request: Request) -> str:
    if found.bound is None or math.isinf(found.bound):
        return "not bounded"
    never = "above" if side(reach.name) == "at least" else "below"
    return f"never {never} {figure(reach.name, found.bound, request)}"
