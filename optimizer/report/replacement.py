"""What replaces a part that is gone, as a terminal shows it: by how much of the board changes."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.record import Record
from optimizer.report.beside import beside_lines
from optimizer.report.cautions import cautions, left_out
from optimizer.report.cells import ASSUMED
from optimizer.report.changed import changed_lines
from optimizer.report.changes import NAMES, changes, cost_words
from optimizer.report.chosen import parts_list
from optimizer.report.exposure import USED
from optimizer.report.lacks import lack_lines
from optimizer.report.notes import coverage, footnotes
from optimizer.report.paragraphs import paragraph, styled
from optimizer.report.real_parts import real_parts
from optimizer.report.reasons import unusable_lines
from optimizer.report.words import count
from optimizer.report.yields import yield_words
from optimizer.review.replacement import Replacement
from optimizer.review.withdrawal import WHY, Withdrawn

Row = Mapping[str, Any]

MEANING = {
    "drop-in": "same package and pinout, nothing else changes",
    "values": "same footprints and wiring; values of Rf, Cf or the divider change",
    "footprint": "another package or pinout; values may change, the circuit stays",
    "redesign": "the other part, wiring, kind of reference or low-pass changes too",
}


def replacement_lines(answer: Replacement, record: Record, width: int) -> list[Text]:
    """Everything about the answer, `record` being its record, for a terminal of `width` columns."""
    data = record.data
    sections = [
        _headline(answer, data, width),
        _old(answer, data, width),
        *(_section(change, answer, data, width) for change in MEANING),
        footnotes(record.candidates, data["request"], width),
        real_parts(data, width),
        unusable_lines(data, width),
        styled(coverage(data), width),
        styled(left_out(data["request"]), width),
        styled(f"Caution: {cautions(data['request'])}", width),
    ]
    out: list[Text] = []
    for section in filter(None, sections):
        out += ([Text("")] if out else []) + section
    return out


def _headline(answer: Replacement, data: Mapping[str, Any], width: int) -> list[Text]:
    out = styled(clean(data["name"]), width, "bold")
    out += gone_lines(answer.withdrawal.parts, sorted(answer.withdrawal.plan.keep), width)
    out += changed_lines(answer.reopened.changed, width)
    found = len(data["candidates"])
    if not found:
        return out + styled("No substitute meets the request.", width, "bold red")
    currency = f", cost in {data['currency']}" if data.get("currency") else ""
    what = "One substitute meets" if found == 1 else f"{count(found)} substitutes meet"
    order = "the least change first, and for each kind of change the fewest changed positions first"
    return out + styled(f"{what} the request, {order}{currency}", width)


def gone_lines(parts: Sequence[Withdrawn], keep: Sequence[str], width: int) -> list[Text]:
    """What is gone and why, and which positions are to be kept."""
    out = []
    for part, uses in _gone(parts):
        maker = f" ({clean(part.maker)})" if part.maker else ""
        out += styled(f"Gone: {' and '.join(uses)} {clean(part.part)}{maker}, {WHY[part.why]}", width)
    kept = sorted(keep, key=list(NAMES).index)
    if kept:
        out += styled(f"Kept as it is: {', '.join(NAMES[position] for position in kept)}", width)
    return out


def _gone(parts: Sequence[Withdrawn]) -> list[tuple[Withdrawn, list[str]]]:
    """Each part that is gone, once, with everything it was used for."""
    uses: dict[tuple[str, str | None], tuple[Withdrawn, list[str]]] = {}
    for part in parts:
        uses.setdefault((part.part, part.maker), (part, []))[1].append(USED[part.use])
    return list(uses.values())


def _old(answer: Replacement, data: Mapping[str, Any], width: int) -> list[Text]:
    out = [Text(f"Row {answer.old['rank']} of the record, to be replaced", "bold")]
    rows = parts_list(answer.old, data["request"])
    return out + labelled(rows, width)


def labelled(rows: Sequence[tuple[str, str]], width: int, indent: int = 2) -> list[Text]:
    """Labels with what they stand for, folded beside them."""
    out = []
    label_width = max(10, *(len(label) for label, _ in rows)) if rows else 10
    for label, text in rows:
        folded = paragraph(text, width - indent - label_width - 1)
        out += [
            Text(f"{'':{indent}}{label if i == 0 else '':<{label_width}} {line}")
            for i, line in enumerate(folded)
        ]
    return out


def _section(change: str, answer: Replacement, data: Mapping[str, Any], width: int) -> list[Text]:
    out = styled(f"{change}: {MEANING[change]}", width, "bold")
    rows = [row for row in data["candidates"] if row["change"] == change]
    if not rows:
        (lack,) = (lack for lack in answer.lacks if lack.change == change)
        (near,) = [row for row in data["near_misses"] if row["change"] == change] or [None]
        return out + lack_lines(lack, near, answer, width)
    for row in rows:
        out += _row(answer.board_row, row, data, width)
    return out + beside_lines(answer.before, rows, data["request"], width)


def _row(old: Row, row: Row, data: Mapping[str, Any], width: int) -> list[Text]:
    chosen = row["rank"] == data["chosen"]
    number = f"{'> ' if chosen else '  '}{row['rank']}{ASSUMED if row['assumed'] else ''}"
    positions = row["changed"]
    many = "1 position changes" if len(positions) == 1 else f"{len(positions) or 'no'} positions change"
    head = f"{number}  {clean(row['photodiode'])} with {clean(row['opamp'])}, {many}"
    said = [*changes(old, row, positions), ("cost", cost_words(old, row, data["request"]))]
    said += [("yield" if i == 0 else "", text) for i, text in enumerate(yield_words(row, data["request"]))]
    return styled(head, width, "bold" if chosen else "", "     ") + labelled(said, width, 5)
