"""Each channel by itself: its best receivers, what they come to together, or why nothing meets it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from optimizer.planning.bill import bill_of, cost_of, totals_of
from optimizer.planning.columns import Field
from optimizer.planning.kinds import NONE, Kind
from optimizer.planning.plan import Alone, Hopeless
from optimizer.search.crew import Found, nothing
from optimizer.search.hunt import Rules
from optimizer.search.impossible import reasons
from optimizer.search.query import ask, is_empty, query
from optimizer.search.shortlist import shortlist
from optimizer.search.space import settings

SHOWN = 10
"""Receivers of each kind that are looked for, the cheapest first."""
NEAR = 3
"""Near misses that explain a channel that nothing meets."""


def cheapest_alone(kind: Kind) -> Found:
    """The cheapest receivers that meet the request of `kind`, each of another pair of active parts."""
    if is_empty(kind.space) or reasons(kind.space):
        return nothing(len(kind.space.limits))
    asked = query(kind.space)
    return ask(asked, *asked.eligible, Rules("cost", SHOWN, 0.0))


def hopeless(kind: Kind) -> list[Hopeless]:
    """Why nothing meets the request of `kind`: one entry for each of its channels."""
    study, space = kind.study, kind.space
    request = replace(space.request, ranking=replace(space.request.ranking, show=NEAR))
    outcome = shortlist(request, study.catalogs)
    return [
        Hopeless(
            channel=channel.name,
            request=channel.request,
            impossible=outcome.impossible,
            blocking=outcome.blocking,
            near_misses=outcome.near_misses,
            dropped=outcome.dropped,
        )
        for channel in kind.channels
    ]


def together(field: Field, found: Sequence[Found]) -> Alone:
    """What the first receivers of all channels come to on one board, with nothing shared but part numbers."""
    pieces: dict[int, int] = {}
    packages, current = 0, 0.0
    for kind, best in zip(field.kinds, found, strict=True):
        opamp, diode, context, resistor, capacitor, _ = (int(column[0]) for column in best.choice.columns())
        space = kind.space
        extra = bool(space.contexts.buffered[context]) and not bool(space.opamps.spare[opamp])
        packages += kind.count * (1 + extra)
        with np.errstate(all="ignore"):
            current += kind.count * float(settings(space, best.choice).supply_current[0])
        used = [int(kind.opamp_part[opamp])] * (1 + extra)
        used += [int(kind.diode_part[diode]), int(kind.resistor_part[resistor])]
        used += [int(kind.capacitor_part[capacitor]), *(int(part) for part in kind.divider[context])]
        for part in used:
            if part != NONE:
                pieces[part] = pieces.get(part, 0) + kind.count
    return _priced(field, pieces, packages, current)


def _priced(field: Field, pieces: dict[int, int], packages: int, current: float) -> Alone:
    shelf, quantity = field.shelf.parts, field.outline.quantity
    bill = bill_of(field, pieces)
    cost = cost_of(field.outline, bill)
    totals, _ = totals_of(field, bill, cost, current)
    over = [total.name for total in totals if total.margin is not None and total.margin < 0.0]
    stocks = {part: shelf[part].entry.stock for part in pieces}
    short = any(stock is not None and quantity * pieces[part] > stock for part, stock in stocks.items())
    return Alone(cost, len(bill), packages, (*over, *(("stock",) if short else ())))
