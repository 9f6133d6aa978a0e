"""What the plan of a board stands on: what was asked, limits and cautions, inputs, how to repeat it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from shlex import quote
from typing import Any

from optimizer.errors import clean, printable
from optimizer.quantities import show
from optimizer.report.board.amounts import amount, unit_price
from optimizer.report.board.channels import requests_used
from optimizer.report.cautions import DEFER, DUTIES, SOURCES, band, left_out
from optimizer.report.page.asked import asked as asked_of
from optimizer.report.page.blocks import Block, Code, Facts, Part, Section, Table, Words, cells
from optimizer.report.page.board.tables import called, lowered
from optimizer.report.page.grounds import assumed_blocks, has_assumed, inputs_table, option, sentenced
from optimizer.report.words import count
from optimizer.review.board_dossier import BoardDossier

Data = Mapping[str, Any]


def asked(dossier: BoardDossier) -> Section:
    """The section on the board file and on the requests of its channels."""
    data = dossier.data
    board = data["board"]
    rows = tuple(
        cells(clean(one["name"]), count(one["count"]), clean(one["request"])) for one in board["channels"]
    )
    channels = Table("The channels", ("channel", "alike", "request"), rows, numbers=frozenset({1}))
    parts = [Part("Board", (channels, Facts(tuple(_facts(board)), label="Board")))]
    for name, request in data["requests"].items():
        for part in asked_of(request).parts:
            parts.append(Part(f"{clean(name)}: {lowered(part.heading)}", part.blocks))
    text = "The board file and its requests as they were in force, defaults filled in."
    return Section("request", "What was asked", (Words(text),), tuple(parts))


def _facts(board: Data) -> Iterator[tuple[str, str]]:
    yield "boards to build", count(board["quantity"])
    for name, limit in board["limits"].items():
        yield f"limit of {called(name)}", f"at most {amount(name, limit)}"
    yield "line item, a build", unit_price(board["costs"]["line_item"])
    yield "placement, each part", unit_price(board["costs"]["placement"])
    yield "makers of each op-amp position", count(board["rules"]["opamp_sources"])
    parts = board["rules"]["opamp_parts"]
    yield "op-amp part numbers", f"at most {count(parts)}" if parts else "any number"
    yield "time to plan", show(board["solve"]["time"], "time")
    yield "solver", clean(board["solve"]["solver"])


def limits(dossier: BoardDossier) -> Section:
    """The section on assumptions, on what the model leaves out, and on cautions, of all channels together."""
    requests = requests_used(dossier.data)
    bands = dict.fromkeys(band(request) for request in requests)
    texts = [text for text in (sentenced(SOURCES), *bands) if text]
    duties = Table(
        "Who decides, by where the board is used",
        ("used", "standard"),
        tuple(cells(*pair) for pair in DUTIES),
    )
    models = dict.fromkeys(left_out(request).removeprefix("Not in the model: ") for request in requests)
    parts = (
        Part("Assumed where the catalog leaves a blank", tuple(_assumed(dossier))),
        Part("Not in the model", tuple(Words(sentenced(text)) for text in models)),
        Part("Cautions", (Words(" ".join(texts), "caution", "Light"), duties, Words(DEFER))),
    )
    return Section("limits", "Assumptions, limits and cautions", (), parts)


def _assumed(dossier: BoardDossier) -> Iterator[Block]:
    """What each channel's figures use that no catalog states."""
    filled = [(receiver, one) for receiver, one in dossier.channels if has_assumed(receiver.candidate)]
    if not filled:
        yield Words("Nothing: every value that the figures of the channels use is stated in the catalogs.")
    for receiver, one in filled:
        yield Words(f"{clean(receiver.channel)}:")
        yield from assumed_blocks(receiver.candidate, one.request)


def sources(dossier: BoardDossier) -> Section:
    """The section on the inputs and on how to repeat the whole."""
    table: Block = inputs_table(dossier.data, dossier.changed)
    again = Part("To repeat it", (Words("Typed in the same folder:"), Code(tuple(_commands(dossier)))))
    return Section("sources", "Inputs and how to repeat it", (table,), (again,))


def _commands(dossier: BoardDossier) -> Iterator[str]:
    place = dossier.place
    if "replaces" not in dossier.data:  # else the record of luxsift replace, which does not name its own
        yield printable(f"luxsift board {quote(place.request)} --save {quote(place.record)}")
    rank, output = dossier.plan["rank"], option("-o", place.output)
    yield printable(f"luxsift justify {quote(place.record)} --rank {rank} {output}")
