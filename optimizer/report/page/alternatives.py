"""The other candidates beside the chosen one, the near misses, and why the rest dropped out."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import partial
from typing import Any

import numpy as np

from optimizer.errors import clean, shortened
from optimizer.quantities import show
from optimizer.report.cells import figure_columns, named, part_columns, value_columns
from optimizer.report.corner import has_corner
from optimizer.report.layout import Column
from optimizer.report.misses import missed_words, too_few_sources, worst_first
from optimizer.report.notes import footnotes
from optimizer.report.page.blocks import Block, Figure, Part, Section, Table, Words, cells
from optimizer.report.page.compared import compared_parts
from optimizer.report.page.draw.compare import Bars, draw_cloud, draw_margins
from optimizer.report.page.terms import in_terms, joined, money, term
from optimizer.report.pinned import pinned
from optimizer.report.reasons import reason_rows
from optimizer.report.words import count, margin_words, several
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
    parts += compared_parts(dossier.findings.compared, dossier.request)
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
    if _cornered(dossier.candidate):
        caption += "; figures at nominal values, margins at the worst corner"
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


def _cornered(row: Mapping[str, Any]) -> bool:
    return any(has_corner(target) for target in row["targets"])


def _margins(dossier: Dossier) -> Figure:
    rows = dossier.data["candidates"]
    chosen = dossier.candidate["rank"]
    shown = [row for row in rows if row["rank"] <= DRAWN or row["rank"] == chosen]
    targets = [target["name"] for target in dossier.candidate["targets"]]
    comfort = dossier.request["ranking"]["comfort"]
    limited = (
        f"row {row['rank']} by {term(row['limiting'])} ({margin_words(row['margin'])})" for row in shown
    )
    where = " at the worst corner" if _cornered(dossier.candidate) else ""
    fewer = f" The first {DRAWN} rows and the chosen one are drawn." if len(rows) > len(shown) else ""
    alternative = (
        f"Bars of every margin{where}, one panel a target and one bar a candidate. Limited: "
        f"{joined(list(limited))}.{fewer} Bars end at {show(comfort, 'fraction')}, from where on a margin "
        "is comfortable."
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
    row, data = dossier.candidate, dossier.data
    comfort = show(dossier.request["ranking"]["comfort"], "fraction")
    chosen = (float(row["figures"]["cost"]), float(row["margin"]))
    widest = int(cloud.margin.argmax())
    which = (
        f"The {several(cloud.cost.size, 'pair')} that meet the request"
        if cloud.cost.size > 1
        else "The one pair that meets the request"
    )
    if not cloud.complete:
        which = f"The {count(cloud.cost.size)} lowest in cost of the pairs that meet the request; more meet"
    own = any(np.isclose(cloud.cost, chosen[0]) & np.isclose(cloud.margin, chosen[1]))
    other = "" if own else ", in a setting that is not the cheapest of its pair"
    alternative = (
        f"{which}, each at its cheapest setting. Costs run from {money(float(cloud.cost[0]), data)} "
        f"({clean(cloud.names[0])}) to {money(float(cloud.cost[-1]), data)}; the widest margin, "
        f"{margin_words(float(cloud.margin[widest]))}, is that of {clean(cloud.names[widest])} at "
        f"{money(float(cloud.cost[widest]), data)}. The receiver justified here stands at "
        f"{money(chosen[0], data)} and {margin_words(chosen[1])}{other}. The stepped line joins the pairs "
        f"that no other beats in both. Margins from {comfort} up are drawn at {comfort}, for they rank alike."
    )
    draw = partial(draw_cloud, cloud, chosen, dossier.request["ranking"]["comfort"])
    title = "Cost against margin of everything that met the request"
    if not cloud.complete:
        title = "Cost against margin of the cheapest that met the request"
    return Figure("cloud", title, alternative, draw, _front(cloud, data), least=480)


def _front(cloud: Cloud, data: Mapping[str, Any]) -> Table:
    """The pairs that no other beats in both cost and margin."""
    rows = tuple(
        cells(clean(name), money(float(cost), data), margin_words(float(margin)))
        for name, cost, margin, best in zip(cloud.names, cloud.cost, cloud.margin, cloud.front, strict=True)
        if best
    )
    caption = "Pairs that no other beats in both cost and margin"
    return Table(caption, ("pair", "cost", "margin"), rows, numbers=frozenset({1}))


def _near_misses(data: Mapping[str, Any]) -> Block:
    request = data["request"]
    rows = tuple(
        cells(
            str(row["rank"]),
            named(row, "photodiode"),
            named(row, "opamp"),
            _stopped(row, request),
            in_terms(pinned(row, request)) or "-",
        )
        for row in data["near_misses"]
    )
    headings = ("row", "photodiode", "op-amp", "stopped by", "at an end of its range")
    return Table("Eligible pairs that miss a target, the nearest miss first", headings, rows)


def _stopped(row: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    """Every target that a near miss misses, the worst miss first, and whatever else it lacks."""
    said = [missed_words(target, request) for target in worst_first(row)]
    return in_terms("; ".join([*said, *too_few_sources(row, request)]))


def _dropped(dropped: Mapping[str, int]) -> Table:
    rows = tuple(cells(clean(key), count(pairs), why) for key, pairs, why in reason_rows(dropped))
    return Table(
        "Pairs that dropped out, by the check that they fail", ("key", "pairs", "why"), rows, frozenset({1})
    )
