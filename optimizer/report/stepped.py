"""Steps of a target in words, shared by all that show what targets cost."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import groupby
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.record.build import candidate_row, plain
from optimizer.report.cautions import cautions, left_out
from optimizer.report.layout import GAP, Column, fit, lines, total
from optimizer.report.paragraphs import styled
from optimizer.report.words import figure, margin_words
from optimizer.search.result import Candidate
from optimizer.search.weigh.tradeoff import Row, Step, differences

SAME, NONE = "same", "none"
LEAST = " to spare"
BOLD = "bold"
INDENT, LEAST_COLUMN = 4, 8


def as_row(candidate: Candidate) -> dict[str, Any]:
    """A candidate as the rows of records have it."""
    row: dict[str, Any] = plain(candidate_row(candidate, 0))
    return row


def is_same(step: Step, base: Candidate | None) -> bool:
    """Whether a step leaves the receiver as it is."""
    return base is not None and step.candidate is not None and not step.changes


def moves(row: Row, base: Candidate | None) -> bool:
    """Whether any step of a target changes the receiver."""
    return not all(is_same(step, base) for step in row.steps)


def step_words(step: float | None) -> str:
    """A step in words: 'dropped', '10 % looser', '5 % tighter'."""
    if step is None:
        return "dropped"
    return f"{abs(step) * 100:.3g} % {'looser' if step < 0.0 else 'tighter'}"


def runs(steps: Sequence[Step]) -> Iterator[tuple[Step, ...]]:
    """Neighbouring steps to one side of the stated limit that have the same receiver."""
    for _, group in groupby(steps, key=lambda step: step.step is not None and step.step > 0.0):
        run: list[Step] = []
        for step in group:
            if run and not _alike(run[-1], step):
                yield tuple(run)
                run = []
            run.append(step)
        yield tuple(run)


def _alike(one: Step, other: Step) -> bool:
    if one.candidate is None or other.candidate is None:
        return one.candidate is other.candidate
    return not differences(one.candidate, other.candidate)


def steps_words(run: Sequence[Step]) -> str:
    """'dropped', '5 % tighter', '5 % to 20 % tighter', '20 % looser to dropped'."""
    words = [step_words(step.step) for step in run]
    if len(run) == 1:
        return words[0]
    loose = run[-1].step is not None and run[-1].step < 0.0
    mild, wild = (words[-1], words[0]) if loose else (words[0], words[-1])
    for which in (" looser", " tighter"):
        if mild.endswith(which) and wild.endswith(which):
            mild = mild.removesuffix(which)
    return f"{mild} to {wild}"


def limits_words(target: str, run: Sequence[Step], request: Mapping[str, Any]) -> str:
    """The limits of a run, from the mildest step to the wildest; a dropped target has none."""
    said = [NONE if step.step is None else figure(target, step.limit, request) for step in run]
    if run[-1].step is None or run[-1].step < 0.0:
        said.reverse()
    return said[0] if len(said) == 1 else f"{said[0]} to {said[-1]}"


def margins_words(run: Sequence[Step]) -> str:
    """The margin of a run's receiver, against the moved limits: '3 % to spare', '3 % to 9 % to spare'."""
    margins = sorted(step.candidate.margin for step in run if step.candidate is not None)
    least, most = margin_words(margins[0]), margin_words(margins[-1])
    return least if least == most else f"{least.removesuffix(LEAST)} to {most}"


def stacked(columns: Sequence[Column], width: int) -> list[Text]:
    """A table; columns that find no room stand on further lines, under a row's first and moved in."""
    return _drawn(_parted(columns, width), width)


def grouped(groups: Sequence[Sequence[Column]], width: int) -> list[Text]:
    """A table on one line where it fits; else each of the groups stands on lines of its own, as `stacked`."""
    together = [column for group in groups for column in group]
    if total(together) <= width:
        return _drawn([together], width)
    return _drawn([own for group in groups for own in _parted(group, width - INDENT)], width)


def _drawn(groups: Sequence[Sequence[Column]], width: int) -> list[Text]:
    inner = [width if place == 0 else width - INDENT for place in range(len(groups))]
    widths = [fit(group, room, LEAST_COLUMN) for group, room in zip(groups, inner, strict=True)]
    out = []
    for row in range(-1, len(groups[0][0].cells)):
        for place, (group, own) in enumerate(zip(groups, widths, strict=True)):
            lead = " " * INDENT if place else ""
            out += [
                Text(f"{lead}{line}".rstrip(), BOLD if row < 0 else "") for line in lines(group, own, row)
            ]
    return out


def _parted(columns: Sequence[Column], width: int) -> list[list[Column]]:
    groups: list[list[Column]] = [[]]
    for column in columns:
        room = width if len(groups) == 1 else width - INDENT
        if groups[-1] and sum(map(_least, groups[-1])) + _least(column) + GAP * len(groups[-1]) > room:
            groups.append([])
        groups[-1].append(column)
    return groups


def _least(column: Column) -> int:
    """The least width that a column takes."""
    heading = max(map(len, column.heading.split("\n")))
    return min(column.width, max(LEAST_COLUMN, heading)) if column.gives else column.width


def in_currency(data: Mapping[str, Any]) -> str:
    """' in EUR' where the currency is known."""
    return f" in {clean(data['currency'])}" if data.get("currency") else ""


def ending(data: Mapping[str, Any], width: int) -> tuple[list[Text], list[Text]]:
    """What the model leaves out, and the cautions."""
    caution = f"Caution: {cautions(data['request'])}"
    return styled(left_out(data["request"]), width), styled(caution, width)


def joined(sections: Sequence[list[Text]]) -> list[Text]:
    """The sections that are not empty, an empty line between them."""
    out: list[Text] = []
    for section in filter(None, sections):
        out += ([Text("")] if out else []) + section
    return out
