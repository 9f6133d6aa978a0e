"""The front of cost against one target, as a terminal shows it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.conflicts import cannot_lines, conflict_lines
from optimizer.report.layout import Column
from optimizer.report.paragraphs import styled
from optimizer.report.stepped import BOLD, as_row, ending, in_currency, joined, stacked
from optimizer.report.words import count, figure, margin_words, several, side
from optimizer.search.weigh.front import Front, Point

MOST_DIGITS = 9


def front_lines(front: Front, data: Mapping[str, Any], width: int) -> list[Text]:
    """The front of cost against one target; `data` has the request's name, values in force and currency."""
    heading = styled(clean(data["name"]), width, BOLD) + cannot_lines(front.impossible, width)
    if not front.points and front.conflicts is None:
        return heading
    sections = [
        heading + styled(_title(front, data), width),
        conflict_lines(front.conflicts, data, width),
        _points(front, data, width) + styled(_notes(front, data), width),
        styled(_covered(front), width),
        *ending(data, width),
    ]
    return joined(sections)


def _title(front: Front, data: Mapping[str, Any]) -> str:
    if not front.points:
        return f"Nothing meets the other targets, even with {front.target} left aside."
    own = ""
    if front.limit is not None:
        limit = figure(front.target, front.limit, data["request"])
        own = f" (its own limit, {side(front.target)} {limit}, is dropped)"
    others = f", with {', '.join(front.others)} met" if front.others else ""
    many = several(len(front.points), "receiver")
    return f"Cost{in_currency(data)} against {front.target}{own}: {many} that none beats in both{others}."


def _points(front: Front, data: Mapping[str, Any], width: int) -> list[Text]:
    """Every point, the cheapest first; marked where the target's own limit is met too."""
    if not front.points:
        return []
    request = data["request"]
    rows = [as_row(point.candidate) for point in front.points]
    columns = [
        Column("", tuple("*" if _meets(point) else "" for point in front.points)),
        Column("cost", apart("cost", [p.cost for p in front.points], request), right=True),
        Column(front.target, apart(front.target, [p.value for p in front.points], request), right=True),
        Column("photodiode", tuple(clean(row["photodiode"]) for row in rows), gives=True),
        Column("op-amp", tuple(clean(row["opamp"]) for row in rows), gives=True),
        Column("wiring", tuple(row["wiring"] for row in rows), gives=True),
        Column("Rf", tuple(show(row["feedback_resistance"], "resistance") for row in rows), right=True),
        Column("Cf", tuple(_placed(row["feedback_capacitance"]) for row in rows), right=True),
    ]
    return stacked(columns, width)


def _meets(point: Point) -> bool:
    return point.margin is not None and point.margin >= 0.0


def _notes(front: Front, data: Mapping[str, Any]) -> str:
    """What the mark and the values stand for."""
    request, words = data["request"], []
    if front.limit is not None and front.points:
        met = [point for point in front.points if _meets(point)]
        cheapest = f"; the cheapest with {margin_words(met[0].margin or 0.0)}" if met else ""
        words.append(
            f"* meets the stated limit too ({count(len(met))} of {count(len(front.points))}{cheapest})."
        )
    if request.get("tolerance", {}).get("method") == "corners":
        words.append(f"Values of {front.target} are those of the worst corner.")
    if request.get("resilience", {}).get("opamp_sources", 1) > 1:
        words.append("They are what every source that is asked for reaches.")
    return " ".join(words)


def _covered(front: Front) -> str:
    return (
        f"Proven in {front.seconds:.3g} s, {count(front.evaluated)} settings evaluated: the same as "
        "comparing all combinations."
    )


def apart(name: str, values: Sequence[float], request: Mapping[str, Any]) -> tuple[str, ...]:
    """Values of one figure with as many digits as tell neighbours apart."""
    for digits in range(3, MOST_DIGITS):
        said = tuple(figure(name, value, request, digits) for value in values)
        if all(left != right for left, right in pairwise(said)):
            return said
    return tuple(figure(name, value, request, MOST_DIGITS) for value in values)


def _placed(capacitance: float) -> str:
    return show(capacitance, "capacitance") if capacitance else "none"
