"""The whole report, section by section."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rich.text import Text

from optimizer.record import Record
from optimizer.report.cautions import LEFT_OUT, cautions
from optimizer.report.chosen import chosen_lines
from optimizer.report.misses import blocking_lines, near_miss_lines
from optimizer.report.notes import covered, footnotes, headline, impossible_lines
from optimizer.report.paragraphs import styled
from optimizer.report.reasons import reason_lines
from optimizer.report.table import ranked_table

Section = list[Text]


def report(record: Record, width: int) -> list[Text]:
    """Everything the record says, as lines for a terminal of `width` columns."""
    data = record.data
    if data["search"].get("impossible"):
        return _joined([headline(data, width) + impossible_lines(data, width)])
    misses = near_miss_lines(data, width) + footnotes(data["near_misses"], data["request"], width)
    return _joined(
        [
            headline(data, width) + blocking_lines(data, width),
            _table(data, width),
            chosen_lines(data, width),
            misses,
            reason_lines(data, width),
            covered(data, width),
            styled(LEFT_OUT, width),
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
    return styled("Nothing meets the request.", width, "bold red") + misses


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
