"""What was found out about a part: the answer first, then checks, targets and the settings behind it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.answer import answer, called
from optimizer.report.cautions import cautions, left_out
from optimizer.report.checks import check_words
from optimizer.report.chosen import parts_list
from optimizer.report.layout import GAP, Column, fit, lines
from optimizer.report.notes import filled, impossible_lines
from optimizer.report.paragraphs import paragraph, styled
from optimizer.report.reached import proof, reach_columns
from optimizer.report.words import several
from optimizer.search.inquiry.eligibility import FAILED, Check
from optimizer.search.inquiry.finding import Finding, Subject, Wired

HEADING, BAD, GOOD = "bold", "red", "green"
MEETS, MISSES = "bold", "bold red"
REACHED = 4
"""Columns of what can be reached; those of the setting of largest margin follow."""


def whynot_lines(finding: Finding, record: Mapping[str, Any], width: int) -> list[Text]:
    """Everything that was found out, as lines for a terminal of `width` columns.

    `record` is the data of `optimizer.record.whynot.as_record`.
    """
    heading = styled(clean(record["name"]), width, HEADING)
    if finding.impossible:
        return heading + impossible_lines(record, width)
    sections = [
        heading + _answer(finding, record, width),
        *(_checked(subject, width) for subject in finding.subjects),
        _wirings(finding, width),
        _settings(finding, width),
        _reached(finding, record, width),
        _setting(record, width),
        _best(finding, record, width),
        styled(left_out(record["request"]), width),
        styled(f"Caution: {cautions(record['request'])}", width),
    ]
    return _joined(sections)


def _joined(sections: Sequence[list[Text]]) -> list[Text]:
    out: list[Text] = []
    for section in filter(None, sections):
        out += ([Text("")] if out else []) + section
    return out


def _answer(finding: Finding, record: Mapping[str, Any], width: int) -> list[Text]:
    first, *rest = answer(finding, record)
    out = styled(first, width, MEETS if finding.meets else MISSES)
    return out + [line for text in rest for line in styled(text, width)]


def _table(columns: Sequence[Column], width: int, least: int = 8) -> list[Text]:
    widths = fit(columns, width - 2, least)
    out = [Text("  " + line, HEADING) for line in lines(columns, widths, -1)]
    for row in range(len(columns[0].cells)):
        out += [_toned("  " + line) for line in lines(columns, widths, row)]
    return out


def _toned(line: str) -> Text:
    text = Text(line)
    text.highlight_regex(r"(under )?\S+ % to spare|\S+-fold to spare|exactly met", GOOD)
    text.highlight_regex(r"misses by (under )?\S+ %|does not exist|\bfails\b|\bnever\b", BAD)
    return text


def check_rows(checks: Sequence[Check]) -> list[tuple[str, str, str]]:
    """Key, verdict and numbers of each check."""
    return [(check.key, check.verdict, check_words(check)) for check in checks]


def _checks(checks: Sequence[Check], width: int) -> list[Text]:
    rows = check_rows(checks)
    columns = (
        Column("check", tuple(key for key, _verdict, _why in rows)),
        Column("verdict", tuple(verdict for _key, verdict, _why in rows)),
        Column("numbers", tuple(why for _key, _verdict, why in rows), gives=True),
    )
    return _table(columns, width, least=24)


def _checked(subject: Subject, width: int) -> list[Text]:
    title = f"Checks of {called(subject.part)} by itself"
    return styled(title, width, HEADING) + _checks(subject.checks, width)


def _wirings(finding: Finding, width: int) -> list[Text]:
    """In which wirings, on which references, the named parts pass; nothing where that is everywhere."""
    if all(one.passing == one.levels and one.ground is not False for one in finding.wired):
        return []
    columns = (
        Column("wiring", tuple(one.wiring for one in finding.wired)),
        Column("ground", tuple({None: "-", True: "passes", False: "fails"}[w.ground] for w in finding.wired)),
        Column("divider", tuple(_levels(one) for one in finding.wired), gives=True),
    )
    many = (
        "both pass"
        if sum(s.part.role in ("opamps", "photodiodes") for s in finding.subjects) > 1
        else "it passes"
    )
    return styled(f"Where {many}", width, HEADING) + _table(columns, width, least=24)


def _levels(one: Wired) -> str:
    if not one.levels:
        return "-"
    if one.low is None or one.high is None:
        return f"none of {several(one.levels, 'level')}"
    span = f"{show(one.low, 'voltage')} to {show(one.high, 'voltage')}"
    return f"{one.passing} of {several(one.levels, 'level')}, Vref {span}"


def _settings(finding: Finding, width: int) -> list[Text]:
    if not finding.settings:
        return []
    stopped = any(check.verdict == FAILED for check in finding.settings)
    which = "of the setting that gets furthest" if stopped else "at the setting of largest margin"
    tried = several(finding.pairs, "pair")
    title = f"Checks {which} ({finding.eligible:,} of {tried} pass in some setting)"
    return styled(title, width, HEADING) + _checks(finding.settings, width)


def _reached(finding: Finding, record: Mapping[str, Any], width: int) -> list[Text]:
    if not finding.reaches or finding.largest is None:
        return []
    columns = reach_columns(finding, record["request"])
    tables = [columns]
    if not _fits(columns, width):
        tables = [columns[:REACHED], (columns[0], *columns[REACHED:])]
    title = styled("What is reached of each target", width, HEADING)
    notes = [line for text in proof(finding, record["request"]) for line in styled(text, width)]
    return title + [line for table in tables for line in _table(table, width)] + notes


def _fits(columns: Sequence[Column], width: int) -> bool:
    return sum(fit(columns, width - 2)) + GAP * (len(columns) - 1) <= width - 2


def _setting(record: Mapping[str, Any], width: int) -> list[Text]:
    if not record["near_misses"]:
        return []
    row = record["near_misses"][0]
    return [Text("The setting of largest margin", HEADING), *_parts(row, record, width)]


def _best(finding: Finding, record: Mapping[str, Any], width: int) -> list[Text]:
    if finding.best is None or finding.best == finding.largest:
        return []
    by = record["request"]["ranking"]["by"]
    return [Text(f"The best setting by {by}", HEADING), *_parts(record["candidates"][0], record, width)]


def _parts(row: Mapping[str, Any], record: Mapping[str, Any], width: int) -> Iterator[Text]:
    for label, text in parts_list(row, record["request"]):
        yield from _indented(label, text, width)
    yield from _assumed(row, record["request"], width)


def _assumed(row: Mapping[str, Any], request: Mapping[str, Any], width: int) -> Iterator[Text]:
    """The filled blanks that the figures rest on, and which figures are the linear model's."""
    if row["assumed"]:
        names = "; ".join(f"{clean(name)}{filled(name, request)}" for name in row["assumed"])
        yield from _indented("assumed", f"where the catalog leaves a blank: {names}", width)
    if row.get("linear_model"):
        text = f"{', '.join(row['linear_model'])}: the dark output rests on the lower rail (dark_on_rail)"
        yield from _indented("linear", text, width)


def _indented(label: str, text: str, width: int) -> Iterator[Text]:
    for index, line in enumerate(paragraph(text, width - 13)):
        yield Text(f"  {label if index == 0 else '':<10} {line}")
