"""The report of a board, section by section."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.planning.outline import Outline
from optimizer.planning.plan import Planned
from optimizer.record.board import build
from optimizer.record.model import BoardRecord
from optimizer.report.board import status
from optimizer.report.board.alone import alone_words
from optimizer.report.board.bill import bill_columns, bought_up_words, sum_columns
from optimizer.report.board.channels import (
    assumed_words,
    channel_columns,
    counts_of,
    requests_used,
    source_rows,
)
from optimizer.report.board.differences import change_rows, difference_words, number_words, proof_words
from optimizer.report.board.looked import looked_words, pool_columns
from optimizer.report.board.packages import level_columns, package_columns, spare_words
from optimizer.report.board.refusal import (
    conflict_words,
    eased_title,
    helpless_words,
    hopeless_lines,
    relaxation_columns,
)
from optimizer.report.board.totals import limit_words, total_columns
from optimizer.report.cautions import board_cautions, left_out
from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import styled
from optimizer.report.stepped import BOLD, grouped, joined, stacked

Data = Mapping[str, Any]
Lines = list[Text]

BAD = "bold red"


def of_planned(planned: Planned, outline: Outline, width: int) -> Lines:
    """`report` on what planning returned."""
    return report(build(outline, planned), width)


def report(record: BoardRecord, width: int) -> Lines:
    """Everything that a board's record says, as lines for a terminal of `width` columns."""
    data = record.data
    head = _head(data, width)
    if not data["plans"]:
        return joined([head, *_refusal(data, width), _looked(data, width), *_ending(data, width)])
    plan = data["plans"][0]
    return joined(
        [
            head,
            _channels(plan, data, width),
            _packages(plan, data, width),
            _levels(plan, width),
            _sources(plan, data, width),
            _bill(plan, data, width),
            _totals(plan, width),
            _paragraphs(alone_words(plan, data), width),
            _others(data, width),
            _looked(data, width),
            *_ending(data, width),
        ]
    )


def brief(record: BoardRecord, width: int) -> Lines:
    """The plan, its bill and its totals alone; why there is none; and what went wrong."""
    data = record.data
    wrong = _faults(data, width)
    if not data["plans"]:
        return joined([styled(status.verdict(data), width, BAD) + wrong, *_refusal(data, width)])
    plan = data["plans"][0]
    unproven = [] if status.is_proven(data) else styled(status.verdict(data), width)
    channels, bill = _channels(plan, data, width), _bill(plan, data, width)
    return joined([unproven + wrong, channels, bill, _totals(plan, width)])


def _head(data: Data, width: int) -> Lines:
    out = styled(clean(data["name"]), width, BOLD) + styled(status.subject(data), width)
    out += styled(status.verdict(data), width, "" if data["plans"] else BAD)
    out += styled(status.solved(data), width) + _faults(data, width)
    return out + _paragraphs(status.notes(data), width)


def _faults(data: Data, width: int) -> Lines:
    return [line for text in status.faults(data) for line in styled(text, width, BAD)]


def _paragraphs(texts: Iterable[str], width: int) -> Lines:
    return [line for text in texts for line in styled(text, width)]


def _channels(plan: Data, data: Data, width: int) -> Lines:
    title = "The plan, channel by channel"
    notes = styled(assumed_words(plan, data), width, indent="  ")
    return _table(title, grouped(channel_columns(plan, data), width), width) + notes


def _packages(plan: Data, data: Data, width: int) -> Lines:
    columns = package_columns(plan, counts_of(data))
    return _table("Op-amp packages", stacked(columns, width), width) + styled(spare_words(plan), width)


def _levels(plan: Data, width: int) -> Lines:
    if not plan["levels"]:
        return []
    return _table("Shared reference levels", stacked(level_columns(plan), width), width)


def _sources(plan: Data, data: Data, width: int) -> Lines:
    rows = source_rows(plan, data)
    return [Text("Second sources of op-amps", BOLD), *_labelled(rows, width, 2)] if rows else []


def _bill(plan: Data, data: Data, width: int) -> Lines:
    currency = f", money in {clean(data['currency'])}" if data.get("currency") else ""
    out = _table(f"Bill of materials{currency}", stacked(bill_columns(plan, data), width), width)
    out += styled(bought_up_words(plan, data), width, indent="  ")
    return [*out, Text(""), *stacked(sum_columns(plan, data), width)]


def _totals(plan: Data, width: int) -> Lines:
    out = _table("Totals against limits", stacked(total_columns(plan), width), width)
    return out + styled(limit_words(plan), width)


def _others(data: Data, width: int) -> Lines:
    """Every other plan: what it saves and costs, and by channel what is built in another way."""
    first, *others = data["plans"]
    out = styled("Other plans, by what differs from the first" if others else "", width, BOLD)
    for other in others:
        said = f"{other['rank']}  {difference_words(first, other, data)}"
        out += styled(said, width, indent="   ")
        out += _labelled(change_rows(first, other, data), width, 5)
    return out + _paragraphs((*proof_words(data), number_words(data)), width)


def _labelled(rows: Sequence[tuple[str, str]], width: int, indent: int) -> Lines:
    """Labels with what they stand for, moved in."""
    if not rows:
        return []
    labels, texts = zip(*rows, strict=True)
    columns = (Column("", labels, gives=True), Column("", texts, gives=True, least=24))
    widths = fit(columns, width - indent)
    return [Text(f"{'':{indent}}{line}") for row in range(len(rows)) for line in lines(columns, widths, row)]


def _refusal(data: Data, width: int) -> list[Lines]:
    """Channels that nothing meets, each with its own explanation; else the conflict and what would help."""
    refusal = data["refusal"]
    if refusal is None:
        return []
    sections = [part for one in refusal["hopeless"] for part in hopeless_lines(one, data, width)]
    sections.append(styled(conflict_words(data), width, BOLD))
    columns = relaxation_columns(refusal)
    eased = _table(eased_title(data), stacked(columns, width), width) if columns[0].cells else []
    return [*sections, eased + _paragraphs(helpless_words(data), width)]


def _looked(data: Data, width: int) -> Lines:
    if not data["search"]["pools"]:
        return []
    out = _table("What was looked at", stacked(pool_columns(data), width), width)
    return out + _paragraphs(looked_words(data), width)


def _ending(data: Data, width: int) -> tuple[Lines, Lines]:
    """What the model leaves out, and the cautions, each said once for all requests."""
    requests = requests_used(data)
    models = dict.fromkeys(left_out(request) for request in requests)
    return _paragraphs(models, width), styled(f"Caution: {board_cautions(requests)}", width)


def _table(title: str, drawn: Lines, width: int) -> Lines:
    """A titled table; a rule stands below the headings."""
    heads = sum(1 for line in drawn if line.style == BOLD)
    rule = "-" * max(len(line.plain) for line in drawn[:heads])
    return [*styled(title, width, BOLD), *drawn[:heads], Text(rule), *drawn[heads:]]
