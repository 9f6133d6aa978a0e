"""The other candidates beside the chosen one, the near misses, and why the rest dropped out."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import partial
from typing import Any

from optimizer.errors import clean, shortened
from optimizer.quantities import show
from optimizer.report.cells import figure_columns, named, part_columns, value_columns
from optimizer.report.layout import Column
from optimizer.report.misses import missed_words, worst_first
from optimizer.report.notes import footnotes
from optimizer.report.page.blocks import Block, Figure, Part, Section, Table, Words, cells
from optimizer.report.page.compared import compared_part
from optimizer.report.page.draw.compare import Bars, draw_cloud, draw_margins
from optimizer.report.page.terms import joined, money, term
from optimizer.report.pinned import pinned
from optimizer.report.reasons import reason_rows
from optimizer.report.words import count, margin_words
from optimizer.review.dossier import Dossier
from optimizer.review.findings import Cloud

DRAWN = 12  # rows; more would not be told apart
LONGEST = 15
WIDE = 100_000  # columns: running text folds by itself on a page


def alternatives(dossier: Dossier) -> Section:
    """The section on everything that was not chosen."""
    data = dossier.data
    parts = [Part("The candidates side by side", (*_ranked(dossier), _margins(dossier)))]
    if dossier.findings.cloud is not None:
        parts.append(Part("Cost against margin", (_cloud(dossier, dossier.findings.cloud),)))
    if data["near_misses"]:
        parts.append(Part("Near misses", (_near_misses(data),)))
    if dossier.findings.compared:
        parts.append(compared_part(dossier.findings.compared, dossier.request))
    dropped = {key: pairs for key, pairs in data["search"]["dropped"].items() if pairs}
    if dropped:
        parts.append(Part("Why the other pairs dropped out", (_dropped(dropped),)))
    return Section("alternatives", "Alternatives, and what limits or stops each", (), tuple(parts))


def _ranked(dossier: Dossier) -> tuple[Block, ...]:
    """The rows as the shortlist prints them, and what the marks in them stand for."""
    data = dossier.data
    rows, request = data["candidates"], data["request"]
    columns = (
        Column("row", tuple(str(row["rank"]) for row in rows)),
        *part_columns(rows),
        *value_columns(rows, request),
        *figure_columns(rows, request, tall=False),
        Column("limited by", tuple(_limited(row) for row in rows)),
    )
    marked = frozenset(i for i, row in enumerate(rows) if row["rank"] == dossier.candidate["rank"])
    currency = f" in {clean(data['currency'])}" if data.get("currency") else ""
    caption = f"Every candidate shown that meets the request, cost{currency}; the chosen one is marked"
    notes = footnotes(rows, request, WIDE)
    table = Table(
        caption,
        tuple(column.heading for column in columns),
        tuple(cells(*(column.cells[i] for column in columns)) for i in range(len(rows))),
        numbers=frozenset(i for i, column in enumerate(columns) if column.right),
        marked=marked,
    )
    return (table, *(Words(note.plain, "note") for note in notes))


def _limited(row: Mapping[str, Any]) -> str:
    return f"{term(row['limiting'])}, {margin_words(row['margin'])}"


def _margins(dossier: Dossier) -> Figure:
    rows = dossier.data["candidates"]
    chosen = dossier.candidate["rank"]
    shown = [row for row in rows if row["rank"] <= DRAWN or row["rank"] == chosen]
    targets = [target["name"] for target in dossier.candidate["targets"]]
    comfort = dossier.request["ranking"]["comfort"]
    limited = (
        f"row {row['rank']} by {term(row['limiting'])} ({margin_words(row['margin'])})" for row in shown
    )
    fewer = f" The first {DRAWN} rows and the chosen one are drawn." if len(rows) > len(shown) else ""
    alternative = (
        f"Bars of every margin, one panel a target and one bar a candidate. Limited: {joined(list(limited))}."
        f"{fewer} Bars end at {show(comfort, 'fraction')}, from where on a margin is comfortable."
    )
    bars = [Bars(_short(row), _by_target(row, targets), row["rank"] == chosen) for row in shown]
    draw = partial(draw_margins, bars, [term(name) for name in targets], comfort)
    return Figure(
        "margins", "Margins of the candidates side by side", alternative, draw, _data(rows, targets), 600
    )


def _by_target(row: Mapping[str, Any], targets: Sequence[str]) -> list[float]:
    margins = {target["name"]: float(target["margin"]) for target in row["targets"]}
    return [margins[name] for name in targets]


def _short(row: Mapping[str, Any]) -> str:
    parts = (shortened(clean(row[role]), LONGEST) for role in ("photodiode", "opamp"))
    return f"{row['rank']}: {' + '.join(parts)}"


def _data(rows: Sequence[Mapping[str, Any]], targets: Sequence[str]) -> Table:
    table = tuple(
        cells(f"{row['rank']}: {_names(row)}", *(margin_words(margin) for margin in _by_target(row, targets)))
        for row in rows
    )
    headings = ("candidate", *(term(name) for name in targets))
    return Table(
        "Margins by candidate and target", headings, table, numbers=frozenset(range(1, len(headings)))
    )


def _names(row: Mapping[str, Any]) -> str:
    return f"{clean(row['photodiode'])} + {clean(row['opamp'])}"


def _cloud(dossier: Dossier, cloud: Cloud) -> Figure:
    row = dossier.candidate
    comfort = dossier.request["ranking"]["comfort"]
    chosen = (float(row["figures"]["cost"]), float(row["margin"]))
    cheapest, widest = int(cloud.cost.argmin()), int(cloud.margin.argmax())
    which = "every pair" if cloud.complete else "the pairs found"
    low, high, own = (
        money(float(cost), dossier.data) for cost in (cloud.cost.min(), cloud.cost.max(), chosen[0])
    )
    alternative = (
        f"Cost against margin of {which} that met the request, {count(cloud.cost.size)} in all. Costs run "
        f"from {low} ({cloud.names[cheapest]}) to {high}; the widest margin, "
        f"{margin_words(float(cloud.margin[widest]))}, is that of {cloud.names[widest]}. The chosen one "
        f"stands at {own} and {margin_words(chosen[1])}. Margins are drawn up to "
        f"{show(comfort, 'fraction')}, from where on they rank alike."
    )
    draw = partial(draw_cloud, cloud, chosen, comfort)
    return Figure(
        "cloud", "Cost against margin of everything that met the request", alternative, draw, least=480
    )


def _near_misses(data: Mapping[str, Any]) -> Block:
    request = data["request"]
    rows = tuple(
        cells(
            str(row["rank"]),
            named(row, "photodiode"),
            named(row, "opamp"),
            _stopped(row, request),
            pinned(row, request).replace("_", " ") or "-",
        )
        for row in data["near_misses"]
    )
    headings = ("row", "photodiode", "op-amp", "stopped by", "at an end of its range")
    return Table("Eligible pairs that miss a target, the nearest miss first", headings, rows)


def _stopped(row: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    """Every target that a near miss misses, the worst miss first, and whatever else it lacks."""
    targets = {target["name"] for target in row["targets"]}
    said = [missed_words(target, request) for target in worst_first(row)]
    said += [f"too few {clean(name)}" for name in row.get("missed", ()) if name not in targets]
    return "; ".join(said).replace("_", " ")


def _dropped(dropped: Mapping[str, int]) -> Table:
    rows = tuple(cells(clean(key), count(pairs), why) for key, pairs, why in reason_rows(dropped))
    return Table(
        "Pairs that dropped out, by the check that they fail", ("key", "pairs", "why"), rows, frozenset({1})
    )
