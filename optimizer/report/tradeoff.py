"""What each target costs, as a terminal shows it: steps side by side, then what each changes."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.report.cells import named
from optimizer.report.changes import short
from optimizer.report.conflicts import BAD, cannot_lines, conflict_lines
from optimizer.report.layout import Column
from optimizer.report.paragraphs import paragraph, styled
from optimizer.report.stepped import (
    BOLD,
    NONE,
    SAME,
    as_row,
    ending,
    in_currency,
    is_same,
    joined,
    limits_words,
    margins_words,
    moves,
    runs,
    stacked,
    steps_words,
)
from optimizer.report.words import count, figure, margin_words, side, spoken, told_apart
from optimizer.search.result import Candidate
from optimizer.search.weigh.tradeoff import Row, Step, Tradeoff

MEANING = (
    "Steps are margins against the stated limit: -10 % admits what misses it by 10 %, +10 % asks for 10 % to "
    "spare. Each entry is the lowest cost of all receivers that then meet everything, proven; all else stays "
    "as stated (slew keeps the stated bandwidth and light)."
)


def tradeoff_lines(found: Tradeoff, data: Mapping[str, Any], width: int) -> list[Text]:
    """Everything about what the targets of a request cost; `data` has its name, request and currency."""
    heading = styled(clean(data["name"]), width, BOLD) + cannot_lines(found.impossible, width)
    if not found.rows:
        return heading
    sections = [
        heading + _headline(found, data, width),
        conflict_lines(found.conflicts, data, width),
        _overview(found, data, width),
        _changed(found, data, width),
        styled(_covered(found), width),
        *ending(data, width),
    ]
    return joined(sections)


def _covered(found: Tradeoff) -> str:
    return (
        f"Decided {count(found.questions)} sets of limits, each over {spoken(found.combinations)} "
        f"combinations, in {found.seconds:.3g} s; {count(found.evaluated)} settings evaluated, the others "
        "excluded by proven bounds."
    )


def _headline(found: Tradeoff, data: Mapping[str, Any], width: int) -> list[Text]:
    if found.base is None:
        return styled("Nothing meets the request as it stands.", width, BAD)
    row = as_row(found.base)
    parts = f"{named(row, 'photodiode')} with {named(row, 'opamp')}"
    limiting = f"limited by {row['limiting']}, {margin_words(row['margin'])}"
    cost = _costs(found, data["request"])(found.base)
    first = "The cheapest receiver that meets the request as it stands"
    return styled(f"{first}: {parts}, {cost}{_currency(data)}, {limiting}.", width)


def _currency(data: Mapping[str, Any]) -> str:
    return f" {clean(data['currency'])}" if data.get("currency") else ""


def _overview(found: Tradeoff, data: Mapping[str, Any], width: int) -> list[Text]:
    """One line a target, one column a step; where nothing meets the request, only what may help."""
    rows = [row for row in found.rows if found.base is not None or _answered(row)]
    if not rows:
        return []
    cost = _costs(found, data["request"])
    loose = sum(step.step is None or step.step < 0.0 for step in rows[0].steps)
    columns = [Column("target", tuple(row.target for row in rows))]
    for place, step in enumerate(rows[0].steps[: None if found.base else loose]):
        if place == loose:
            columns.append(Column("as\nis", (cost(found.base),) * len(rows), right=True))
        cells = (
            SAME if is_same(row.steps[place], found.base) else cost(row.steps[place].candidate)
            for row in rows
        )
        columns.append(Column(_short(step.step), tuple(cells), right=True))
    title = f"Lowest cost{in_currency(data)} with one target moved or dropped and all others as stated"
    out = styled(title, width, BOLD) + stacked(columns, width)
    same = f"{SAME}: the same receiver; " if found.base is not None else ""
    return out + styled(f"{same}{NONE}: nothing meets. {MEANING}", width)


def _costs(found: Tradeoff, request: Mapping[str, Any]) -> Callable[[Candidate | None], str]:
    """What says the cost of a receiver, with as many digits as tell every other from the one as it stands."""
    steps = [step.candidate for row in found.rows for step in row.steps if step.candidate is not None]
    costs = [candidate.figures["cost"] for candidate in steps]
    as_is = found.base.figures["cost"] if found.base is not None else None
    said = dict(zip(costs, told_apart("cost", costs, as_is or 0.0, request)[0], strict=True))
    if as_is is not None:
        said[as_is] = told_apart("cost", costs, as_is, request)[1]
    return lambda candidate: NONE if candidate is None else said[candidate.figures["cost"]]


def _answered(row: Row) -> bool:
    """Whether something meets at some step."""
    return any(step.candidate is not None for step in row.steps)


def _short(step: float | None) -> str:
    return "drop" if step is None else f"{step * 100:+.3g}\n%"


def _changed(found: Tradeoff, data: Mapping[str, Any], width: int) -> list[Text]:
    """Every run of steps that brings another receiver, and what that changes."""
    moving = [row for row in found.rows if moves(row, found.base) and _answered(row)]
    still = [row.target for row in found.rows if row not in moving]
    out: list[Text] = []
    for row in moving:
        out += styled(
            f"{row.target}, {side(row.target)} {figure(row.target, row.limit, data['request'])}", width, BOLD
        )
        for run in runs(row.steps):
            if _says(run[0], found):
                out += [Text(f"  {line}") for line in _run(row, run, found, data, width - 2)]
    if still and found.base is not None:
        out += styled(f"No step of these changes the receiver: {', '.join(still)}.", width)
    return out


def _says(step: Step, found: Tradeoff) -> bool:
    """Whether a step is worth a line: it changes the receiver, or ends what the request as it stands had."""
    if found.base is None:
        return step.candidate is not None
    return not is_same(step, found.base)


def _run(
    row: Row, run: Sequence[Step], found: Tradeoff, data: Mapping[str, Any], width: int
) -> Iterator[str]:
    request = data["request"]
    where = f"{steps_words(run)} ({limits_words(row.target, run, request)})"
    if run[0].candidate is None:
        yield from paragraph(f"{where}: nothing meets", width)
        return
    best = as_row(run[0].candidate)
    cost = _costs(found, request)(run[0].candidate)
    words = f"{where}: {cost}, {best['limiting']} {margins_words(run)}"
    change = f"{clean(best['photodiode'])} with {clean(best['opamp'])}"
    if found.base is not None:
        change = short(as_row(found.base), best, run[0].changes)
    yield from paragraph(words, width)
    yield from (f"  {line}" for line in paragraph(change, width - 2))
