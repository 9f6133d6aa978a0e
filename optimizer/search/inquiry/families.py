"""What stands between a family of resistors or capacitors and a place in the space, with the numbers."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search.inquiry.eligibility import FAILED, PASSED, UNKNOWN, Check, Facts, excluded
from optimizer.search.inquiry.lookup import Part, every, parts_of
from optimizer.search.unusable import unusable
from optimizer.search.values import family_values


def family_checks(request: Request, catalogs: Catalogs, part: Part) -> tuple[Check, ...]:
    """Whether the request admits the family, knows all that it needs of it, and can use a value of it."""
    reasons = excluded(request, parts_of(catalogs, part.role), part)
    blank = _blank(admitting(request, catalogs, part), catalogs, part)
    return (
        Check("excluded", FAILED if reasons else PASSED, reasons),
        Check("missing", FAILED if blank else PASSED, {"columns": blank}),
        _values(request, catalogs, part),
    )


def admitting(request: Request, catalogs: Catalogs, part: Part) -> Request:
    """`request` with the family neither excluded nor left out of the required ones; no other is affected."""
    space = request.space
    exclude = tuple(_without(part, space.exclude, catalogs))
    require = space.require
    if "require" in excluded(request, parts_of(catalogs, part.role), part):
        require = (*require, f"{part.maker}/{part.name}")
    return replace(request, space=replace(space, exclude=exclude, require=require))


def _without(part: Part, words: tuple[str, ...], catalogs: Catalogs) -> Iterator[str]:
    """`words` without `part`; where one stands for others too, those by their full names."""
    for word in words:
        meant = [one for one in every(catalogs) if word in (one.name, f"{one.maker}/{one.name}")]
        if part not in meant:
            yield word
        yield from (f"{one.maker}/{one.name}" for one in meant if part in meant and one != part)


def _blank(request: Request, catalogs: Catalogs, part: Part) -> tuple[str, ...]:
    role = part.role.removesuffix("s")
    for one in unusable(request, catalogs):
        if (one.role, one.family, one.maker) == (role, part.name, part.maker):
            return one.blank
    return ()


def _values(request: Request, catalogs: Catalogs, part: Part) -> Check:
    """How many values the family offers inside the range that the request allows."""
    kind = "resistance" if part.role == "resistors" else "capacitance"
    low, high = request.space.resistance if part.role == "resistors" else request.space.capacitance
    offered = family_values(parts_of(catalogs, part.role), part.row)
    inside = int(((offered >= low) & (offered <= high)).sum())
    facts: Facts = {"kind": kind, "from": low, "to": high, "count": float(inside)}
    if not offered.size:
        return Check("values", UNKNOWN, facts)
    facts |= {"low": float(offered[0]), "high": float(offered[-1])}
    return Check("values", PASSED if inside else FAILED, facts)
