"""The cells of the ranked table: one column a heading, with the marks that footnotes explain."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.corner import at_corner, graded_value
from optimizer.report.layout import Column
from optimizer.report.paragraphs import bound
from optimizer.report.words import figure, margin_words
from optimizer.report.yields import yield_cell

Candidate = Mapping[str, Any]
ASSUMED = "*"
LINEAR = "^"
LIMITING = 28  # columns that hold every target with its margin, and any one deviation


def part_columns(rows: Sequence[Candidate], *, narrow: bool = False) -> list[Column]:
    """The parts of each row and how they are wired; `narrow` folds the wiring's name."""
    wirings = [row["wiring"].replace("-", "-\n") if narrow else row["wiring"] for row in rows]
    return [
        Column("photodiode", tuple(_names(rows, "photodiode")), gives=True),
        Column("op-amp", tuple(_names(rows, "opamp")), gives=True),
        Column("wiring", tuple(wirings)),
    ]


def value_columns(rows: Sequence[Candidate], request: Mapping[str, Any]) -> list[Column]:
    """The values around the parts: reference, feedback, and the low-pass where one may be chosen."""
    columns = [
        Column("Vref", tuple(_reference(row) for row in rows), right=True),
        Column("Rf", tuple(_resistance(row) for row in rows), right=True),
        Column("Cf", tuple(_capacitance(row) for row in rows), right=True),
    ]
    if any(cutoff not in ("none", None) for cutoff in request["space"]["low_pass"]):
        columns.append(Column("low-pass", tuple(_low_pass(row) for row in rows), right=True))
    return columns


def figure_columns(
    rows: Sequence[Candidate], request: Mapping[str, Any], *, tall: bool = True
) -> list[Column]:
    """The figures of each row; `tall` folds the longer headings."""

    def cells(name: str) -> tuple[str, ...]:
        return tuple(_marked_figure(row, name, request) for row in rows)

    columns = [
        Column("bandwidth", cells("bandwidth"), right=True),
        Column("SNR", cells("snr"), right=True),
        Column("dynamic\nrange" if tall else "dyn. range", cells("dynamic_range"), right=True),
        Column("supply\ncurrent" if tall else "supply", cells("supply_current"), right=True),
        Column("cost", cells("cost"), right=True),
    ]
    if any("yield" in row for row in rows):
        columns.append(Column("yield", tuple(yield_cell(row) for row in rows), right=True))
    return columns


def limiting_column(rows: Sequence[Candidate], *, narrow: bool = False) -> Column:
    """The limiting target of each row with its margin and corner; `narrow` folds it onto two lines."""
    texts = tuple(limiting(row, "\n" if narrow else " ") for row in rows)
    least = LIMITING if any(map(_corner, rows)) else None
    return Column("limiting target", texts, gives=True, least=least)


def limiting(row: Candidate, joint: str = " ") -> str:
    """The limiting target and its margin: 'snr, 3 % to spare', with the corner 'at gbw -30 %, Rf -1 %'."""
    exists = all(graded_value(target) is not None for target in _limiting_target(row))
    text = f"{row['limiting']},{joint}{margin_words(row['margin']) if exists else 'does not exist'}"
    return bound(f"{text} {_corner(row)}") if _corner(row) else text


def _limiting_target(row: Candidate) -> list[Mapping[str, Any]]:
    return [target for target in row["targets"] if target["name"] == row["limiting"]]


def _corner(row: Candidate) -> str:
    """Where the limiting target falls; '' for a near miss, whose misses are listed with their corners."""
    return "" if "missed" in row else "".join(map(at_corner, _limiting_target(row)))


def named(row: Candidate, role: str) -> str:
    """A part with its maker."""
    return f"{clean(row[role])} ({clean(row[role + '_maker'])})"


def _names(rows: Sequence[Candidate], role: str) -> list[str]:
    makers: dict[str, set[str]] = {}
    for row in rows:
        makers.setdefault(row[role], set()).add(row[role + "_maker"])
    shared = {part for part, who in makers.items() if len(who) > 1}
    texts = (named(row, role) if row[role] in shared else clean(row[role]) for row in rows)
    return [_marked(text, row, f"{role}.") for text, row in zip(texts, rows, strict=True)]


def _marked(text: str, row: Candidate, prefix: str) -> str:
    return text + ASSUMED if any(name.startswith(prefix) for name in row["assumed"]) else text


def _marked_figure(row: Candidate, name: str, request: Mapping[str, Any]) -> str:
    text = figure(name, row["figures"].get(name), request)
    return text + LINEAR if name in row.get("linear_model", ()) else text


def _reference(row: Candidate) -> str:
    reference = row["reference"]
    return "ground" if reference["kind"] == "ground" else show(reference["voltage"], "voltage")


def _resistance(row: Candidate) -> str:
    return _marked(show(row["feedback_resistance"], "resistance"), row, "resistor.")


def _capacitance(row: Candidate) -> str:
    placed = row["feedback_capacitance"]
    return _marked(show(placed, "capacitance") if placed else "none", row, "capacitor.")


def _low_pass(row: Candidate) -> str:
    return "none" if row["low_pass"] is None else show(row["low_pass"], "frequency")
