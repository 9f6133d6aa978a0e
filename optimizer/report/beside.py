"""Candidates side by side: every target of each with its margin, and which one limits."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.report.corner import at_corner, graded_value, has_corner
from optimizer.report.layout import Column, fit, lines, total
from optimizer.report.words import margin_words, side, told_apart

Target = Mapping[str, Any]
INDENT = "  "
CORNER = 16  # columns that a corner is folded to


def beside_lines(
    before: Sequence[Target], rows: Sequence[Mapping[str, Any]], request: Mapping[str, Any], width: int
) -> list[Text]:
    """The targets of `before` beside those of `rows`, as many rows to a table as there is room for."""
    held = [{"targets": before}, *rows]
    targets = [[_of(row, target["name"]) for row in held] for target in before]
    head, *columns = _columns(targets, ["before", *(f"row {row['rank']}" for row in rows)], request)
    out: list[Text] = []
    while columns[1:]:
        many = next(
            (n for n in range(len(columns), 2, -1) if total([head, *columns[:n]]) <= width - len(INDENT)), 2
        )
        out += [Text("")] if out else []
        out += _table([head, *columns[:many]], len(targets) + 1, width)
        columns[1:many] = []
    return out


def _columns(
    targets: Sequence[Sequence[Target]], headings: Sequence[str], request: Mapping[str, Any]
) -> Iterator[Column]:
    """Names and limits, then a column a candidate; `targets` holds a line a target."""
    said = [
        told_apart(line[0]["name"], [graded_value(target) for target in line], line[0]["limit"], request)
        for line in targets
    ]
    names = [
        f"{line[0]['name']}\n{side(line[0]['name'])} {limit}"
        for line, (_, limit) in zip(targets, said, strict=True)
    ]
    yield Column("target", (*names, "limiting"))
    for place, heading in enumerate(headings):
        own = [line[place] for line in targets]
        cells = [
            "\n".join(_cell(target, values[place])) for target, (values, _) in zip(own, said, strict=True)
        ]
        least = CORNER if any(has_corner(target) for target in own) else None
        yield Column(heading, (*cells, _limiting(own)), gives=True, least=least)


def _table(columns: Sequence[Column], height: int, width: int) -> list[Text]:
    widths = fit(columns, width - len(INDENT))
    out = [Text(INDENT + line, "bold") for line in lines(columns, widths, -1)]
    for index in range(height):
        out += [_coloured(INDENT + line) for line in lines(columns, widths, index)]
    return out


def _of(row: Mapping[str, Any], name: str) -> Target:
    """The target `name` of a candidate."""
    found: Target = next(target for target in row["targets"] if target["name"] == name)
    return found


def _cell(target: Target, value: str) -> Iterator[str]:
    yield value
    yield "does not exist" if graded_value(target) is None else margin_words(target["margin"])
    if at_corner(target):
        yield at_corner(target)


def _limiting(targets: Sequence[Target]) -> str:
    """The target with the smallest margin, the first of equals."""
    return str(min(targets, key=lambda target: float(target["margin"]))["name"])


def _coloured(line: str) -> Text:
    text = Text(line)
    text.highlight_regex(r"(under )?\S+ % to spare|\S+-fold to spare|exactly met", "green")
    text.highlight_regex(r"misses by (under )?\S+ %|does not exist", "red")
    return text
