"""The ranked table: one line a row where it fits, else as few as it takes; nothing is cut."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from itertools import islice
from typing import Any

from rich.text import Text

from optimizer.report.cells import (
    Candidate,
    figure_columns,
    limiting_column,
    part_columns,
    value_columns,
)
from optimizer.report.layout import GAP, Column, fit, lines, total
from optimizer.report.yields import BELOW, is_below

HEADING = "bold"
CHOSEN = "bold"
GOOD, BAD = "green", "red"
Note = Callable[[Candidate, int], Sequence[str]]
Grids = Sequence[Sequence[Column]]
# How many of the subjects (parts, values, figures, limiting target) stand on each line, the best first.
PARTINGS = ((2, 2), (1, 3), (1, 1, 2), (2, 1, 1), (1, 1, 1, 1))


def no_note(_row: Candidate, _width: int) -> Sequence[str]:
    """No further lines under a row."""
    return ()


def ranked_table(
    rows: Sequence[Candidate],
    request: Mapping[str, Any],
    width: int,
    *,
    chosen: int | None = None,
    note: Note = no_note,
) -> list[Text]:
    """The table of `rows` for a terminal of `width` columns; `note` adds lines under a row,
    no wider than it is told.
    """
    rank = Column("", tuple(_rank(row, chosen) for row in rows), right=True)
    inner = width - rank.width - GAP
    grids = _grids(rows, request, inner)
    widths = [fit(grid, inner) for grid in grids]
    printed = [Text(line, HEADING) for line in _row(rank, "", (grids, widths), -1)]
    printed.append(Text("-" * min(width, max(len(line) for line in printed))))
    for index, row in enumerate(rows):
        block = list(_row(rank, rank.cells[index], (grids, widths), index))
        block += [" " * (rank.width + GAP) + line for line in note(row, inner)]
        style = CHOSEN if row["rank"] == chosen else ""
        printed += [_coloured(line, style) for line in block]
    return printed


def _grids(rows: Sequence[Candidate], request: Mapping[str, Any], width: int) -> Grids:
    """The columns on one line, or parted where the subject changes; only a line of parts alone may be
    wider, for their names can be folded.
    """
    values = value_columns(rows, request)
    for narrow in (False, True):
        single = [*part_columns(rows, narrow=narrow), *values, *figure_columns(rows, request)]
        single.append(limiting_column(rows, narrow=narrow))
        if total(single) <= width:
            return (single,)
    figures = figure_columns(rows, request, tall=False)
    parts = part_columns(rows)
    subjects = (parts, values, figures, [limiting_column(rows)])
    parted = [_parted(subjects, parting) for parting in PARTINGS]
    fitting = (grids for grids in parted if all(g == parts or total(g) <= width for g in grids))
    return next(fitting, parted[-1])


def _parted(subjects: Grids, parting: Sequence[int]) -> Grids:
    remaining = iter(subjects)
    return [[column for subject in islice(remaining, many) for column in subject] for many in parting]


def _row(rank: Column, label: str, grids: tuple[Grids, list[list[int]]], index: int) -> Iterator[str]:
    every = (line for grid, widths in zip(*grids, strict=True) for line in lines(grid, widths, index))
    for level, line in enumerate(every):
        margin = label if level == 0 else ""
        yield f"{margin:>{rank.width}}{' ' * GAP}{line}".rstrip()


def _rank(row: Candidate, chosen: int | None) -> str:
    marks = (">" if row["rank"] == chosen else "") + (BELOW if is_below(row) else "")
    return f"{marks} {row['rank']}".lstrip()


def _coloured(line: str, style: str) -> Text:
    text = Text(line, style)
    text.highlight_regex(r"(under )?\S+ % to spare|\S+-fold to spare|exactly met", GOOD)
    text.highlight_regex(r"misses by (under )?\S+ %|does not exist", BAD)
    return text
