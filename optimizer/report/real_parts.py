"""What the report says of real parts: which spreads were looked at, and what the draws add to the corners."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.quantities import show
from optimizer.report.corner import AXES, has_corner
from optimizer.report.paragraphs import UNBROKEN, styled
from optimizer.report.words import count, figure, told_apart
from optimizer.report.yields import is_below
from optimizer.vocabulary import VOCABULARY

ROWS_NAMED = 3  # of those that a draw takes beyond their worst corner, by figure; beyond, the farthest
SHAPES = {
    "uniform": "uniformly within each spread",
    "normal": "normally with each spread as 3 sigma, so that a few lie beyond it",
}
VERTICES = "A corner is a vertex: every value at one of its two ends. Between the ends a figure may be worse."
LAST = (
    "Rows that are not shown to reach the yield stand last. Pairs without a row were not drawn: among more "
    "rows, one may reach it."
)
NOTHING = "Nothing spreads: no family and no line of [tolerance] states a spread; nominal values are graded."


def real_parts(record: Mapping[str, Any], width: int) -> list[Text]:
    """A heading and a few sentences; empty where the request states no [tolerance]."""
    texts = tuple(sentences(record))
    return [Text("Real parts", "bold"), *styled(" ".join(texts), width)] if texts else []


def sentences(record: Mapping[str, Any]) -> Iterator[str]:
    """What was graded, what was drawn, and where a draw was worse than the worst corner."""
    request, rows = record["request"], record["candidates"]
    tolerance = request.get("tolerance")
    if not tolerance:
        return
    cornered = _cornered(record)
    if tolerance["method"] == "corners":
        graded = f"Every target is graded at the worst corner of these spreads: {_spreads(request)}."
        yield f"{graded} {VERTICES}" if cornered else NOTHING
    drawn = [row for row in rows if row.get("yield", {}).get("draws")]
    if drawn:
        which = "Each row" if len(drawn) == len(rows) else "Each row whose spreads are known"
        spreads = "" if cornered else f": {_spreads(request)}"
        yield f"{which} was drawn {_how(tolerance)}{spreads}."
    if drawn and cornered:
        yield _beyond(drawn, request)
    if drawn and any(is_below(row) for row in rows):
        yield LAST


def _cornered(record: Mapping[str, Any]) -> bool:
    rows = (*record["candidates"], *record["near_misses"])
    return not rows or any(has_corner(target) for row in rows for target in row["targets"])


def _spreads(request: Mapping[str, Any]) -> str:
    """What spreads, by how much: "Rf and Cf by their families' tolerance, gbw 30 %"."""
    tolerance = request["tolerance"]
    divided = "divider" in request["space"]["references"]
    which = "Rf, Cf and the divider's R1 (to V+) and R2 (to V-)" if divided else "Rf and Cf"
    tempco = " and tempco" if "ambient" in request else ""
    passives = f"{which} by their families' tolerance{tempco}"
    stated = [
        f"{words} {show(tolerance[axis], 'fraction')}".replace(" ", UNBROKEN)
        for axis, words in AXES.items()
        if tolerance.get(axis)
    ]
    return ", ".join((passives, *stated))


def _how(tolerance: Mapping[str, Any]) -> str:
    how = f"{count(tolerance['draws'])} times at random, {SHAPES[tolerance['distribution']]}"
    return f"{how} (seed {tolerance['seed']})"


def _beyond(rows: Sequence[Mapping[str, Any]], request: Mapping[str, Any]) -> str:
    """Every figure that some draw makes worse than its worst corner, with both values."""
    found = [_of_target(name, rows, request) for name in VOCABULARY]
    said = [text for text in found if text]
    if not said:
        return "No draw made a figure worse than its worst corner."
    return f"Some draws made figures worse than their worst corner: {'; '.join(said)}."


def _of_target(name: str, rows: Sequence[Mapping[str, Any]], request: Mapping[str, Any]) -> str:
    """'snr 39.7 dB, not 39.9 dB (row 2)', the farthest first; '' where no draw is beyond the corner."""
    beyond = []
    for row in (row for row in rows if name in row["yield"]["worst"]):
        drawn = row["yield"]["worst"][name]
        for target in row["targets"]:
            if target["name"] == name and has_corner(target) and _is_worse(name, drawn, target["worst"]):
                beyond.append((_distance(drawn, target["worst"]), row["rank"], drawn, target["worst"]))
    beyond.sort(key=lambda one: (-one[0], one[1]))
    named = [_both(name, one[2:], one[1], request) for one in beyond[:ROWS_NAMED]]
    more = len(beyond) - len(named)
    rest = [f"less in {count(more)} more rows"] if more > 1 else ["less in 1 more row"] if more else []
    return f"{name} {', '.join((*named, *rest))}" if named else ""


def _is_worse(name: str, drawn: float | None, corner: float | None) -> bool:
    if drawn is None or corner is None:
        return drawn is None and corner is not None
    return drawn < corner if VOCABULARY[name].better == "higher" else drawn > corner


def _distance(drawn: float | None, corner: float) -> float:
    return float("inf") if drawn is None else abs(drawn - corner) / max(abs(corner), 1e-300)


def _both(name: str, values: tuple[float | None, float], rank: int, request: Mapping[str, Any]) -> str:
    drawn, corner = values
    if drawn is None:
        return f"does not exist, not {figure(name, corner, request)} (row {rank})"
    (said,), at_corner = told_apart(name, (drawn,), corner, request)
    return f"{said}, not {at_corner} (row {rank})"
