"""The same part of the same maker twice, as reel, tube and tray of a supplier's export."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass, field

from optimizer.catalog.parts import LeftOut
from optimizer.catalog.prices import unit_price
from optimizer.catalog.rows import Rows
from optimizer.errors import Problem
from optimizer.vocabulary import NAMES


@dataclass(slots=True)
class Sorted:
    """Which rows stay, what was left out for a cheaper twin, and twins that nobody allowed."""

    wanted: list[bool]
    left_out: list[LeftOut] = field(default_factory=list)
    problems: list[Problem] = field(default_factory=list)


def groups(rows: Rows) -> list[list[int]]:
    """Return the rows of every (name, maker) that stands more than once, in reading order."""
    found: dict[tuple[str, str], list[int]] = defaultdict(list)
    for row, key in enumerate(zip(rows.text[NAMES[rows.role]], rows.text["maker"], strict=True)):
        if key[0]:
            found[key].append(row)
    return [same for same in found.values() if len(same) > 1]


def sort_out(rows: Rows, cheapest: Sequence[bool], quantity: int) -> Sorted:
    """Keep the cheapest of each group at the build quantity where `cheapest` holds for all its rows.

    `cheapest` tells for each row whether its file allows it. Equal prices are told apart by what the
    rows hold, so that the order of rows decides nothing.
    """
    result = Sorted([True] * len(rows.origin))
    for same in groups(rows):
        if all(cheapest[row] for row in same):
            _keep_cheapest(rows, same, quantity, result)
        else:
            result.problems += [_problem(rows, row, same[0]) for row in same[1:]]
    return result


def _keep_cheapest(rows: Rows, same: list[int], quantity: int, result: Sorted) -> None:
    prices = unit_price([rows.points["price"][row] for row in same], quantity).tolist()
    ranked = sorted(
        zip(prices, same, strict=True), key=lambda pair: (_last_if_unknown(pair[0]), _content(rows, pair[1]))
    )
    best = ranked[0][1]
    for _, row in ranked[1:]:
        result.wanted[row] = False
        reason = f"the same {NAMES[rows.role]} and maker at a lower or equal price in {_place(rows, best)}"
        result.left_out.append(LeftOut(rows.origin[row].file, rows.origin[row].line, reason))


def _last_if_unknown(price: float) -> float:
    return math.inf if math.isnan(price) else price


def _content(rows: Rows, row: int) -> tuple[list[str], list[str]]:
    """What a row holds, in a form that sorts."""
    values = [repr(float(values[row])) for values in rows.number.values()]
    return [cells[row] for cells in rows.text.values()], values + [
        repr(cells[row]) for cells in rows.points.values()
    ]


def _place(rows: Rows, row: int) -> str:
    return f"{rows.origin[row].file}, line {rows.origin[row].line}"


def _problem(rows: Rows, row: int, first: int) -> Problem:
    name = NAMES[rows.role]
    origin = rows.origin[row]
    rule = f"the same {name} and maker as in {_place(rows, first)}"
    remedy = 'keep one, or state duplicates = "cheapest" in source.toml'
    if name == "family":
        remedy += "; families that differ in package or range need names that differ"
    return Problem(origin.file, origin.line, name, rows.text[name][row], rule, remedy)
