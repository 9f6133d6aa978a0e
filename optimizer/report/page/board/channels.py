"""Each channel held to its own request: targets with margins, and every figure worked by hand."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import partial
from typing import Any

from optimizer.quantities import show
from optimizer.report.board.channels import copies_words, counts_of
from optimizer.report.chosen import parts_list
from optimizer.report.page.blocks import Block, Figure, Part, Section, Table, Words, cells
from optimizer.report.page.board.tables import lowered
from optimizer.report.page.decision import compliance, sentence
from optimizer.report.page.draw.compare import Bars, draw_margins
from optimizer.report.page.formulas import formulas
from optimizer.report.page.terms import joined, merged, term
from optimizer.report.words import margin_words
from optimizer.review.board import Receiver
from optimizer.review.board_dossier import BoardDossier
from optimizer.review.dossier import Dossier

Row = Mapping[str, Any]
GRADED = (
    "Each channel is graded as a receiver by itself, with the smallest package of its op-amp: supply current "
    "and cost of the board are those of the totals above. The figures were computed again for this page."
)


def channels(dossier: BoardDossier) -> Section:
    """The section that holds each channel's targets to its limits."""
    parts = tuple(_channel(dossier, receiver, one) for receiver, one in dossier.channels)
    figure: tuple[Block, ...] = (_margins(dossier),) if len(dossier.channels) > 1 else ()
    return Section("compliance", "Compliance of each channel", (Words(GRADED), *figure), parts)


def _channel(dossier: BoardDossier, receiver: Receiver, one: Dossier) -> Part:
    rows = tuple(cells(*pair) for pair in merged(parts_list(receiver.built, one.request)))
    table = Table("The channel, part by part", ("position", "part"), rows)
    held = compliance(one)
    said = Words(sentence(receiver.built, one.request).replace("Build the receiver", "Build it", 1))
    return Part(_name(dossier, receiver), (said, table, *held.blocks))


def _name(dossier: BoardDossier, receiver: Receiver) -> str:
    built = {"channel": receiver.channel, "copies": receiver.copies}
    return copies_words(built, counts_of(dossier.data))


def worked(dossier: BoardDossier) -> Section:
    """The section of every channel's figures worked by hand."""
    text, parts = None, []
    for receiver, one in dossier.channels:
        own = formulas(one)
        text = text or own.blocks
        name = _name(dossier, receiver)
        parts += [Part(f"{name}: {lowered(part.heading)}", part.blocks) for part in own.parts]
    return Section("formulas", "How each figure comes about", text or (), tuple(parts))


def _margins(dossier: BoardDossier) -> Figure:
    """The margins of all channels side by side, over the targets that all of them have."""
    rows = [(_name(dossier, receiver), receiver.candidate) for receiver, _ in dossier.channels]
    held = [{target["name"] for target in row["targets"]} for _, row in rows]
    targets = [t["name"] for t in rows[0][1]["targets"] if all(t["name"] in names for names in held)]
    comfort = min(one.request["ranking"]["comfort"] for _, one in dossier.channels)
    limited = [f"{name} by {term(row['limiting'])} ({margin_words(row['margin'])})" for name, row in rows]
    least = min(range(len(rows)), key=lambda i: float(rows[i][1]["margin"]))
    alternative = (
        f"Bars of the margins of each channel, one panel a target that all of them have. Limited: "
        f"{joined(limited)}. Bars end at {show(comfort, 'fraction')}. The channel with the least margin is "
        "marked."
    )
    bars = [
        Bars(name, _by_target(row, targets), marked=place == least) for place, (name, row) in enumerate(rows)
    ]
    draw = partial(draw_margins, bars, [term(name) for name in targets], comfort)
    return Figure(
        "margins", "Margins of the channels side by side", alternative, draw, _data(rows, targets), 600
    )


def _by_target(row: Row, targets: Sequence[str]) -> list[float]:
    margins = {target["name"]: float(target["margin"]) for target in row["targets"]}
    return [margins[name] for name in targets]


def _data(rows: Sequence[tuple[str, Row]], targets: Sequence[str]) -> Table:
    table = tuple(
        cells(name, *(margin_words(margin) for margin in _by_target(row, targets))) for name, row in rows
    )
    headings = ("channel", *(term(name) for name in targets))
    return Table("Margins by channel and target", headings, table, numbers=frozenset(range(1, len(headings))))
