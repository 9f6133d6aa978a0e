"""The plan itself: channels, packages and levels, the bill of materials, totals against limits."""

from __future__ import annotations

from optimizer.report.board.bill import bill_columns, bought_up_words, sum_columns
from optimizer.report.board.channels import assumed_words, channel_columns, counts_of, source_rows
from optimizer.report.board.packages import level_columns, package_columns, spare_words
from optimizer.report.board.totals import limit_words, total_columns
from optimizer.report.layout import Column
from optimizer.report.page.blocks import Block, Part, Section, Table, Words, cells
from optimizer.report.page.board.tables import called, of_columns, termed
from optimizer.report.stepped import in_currency
from optimizer.review.board_dossier import BoardDossier


def plan(dossier: BoardDossier) -> Section:
    """The section on how each channel is built, in which packages, and what is shared."""
    data, row = dossier.data, dossier.plan
    parts, values = channel_columns(row, data)
    limiting = Column(values[-1].heading, tuple(termed(text) for text in values[-1].cells))
    caption = "Each channel with its parts, values and limiting target"
    blocks: list[Block] = [of_columns(caption, [*parts, *values[:-1], limiting])]
    blocks += _noted(assumed_words(row, data))
    number, opamp, *others = package_columns(row, counts_of(data))
    packages = of_columns("Op-amp packages and what each serves", [opamp, number, *others])
    sections = [Part("Op-amp packages", (packages, Words(spare_words(row))))]
    if row["levels"]:
        levels = of_columns(
            "Levels that channels share: each divider and buffer is there once", level_columns(row)
        )
        sections.append(Part("Shared reference levels", (levels,)))
    sources = source_rows(row, data)
    if sources:
        caption = "Op-amps of other makers in the same package and pinout that meet every target"
        rows = tuple(cells(*pair) for pair in sources)
        sections.append(Part("Second sources", (Table(caption, ("channel", "op-amps"), rows),)))
    return Section("plan", "The plan, channel by channel", tuple(blocks), tuple(sections))


def _noted(text: str) -> list[Block]:
    return [Words(text, "note")] if text else []


def bill(dossier: BoardDossier) -> Section:
    """The section on what is bought, and what it comes to."""
    data, row = dossier.data, dossier.plan
    lines = of_columns(f"Every part number, money{in_currency(data)}", bill_columns(row, data))
    name, what, build, board = sum_columns(row, data)
    rows = zip(name.cells, what.cells, build.cells, board.cells, strict=True)
    sums = Table(
        f"What the build comes to, money{in_currency(data)}",
        ("", "made of", "a build", "a board"),
        tuple(cells(*texts) for texts in rows),
        numbers=frozenset({2, 3}),
        marked=frozenset({len(name.cells) - 1}),
    )
    return Section("bill", "Bill of materials", (lines, *_noted(bought_up_words(row, data)), sums))


def totals(dossier: BoardDossier) -> Section:
    """The section that holds the board's totals to their limits."""
    row = dossier.plan
    name, *others = total_columns(row)
    named = Column("total", tuple(called(text) for text in name.cells))
    marked = frozenset(i for i, total in enumerate(row["totals"]) if total["name"] == row["limiting"])
    table = of_columns("What one board uses, and what is left of each limit", [named, *others], marked)
    return Section("totals", "Totals against limits", (table, *_noted(limit_words(row))))
