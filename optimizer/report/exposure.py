"""How much hangs on each part, as a terminal and a CSV file show it: the worst first."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from rich.text import Text

from optimizer.errors import clean
from optimizer.report.csv_file import table_text
from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import paragraph, styled
from optimizer.report.words import count, several
from optimizer.review.exposure import Exposures
from optimizer.review.supply import Exposure
from optimizer.review.withdrawal import VANISHED

USED = {
    "photodiode": "photodiode",
    "opamp": "op-amp",
    "feedback_resistance": "Rf",
    "feedback_capacitance": "Cf",
    "divider": "divider",
    "bypass": "bypass",
}
ALERT = "!"
NAMED = 4  # records of one part; beyond, they are only counted
BAD = "bold red"
WIDE = 72  # columns from which the status has a column of its own
ORDER = (
    "Worst first: parts without a substitute, then by status (no longer in the catalogs, obsolete, "
    "last-time-buy, not for new designs), short of stock, fewest drop-ins, fewest by values, fewest makers, "
    "longest lead time."
)
SUBSTITUTES = (
    "drop-in: other parts that meet every target in the same package and pinout with nothing else changed; "
    "values: others that do with other values of Rf, Cf or the divider. "
)
MAKERS = "Makers: those that offer the part or a drop-in for it."
COUNTED_IN_ONE = SUBSTITUTES + MAKERS
COUNTED = f"{SUBSTITUTES}With several records only those count that serve all of them. {MAKERS}"
CAUTION = (
    "A substitute here meets the request by catalog values: check it against its data sheet and on the "
    "bench, and have anything that carries a safety function certified again."
)
CSV_COLUMNS = (
    "part",
    "maker",
    "uses",
    "status",
    "stock",
    "needed",
    "lead_weeks",
    "makers",
    "drop_ins",
    "values",
    "fewest_in_a_record",
    "records",
)


def exposure_lines(found: Exposures, records: int, width: int) -> list[Text]:
    """The table of parts for a terminal of `width` columns, and what it means."""
    parts = found.parts
    alone, lost = (sum(map(test, parts)) for test in (lambda one: one.alone, lambda one: one.lost))
    said = f"{several(len(parts), 'part')} in {several(records, 'record')}"
    out = styled(said, width, "bold")
    out += styled(_verdict(alone, lost), width, BAD if alone or lost else "")
    out += [Text(""), *_table(parts, width), Text("")]
    for one in found.stale:
        why = f"{clean(one.record)} no longer holds as it stands ({', '.join(one.why)})"
        out += styled(why, width, indent="  ")
    return out + [line for text in (COUNTED, ORDER, CAUTION) for line in styled(text, width)]


def _verdict(alone: int, lost: int) -> str:
    said = []
    if alone:
        said.append(f"{count(alone)} {'has' if alone == 1 else 'have'} no substitute in the same footprint")
    if lost:
        said.append(f"{count(lost)} {'is' if lost == 1 else 'are'} obsolete or no longer in the catalogs")
    return (
        f"{'; '.join(said)}."
        if said
        else "Every part has a substitute in its footprint, and none is obsolete."
    )


def _table(parts: Sequence[Exposure], width: int) -> list[Text]:
    narrow = width < WIDE
    columns = [
        Column("", tuple(ALERT if one.alone or one.lost else "" for one in parts)),
        Column("part", tuple(_named(one) for one in parts), gives=True),
        *([] if narrow else [Column("status", tuple(one.status or "-" for one in parts), gives=True)]),
        Column("stock", tuple(_number(one.stock) for one in parts), right=True),
        Column("needed", tuple(count(one.needed) for one in parts), right=True),
        Column("lead,\nweeks", tuple(_number(one.lead_weeks) for one in parts), right=True),
        Column("makers", tuple(count(one.makers) for one in parts), right=True),
        Column("drop-in", tuple(count(one.drop_ins) for one in parts), right=True),
        Column("values", tuple(count(one.values) for one in parts), right=True),
    ]
    widths = fit(columns, width)
    out = [Text(line, "bold") for line in lines(columns, widths, -1)]
    out.append(Text("-" * min(width, max(len(line.plain) for line in out))))
    for index, one in enumerate(parts):
        out += [Text(line, "bold" if one.alone else "") for line in lines(columns, widths, index)]
        out += _notes(one, width, status=narrow)
    return out


def _named(one: Exposure) -> str:
    return f"{clean(one.part)}\n{', '.join(USED[use] for use in one.uses)}"


def _number(value: float | None) -> str:
    return "-" if value is None else f"{value:,.0f}"


def _notes(one: Exposure, width: int, *, status: bool) -> Iterator[Text]:
    """Under a part: what is wrong with it, in words, and where it is used; its `status` where asked for."""
    wrong = list(wrong_words(one))
    indent = "   "
    for line in paragraph("; ".join(wrong), width - len(indent)) if wrong else ():
        yield Text(indent + line, BAD)
    where = f"in {_where(one.records)}"
    for line in paragraph(f"{one.status}, {where}" if status and one.status else where, width - len(indent)):
        yield Text(indent + line)


def wrong_words(one: Exposure) -> Iterator[str]:
    """What is wrong with the supply of a part, the worst first."""
    if not one.fewest:
        blank = "" if one.outlined else ": its package or pinout is not known, so nothing counts as one"
        yield f"NO SUBSTITUTE in its footprint{blank}"
    elif one.alone:
        yield "NO SUBSTITUTE in its footprint that serves every record, though each has its own"
    if one.status == VANISHED:
        yield "no longer in the catalogs"
    elif one.status in ("obsolete", "last-time-buy"):
        yield one.status
    if one.short:
        yield f"{count(one.needed - int(one.stock or 0))} short"


def _where(records: Sequence[str]) -> str:
    named = ", ".join(clean(name) for name in records[:NAMED])
    more = len(records) - NAMED
    return f"{named} and {several(more, 'more record')}" if more > 0 else named


def exposure_csv(found: Exposures) -> str:
    """Every part as one row of CSV text, in the order of the table; empty where unknown.

    Text that a spreadsheet would run as a formula is led by an apostrophe.
    """
    rows = (
        (
            *(one.part, one.maker, "; ".join(one.uses), one.status),
            *(one.stock, one.needed, one.lead_weeks, one.makers, one.drop_ins, one.values, one.fewest),
            "; ".join(one.records),
        )
        for one in found.parts
    )
    return table_text(CSV_COLUMNS, rows)
