"""What a catalog file holds and what looks wrong in it, as tables for a terminal."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from rich.text import Text

from optimizer.errors import clean, shortened
from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import styled
from optimizer.report.words import count, several

if TYPE_CHECKING:
    from optimizer.catalog.inspect import Inspection

LISTED = 20
LONGEST = 400  # characters of one reason, which quotes the cell
LINES = 10  # of one part that stands many times
ROLES = {  # one, many
    "opamps": ("op-amp", "op-amps"),
    "photodiodes": ("photodiode", "photodiodes"),
    "resistors": ("resistor family", "resistor families"),
    "capacitors": ("capacitor family", "capacitor families"),
}
INDENT = "  "
EITHER = ("from", "to", "values")  # a family states a range or a list, never both


def inspection_lines(found: Inspection, width: int) -> list[Text]:
    """Everything `found` says about one file."""
    out = styled(_title(found), width, "bold")
    for section in (
        _complete(found, width),
        _blanks(found, width),
        _suspicions(found, width),
        _duplicates(found, width),
        _left_out(found, width),
        _unused(found, width),
    ):
        out += section
    return out


def _title(found: Inspection) -> str:
    currency = f", prices in {found.currency}" if found.currency else ""
    rows = "" if found.rows == found.parts else f" in {count(found.rows)} rows"
    state = "; UNUSABLE as it is, see the problems" if found.problems else ""
    parts = f"{count(found.parts)} {ROLES[found.role][found.parts != 1]}"
    return f"{clean(found.file)}: {parts}{rows}{currency}{state}"


def _complete(found: Inspection, width: int) -> list[Text]:
    names = [column.column for column in found.columns if not column.unknown and column.column not in EITHER]
    return styled(f"Known for every part: {', '.join(names) or 'no column'}.", width, indent=INDENT)


def _blanks(found: Inspection, width: int) -> list[Text]:
    short = [column for column in found.columns if column.unknown and column.column not in EITHER]
    if not short:
        return []
    table = (
        Column("blank in", tuple(column.column for column in short), gives=True),
        Column("parts", tuple(count(column.unknown) for column in short), right=True),
        Column("known", tuple(count(column.known) for column in short), right=True),
        Column("a blank is", tuple(column.default or "unknown" for column in short), gives=True),
        Column(
            "[assume]\nwould admit",
            tuple("" if column.admits is None else count(column.admits) for column in short),
            right=True,
        ),
    )
    out = _table(table, width)
    example = next((column.column for column in short if column.admits), None)
    if example is not None:
        text = f"Admitted by one line such as [assume.{found.role}] {example} = ... in the request."
        out += styled(text, width, indent=INDENT)
    return out


def _suspicions(found: Inspection, width: int) -> list[Text]:
    return _listed(
        f"Unusual values: {count(len(found.suspicions))}, which may be true (nothing is refused for them)",
        len(found.suspicions),
        [
            (f"line {unusual.row}", unusual.column, clean(unusual.value), clean(unusual.reason))
            for unusual in found.suspicions[:LISTED]
        ],
        width,
    )


def _duplicates(found: Inspection, width: int) -> list[Text]:
    return _listed(
        f"On several lines: {several(len(found.duplicates), 'part')}",
        len(found.duplicates),
        [(clean(same.name), clean(same.maker), _lines(same.rows)) for same in found.duplicates[:LISTED]],
        width,
    )


def _left_out(found: Inspection, width: int) -> list[Text]:
    return _listed(
        f"Left out as source.toml says: {several(len(found.left_out), 'row')}",
        len(found.left_out),
        [(f"line {entry.row}", shortened(clean(entry.reason), LONGEST)) for entry in found.left_out],
        width,
    )


def _lines(rows: Sequence[int]) -> str:
    more = f" and {count(len(rows) - LINES)} more" if len(rows) > LINES else ""
    return f"lines {', '.join(map(str, rows[:LINES]))}{more}"


def _unused(found: Inspection, width: int) -> list[Text]:
    if not found.unused:
        return []
    return styled(f"Headers not used: {', '.join(map(clean, found.unused))}.", width, indent=INDENT)


def _listed(title: str, whole: int, rows: Sequence[tuple[str, ...]], width: int) -> list[Text]:
    """A title over `rows`, and how many more there are in the `whole` list; empty without any."""
    if not rows:
        return []
    table = tuple(Column("", cells, gives=True) for cells in zip(*rows, strict=True))
    out = [*styled(title, width), *_table(table, width)]
    if whole > len(rows):
        out.append(Text(f"{INDENT}... and {count(whole - len(rows))} more like these"))
    return out


def _table(columns: Sequence[Column], width: int) -> list[Text]:
    widths = fit(columns, width - len(INDENT), least=14)
    headed = any(column.heading for column in columns)
    out = [Text(INDENT + line, "bold") for line in lines(columns, widths, -1)] if headed else []
    for row in range(len(columns[0].cells)):
        out += [Text(INDENT + line) for line in lines(columns, widths, row)]
    return out
