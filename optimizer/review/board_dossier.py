"""Everything that a page about one plan of a board shows, gathered as data: no words, no drawing.

Entry point: `gather_board`. Receivers, prices and limits are looked at anew from the files as they are;
where one is not what the record says, nothing is given.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from optimizer.board.prices import CENTS, purchase
from optimizer.catalog.parts import Parts
from optimizer.errors import InputError, Problem
from optimizer.planning.columns import costs_of
from optimizer.review.board import Receiver, ReopenedBoard, plan_of, receivers_of, space_of
from optimizer.review.dossier import Dossier, Place, Spot, agree, changed_problems, examined, said
from optimizer.review.exposure import exposure
from optimizer.review.reopen import Changed
from optimizer.review.shelf import of_board
from optimizer.review.supply import Exposure
from optimizer.vocabulary import NAMES

AGAIN = "run luxsift board again and take its new record, or put the files back as they were"
SUPPLY = "supply of each part"
Tell = Callable[[str], None]


@dataclass(frozen=True, slots=True)
class BoardDossier:
    """One plan of a board's record with all that a page about it shows.

    `channels` hold each way a channel is built with the dossier of its candidate; `place` names the record,
    the board file and the page.
    """

    opened: ReopenedBoard
    plan: Mapping[str, Any]
    channels: tuple[tuple[Receiver, Dossier], ...]
    supply: tuple[Exposure, ...]
    place: Place

    @property
    def data(self) -> Mapping[str, Any]:
        """The record's document."""
        return self.opened.record.data

    @property
    def changed(self) -> tuple[Changed, ...]:
        """The input files that differ from the record's although the plan does not."""
        return self.opened.changed


def steps(opened: ReopenedBoard, rank: int | None) -> int:
    """How many steps `gather_board` tells of."""
    return len(plan_of(opened.record, rank)["channels"]) + 1


def gather_board(
    opened: ReopenedBoard, place: Place, rank: int | None = None, tell: Tell = lambda _: None
) -> BoardDossier:
    """The dossier of the plan with `rank`, or of the chosen one; `tell` is called with each step.

    Raises InputError where there is none, where what it uses is not in the catalogs any more, and where
    its figures, prices or limits are not those of the record any more: with all of that at once.
    """
    plan = plan_of(opened.record, rank)
    channels: list[tuple[Receiver, Dossier]] = []
    problems: dict[Problem, None] = {}
    for receiver in receivers_of(opened, plan):
        tell(receiver.channel)
        try:
            channels.append((receiver, _examined(opened, receiver, plan, place)))
        except InputError as error:
            problems |= dict.fromkeys(error.problems)
    problems |= dict.fromkeys(_money(opened, plan, place.record))
    problems |= dict.fromkeys(_limits(opened, plan, place.record))
    if problems:
        raise InputError([*problems, *(p for p in changed_problems(opened.changed) if p not in problems)])
    tell(SUPPLY)
    supply = exposure(list(of_board(place.record, opened, plan))).parts
    return BoardDossier(opened, plan, tuple(channels), supply, place)


def _examined(opened: ReopenedBoard, receiver: Receiver, plan: Mapping[str, Any], place: Place) -> Dossier:
    spot = Spot(place.record, f"plan {plan['rank']}, {receiver.channel}", AGAIN)
    space = space_of(opened.outline, opened.channel(receiver.channel))
    return examined(space, receiver.reopened, receiver.candidate, (place, spot))


def _money(opened: ReopenedBoard, plan: Mapping[str, Any], file: str) -> Iterator[Problem]:
    """Prices and sums that are not those of the record any more."""
    outline, where = opened.outline, f"plan {plan['rank']}"
    total: int | None = 0
    for line in plan["bill"]:
        found = _bought(opened, line)
        named = f"{where}, bill, {line['part']}"
        if found is None:
            yield Problem(file, None, named, None, f"it is not in the catalogs as {line['role']}", AGAIN)
            total = None
            continue
        then = (line["buy"], line["unit_price"], line["cost"])
        for what, was, now in zip(("to buy", "unit price", "cost"), then, found, strict=True):
            if not agree(float(was), float(now)):
                yield Problem(file, None, f"{named}, {what}", said(was), f"it is {said(now)} now", AGAIN)
        total = None if total is None else total + round(found[2] * CENTS)
    line_item, placement = costs_of(outline)
    if total is not None:
        total += line_item * len(plan["bill"]) + placement * sum(line["pieces"] for line in plan["bill"])
        if total != plan["cost"]:
            yield Problem(file, None, f"{where}, cost", str(plan["cost"]), f"it is {total} cents now", AGAIN)


def _bought(opened: ReopenedBoard, line: Mapping[str, Any]) -> tuple[int, float, float] | None:
    """Quantity, unit price and cost of a line of the bill as the catalogs have them; None: they do not."""
    quantity = opened.outline.quantity
    for channel in opened.outline.channels:
        parts: Parts = getattr(channel.study.catalogs, f"{line['role']}s", channel.study.catalogs.opamps)
        named = parts.text[NAMES[parts.role]] == line["part"]
        rows = np.flatnonzero(named & (parts.text["maker"] == line["maker"]))
        if rows.size:
            breaks, stock = parts.points["price"][rows[0]], _stock(parts, int(rows[0]))
            found = purchase(breaks, quantity, line["pieces"], stock)
            found = found or purchase(breaks, quantity, line["pieces"], None)
            return None if found is None else (found.quantity, found.unit, found.cents / CENTS)
    return None


def _stock(parts: Parts, row: int) -> float | None:
    stock = float(parts.number["stock"][row]) if "stock" in parts.number else float("nan")
    return None if np.isnan(stock) else stock


def _limits(opened: ReopenedBoard, plan: Mapping[str, Any], file: str) -> Iterator[Problem]:
    """Limits of the board file that are not those of the record any more."""
    outline = opened.outline
    now = {name: getattr(outline.limits, name) for name in ("cost", "supply_current", "area", "line_items")}
    now["opamp_parts"] = outline.rules.opamp_parts or None
    for total in plan["totals"]:
        name = total["name"]
        if name in now and not agree(total["limit"], now[name]):
            rule = f"it is {said(now[name])} now"
            yield Problem(
                file, None, f"plan {plan['rank']}, limit of {name}", said(total["limit"]), rule, AGAIN
            )
