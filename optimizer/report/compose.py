"""The whole report, section by section."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rich.text import Text

from optimizer.record import Record
from optimizer.report.cautions import cautions, left_out
from optimizer.report.chosen import chosen_lines
from optimizer.report.misses import blocking_lines, near_miss_lines
from optimizer.report.notes import at_every_corner, covered, footnotes, headline, impossible_lines
from optimizer.report.paragraphs import styled
from optimizer.report.real_parts import real_parts
from optimizer.report.reasons import reason_lines, unusable_lines
from optimizer.report.table import ranked_table

Section = list[Text]


def report(record: Record, width: int) -> list[Text]:
    """Everything the record says, as lines for a terminal of `width` columns."""
    data = record.data
    if data["search"].get("impossible"):
        impossible = headline(data, width) + impossible_lines(data, width)
        return _joined([impossible, unusable_lines(data, width)])
    misses = near_miss_lines(data, width) + footnotes(data["near_misses"], data["request"], width)
    return _joined(
        [
            headline(data, width) + blocking_lines(data, width),
            _table(data, width),
            chosen_lines(data, width),
            misses,
            real_parts(data, width),
            reason_lines(data, width),
            unusable_lines(data, width),
            covered(data, width),
            styled(left_out(data["request"]), width),
            styled(f"Caution: {cautions(data['request'])}", width),
        ]
    )


def table_only(record: Record, width: int) -> list[Text]:
    """The ranked table alone (the near misses where nothing meets), or why nothing could meet."""
    data = record.data
    if data["search"].get("impossible"):
        return impossible_lines(data, width)
    if data["candidates"]:
        return _table(data, width)
    misses = near_miss_lines(data, width) + footnotes(data["near_misses"], data["request"], width)
    nothing = f"Nothing meets the request{at_every_corner(data['request'])}."
    return styled(nothing, width, "bold red") + misses


def _table(data: Mapping[str, Any], width: int) -> Section:
    rows = data["candidates"]
    if not rows:
        return []
    return ranked_table(rows, data["request"], width, chosen=data["chosen"]) + footnotes(
        rows, data["request"], width
    )


def _joined(sections: list[Section]) -> list[Text]:
    out: list[Text] = []
    for section in filter(None, sections):
        out += ([Text("")] if out else []) + section
    return out
