"""Which parts can take the place of one that is withdrawn, without another footprint.

Every part is asked whether any setting with it meets, so that the answer is the same as evaluating all.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.search.change import dividers, substitutes
from optimizer.search.change.positions import DROP_IN, OUT, VALUES, Axis, Plan, fits, graded
from optimizer.search.change.substitutes import Offer, anything
from optimizer.search.space import Space

Name = tuple[str, str]
"""Part (or family) and maker."""


@dataclass(frozen=True, slots=True)
class Serving:
    """What can serve: as `drop_ins`, and (others) with `values` changed."""

    drop_ins: frozenset[Name]
    values: frozenset[Name]


def serving(space: Space, catalogs: Catalogs, plan: Plan, use: str) -> Serving:
    """The parts that can take the place of the withdrawn one in `use`; of families, those that can there.

    Everything else that the plan withdraws gives way to whatever fits, and what stays must pass its checks.
    """
    if use in ("photodiode", "opamp"):
        drop_ins, values = _actives(space, catalogs, plan, use)
    elif use in ("divider", "bypass"):
        drop_ins, values = _through(catalogs, _of_divider(space, catalogs, plan, use), use)
    else:
        drop_ins, values = _through(catalogs, _of_feedback(space, catalogs, plan, use), use)
    return Serving(drop_ins, values - drop_ins)


Sets = tuple[frozenset[Name], frozenset[Name]]


def _actives(space: Space, catalogs: Catalogs, plan: Plan, use: str) -> Sets:
    parts, axis = (catalogs.opamps, 0) if use == "opamp" else (catalogs.photodiodes, 1)
    offer = substitutes.offers(space, catalogs, plan)[DROP_IN]
    drop_ins, values = (
        frozenset(_name(parts, "part", int(row)) for row in substitutes.able(offer, change, axis))
        for change in (DROP_IN, VALUES)
    )
    return drop_ins, values


def _through(catalogs: Catalogs, offers: Iterator[tuple[int, Offer]], use: str) -> Sets:
    """The families with an offer in which something meets."""
    parts = catalogs.resistors if use in ("feedback_resistance", "divider") else catalogs.capacitors
    found: dict[int, set[Name]] = {DROP_IN: set(), VALUES: set()}
    for row, offer in offers:
        change = next((change for change in found if anything(offer, change)), None)
        if change is not None:
            found[change].add(_name(parts, "family", row))
    return frozenset(found[DROP_IN]), frozenset(found[VALUES])


def _of_feedback(space: Space, catalogs: Catalogs, plan: Plan, use: str) -> Iterator[tuple[int, Offer]]:
    """For each family that fits, what may stand in with its values alone."""
    offer = substitutes.offers(space, catalogs, plan)[DROP_IN]
    resistive = use == "feedback_resistance"
    choices = space.resistors if resistive else space.capacitors
    axis = offer.grades.resistor if resistive else offer.grades.capacitor
    for family, row in enumerate(choices.rows):
        other = choices.family != family
        if not np.any(axis.grade[~other] <= VALUES):
            continue
        own = Axis(axis.changed, np.where(other, OUT, axis.grade))
        name = "resistor" if resistive else "capacitor"
        yield row, Offer(offer.space, replace(offer.grades, **{name: own}))


def _of_divider(space: Space, catalogs: Catalogs, plan: Plan, use: str) -> Iterator[tuple[int, Offer]]:
    """For each family that fits, what may stand in with `use` bought from it."""
    parts, out = (
        (catalogs.resistors, plan.out.resistors)
        if use == "divider"
        else (catalogs.capacitors, plan.out.capacitors)
    )
    base = substitutes.offers(space, catalogs, plan)[DROP_IN].space
    fit = fits(parts, np.arange(parts.size), plan.board.parts.get(use)) & ~out
    for row in np.flatnonzero(fit):
        bought = dividers.from_family(base, catalogs, plan, use, int(row))
        yield int(row), Offer(bought, graded(bought, catalogs, plan))


def _name(parts: Parts, column: str, row: int) -> Name:
    return str(parts.text[column][row]), str(parts.text["maker"][row])
