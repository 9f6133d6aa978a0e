"""Reads a board file with the requests and catalogs of its channels, or every problem in their way."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

from optimizer.catalog.parts import Source
from optimizer.errors import InputError, Problem
from optimizer.input_file import read_input
from optimizer.planning.outline import Costs, Limits, Outline, Rules, Solve, Wanted
from optimizer.planning.reading_channels import Requests, name_of
from optimizer.planning.schema import BOARD, CHANNELS
from optimizer.request.draft import is_board, other_requests
from optimizer.request.values import CATALOG_CURRENCY
from optimizer.toml.document import Document, read_document
from optimizer.toml.reading import Reading, by_line
from optimizer.toml.tables import read_tables


def read_board(path: str | Path) -> Outline:
    """Read a board file, the requests that its channels name, and their catalogs, each file once.

    Every channel's request takes the board's quantity, so that its prices and stock are those of the
    whole build. Where the board and a request want op-amps from different numbers of makers, the
    stricter of the two holds for that channel: its request takes it too, `rules` keeps the board's.

    Args:
        path: the TOML file, UTF-8; requests are relative to its folder.

    Returns:
        The board with every value in force, in SI and in the catalogs' currency.

    Raises:
        InputError: with every problem of the board file, the requests and the catalogs at once.
        MissingExtraError: an .xlsx catalog, and its reader is not installed.
    """
    where = Path(path)
    source = read_input(where, str(where), expected="a board file", hint=other_requests)
    document = read_document(source)
    _refuse_request(document)
    reading = read_tables(document.tables, BOARD, document.place)
    rows = reading.items.get(CHANNELS, [])
    _check_channels(rows, reading)
    requests = Requests(where, reading.value(("quantity",)), reading.value(("rules", "opamp_sources")))
    for row in rows:
        requests.take(row)
    requests.check_currencies()
    problems = [*sorted(reading.problems, key=by_line), *requests.problems]
    if problems:
        raise InputError(problems)
    channels = tuple(_wanted(row, requests) for row in rows)
    return _outline(reading, where, channels, requests.currency, document.sha256)


def _refuse_request(document: Document) -> None:
    """Refuse a file that is a request by its tables: all of its keys would be unknown."""
    tables = document.tables
    if is_board(tables) or not {"light", "supply"} <= tables.keys():
        return
    rule = "this is a request of one receiver, expected a board file"
    remedy = "a board file names requests under [[channels]]; `luxsift shortlist` takes a request alone"
    raise InputError([Problem(document.place.file, None, None, None, rule, remedy)])


def _check_channels(rows: Sequence[Reading], reading: Reading) -> None:
    """There is a channel, and no two have one name."""
    if not rows and not reading.is_wrong(CHANNELS):
        remedy = 'state [[channels]] with name = "turbidity", request = "turbidity.toml"'
        reading.refuse(CHANNELS, None, "a board needs at least one channel", remedy)
    names: set[str] = set()
    for row in rows:
        name = name_of(row)
        if name is not None and name in names:
            rule, remedy = "another channel has this name already", "give each a name of its own"
            if ("name",) not in row.values:
                rule = "this channel is named after its request, as another one is already"
            row.refuse(("name",), name, rule, remedy)
        elif name is not None:
            names.add(name)


def _wanted(row: Reading, requests: Requests) -> Wanted:
    return Wanted(
        name=str(name_of(row)),
        request=row.value(("request",)),
        count=row.value(("count",)),
        study=requests.study(row),
    )


def _outline(
    reading: Reading, where: Path, channels: tuple[Wanted, ...], currency: str | None, sha256: str
) -> Outline:
    def table(name: str) -> dict[str, Any]:
        return reading.table((name,))

    return Outline(
        name=reading.value(("name",)) or where.stem or "board",
        path=where,
        source=Source(where.name, sha256, 0),
        channels=channels,
        quantity=reading.value(("quantity",)),
        currency=currency or CATALOG_CURRENCY,
        limits=Limits(**table("limits")),
        costs=Costs(**table("costs")),
        rules=Rules(**table("rules")),
        solve=Solve(**table("solve")),
    )
