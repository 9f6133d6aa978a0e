"""What each target costs: the cheapest receiver with one limit moved or dropped, target by target."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.report.cells import named
from optimizer.report.changes import short
from optimizer.report.page.blocks import Block, Cell, Part, Section, Table, Words, cells
from optimizer.report.page.terms import arrows, joined, money, term
from optimizer.report.stepped import (
    NONE,
    SAME,
    as_row,
    is_same,
    limits_words,
    margins_words,
    moves,
    runs,
    step_words,
    steps_words,
)
from optimizer.report.words import figure, side, told_apart
from optimizer.review.dossier import Dossier
from optimizer.search.weigh.tradeoff import Row, Step, Tradeoff

STEP = (
    "A step is a margin against the stated limit: 10 % tighter asks for 10 % to spare, 10 % looser admits "
    "what misses by 10 %. Each entry is the cheapest receiver that then meets everything, proven."
)


def prices(dossier: Dossier) -> Section | None:
    """The section on what each target costs; None where it was not looked for."""
    found = dossier.findings.prices
    if found is None or not found.rows:
        return None
    blocks: list[Block] = [Words(_base(found, dossier)), _overview(found, dossier), Words(STEP, "note")]
    parts = []
    moving = [row for row in found.rows if moves(row, found.base)]
    if moving:
        parts.append(Part("What each step changes", (_table(moving, found, dossier.data),)))
    still = [term(row.target) for row in found.rows if row not in moving]
    if still and moving:
        blocks.append(Words(f"No step of {joined(still)} changes the receiver."))
    elif still:
        blocks.append(Words("No step of any target changes the receiver."))
    return Section("prices", "What each target costs", tuple(blocks), tuple(parts))


def _base(found: Tradeoff, dossier: Dossier) -> str:
    """The receiver that the steps are held against."""
    if found.base is None:
        return "With the inputs as they are now, nothing meets the request as it stands."
    row = as_row(found.base)
    cost = money(row["figures"]["cost"], dossier.data)
    own = _differ(row, dossier.candidate)
    which = "It is not the one justified here" if own else "It is the one justified here"
    return (
        f"The cheapest receiver that meets the request as it stands is {named(row, 'photodiode')} with "
        f"{named(row, 'opamp')} at {cost}. {which}; the steps below are held against it."
    )


def _differ(one: Mapping[str, Any], other: Mapping[str, Any]) -> bool:
    """Whether two rows differ in parts, wiring or values."""
    names = ("photodiode", "photodiode_maker", "opamp", "opamp_maker", "wiring", "reference", "low_pass")
    values = ("feedback_resistance", "resistor_family", "feedback_capacitance", "capacitor_family")
    return any(one.get(name) != other.get(name) for name in (*names, *values))


def _overview(found: Tradeoff, dossier: Dossier) -> Table:
    """One row a target, one column a step: the lowest cost."""
    data = dossier.data
    base = None if found.base is None else found.base.figures["cost"]
    stated = NONE if base is None else _told_apart(base, found, data)
    rows = []
    for row in found.rows:
        said = [_cost(step, found, data) for step in row.steps]
        looser = sum(step.step is None or step.step < 0.0 for step in row.steps)
        limit = f"{side(row.target)} {figure(row.target, row.limit, data['request'])}"
        rows.append((*cells(term(row.target), limit), *said[:looser], Cell(stated), *said[looser:]))
    steps = found.rows[0].steps
    looser = sum(step.step is None or step.step < 0.0 for step in steps)
    headings = [step_words(step.step) for step in steps]
    headings.insert(looser, "as stated")
    currency = f" in {clean(data['currency'])}" if data.get("currency") else ""
    caption = (
        f"Lowest cost{currency} with one target moved and all others as stated; {SAME}: the same receiver, "
        f"{NONE}: nothing meets"
    )
    columns = ("target", "limit", *headings)
    return Table(caption, columns, tuple(rows), numbers=frozenset(range(2, len(columns))))


def _costs(found: Tradeoff) -> list[float | None]:
    """The cost of every step that something meets."""
    steps = [step for row in found.rows for step in row.steps]
    return [step.candidate.figures["cost"] for step in steps if step.candidate is not None]


def _cost(step: Step, found: Tradeoff, data: Mapping[str, Any]) -> Cell:
    """The cost of a step, bold where it is not that of the request as it stands, and told apart from it."""
    if step.candidate is None:
        return Cell(NONE, tone="bad")
    if is_same(step, found.base):
        return Cell(SAME)
    cost = step.candidate.figures["cost"]
    same = found.base is not None and cost == found.base.figures["cost"]
    return Cell(_told_apart(cost, found, data), tone="" if same else "strong")


def _told_apart(cost: float | None, found: Tradeoff, data: Mapping[str, Any]) -> str:
    """A cost with as many digits as tell every step from the request as it stands."""
    base = None if found.base is None else found.base.figures["cost"]
    if base is None:
        return figure("cost", cost, data["request"])
    return told_apart("cost", [cost, *_costs(found)], base, data["request"])[0][0]


def _table(rows: Sequence[Row], found: Tradeoff, data: Mapping[str, Any]) -> Table:
    """Every run of steps with one receiver."""
    said = tuple(
        cells(term(row.target), *_run(row.target, run, found, data))
        for row in rows
        for run in runs(row.steps)
    )
    currency = f", {clean(data['currency'])}" if data.get("currency") else ""
    headings = ("target", "step", "limit", f"cost{currency}", "margin", "what changes")
    return Table(
        "Neighbouring steps with the same receiver in one row", headings, said, numbers=frozenset({3})
    )


def _run(target: str, run: Sequence[Step], found: Tradeoff, data: Mapping[str, Any]) -> tuple[str, ...]:
    """Step, limit, cost, margin and changes of one run of steps."""
    step, limit = steps_words(run), limits_words(target, run, data["request"])
    candidate = run[0].candidate
    if candidate is None:
        return step, limit, NONE, "-", "nothing meets"
    row = as_row(candidate)
    change = f"{clean(row['photodiode'])} with {clean(row['opamp'])}"
    if found.base is not None:
        change = arrows(short(as_row(found.base), row, run[0].changes)) or "no change"
    return step, limit, _told_apart(candidate.figures["cost"], found, data), margins_words(run), change
