"""How each channel of a plan is built: parts, values, reference and limiting target."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.board.amounts import numbered
from optimizer.report.cells import ASSUMED, limiting_column, named, part_columns, value_columns
from optimizer.report.chosen import second_sources
from optimizer.report.layout import Column
from optimizer.report.notes import filled
from optimizer.report.yields import yield_cell

Data = Mapping[str, Any]


def channel_columns(plan: Data, data: Data) -> tuple[list[Column], list[Column]]:
    """One row for each way a channel is built: its parts, then its values and what limits it."""
    builds = plan["channels"]
    rows = [as_built(build) for build in builds]
    names = tuple(copies_words(build, counts_of(data)) for build in builds)
    references = tuple(reference_words(build) for build in builds)
    _, *values = value_columns(rows, _all_low_passes(data))
    parts = [Column("channel", names, gives=True), *part_columns(rows)]
    parts.append(Column("reference", references, gives=True))
    if any("yield" in row for row in rows):
        values.append(Column("yield", tuple(yield_cell(row) for row in rows), right=True))
    return parts, [*values, limiting_column(rows)]


def _all_low_passes(data: Data) -> dict[str, Any]:
    """The low-passes of all requests, as one request has them."""
    spaces = (request["space"] for request in data["requests"].values())
    return {"space": {"low_pass": [cutoff for space in spaces for cutoff in space["low_pass"]]}}


def as_built(build: Data) -> dict[str, Any]:
    """The candidate of a build with the op-amp package on the board that serves it."""
    row = build["candidate"]
    return {**row, **{key: build.get(key) or row[key] for key in ("opamp", "opamp_maker")}}


def counts_of(data: Data) -> dict[str, int]:
    """How many there are of each channel."""
    return {channel["name"]: channel["count"] for channel in data["board"]["channels"]}


def copies_words(build: Data, counts: Mapping[str, int]) -> str:
    """A channel with how many are built so: 'level', 'turbidity x2', 'turbidity 1, 3'."""
    name, built = clean(build["channel"]), len(build["copies"])
    if built < counts[build["channel"]]:
        return f"{name} {numbered(build['copies'])}"
    return name if built == 1 else f"{name} x{built}"


def reference_words(build: Data) -> str:
    """'ground', a divider of the channel's own, or the shared level that it uses."""
    reference = build["candidate"]["reference"]
    if reference["kind"] == "ground":
        return "ground"
    whose = "own" if build["level"] is None else clean(build["level"])
    return f"{show(reference['voltage'], 'voltage')}, {whose}"


def source_rows(plan: Data, data: Data) -> list[tuple[str, str]]:
    """Each way of building a channel with the op-amps that serve it, where others than the chosen one do."""
    counts = counts_of(data)
    return [
        (copies_words(build, counts), f"{named(as_built(build), 'opamp')} {others}")
        for build in plan["channels"]
        if (others := second_sources(build["candidate"]))
    ]


def assumed_words(plan: Data, data: Data) -> str:
    """What the mark of assumed values stands for, by channel; '' where none is set."""
    found: dict[tuple[str, str], list[str]] = {}
    for build in plan["channels"]:
        request = data["requests"][build["request"]]
        for name in build["candidate"]["assumed"]:
            channels = found.setdefault((name, filled(name, request)), [])
            channels += [] if build["channel"] in channels else [build["channel"]]
    said = (f"{name}{value} ({', '.join(found[name, value])})" for name, value in sorted(found))
    where = clean("; ".join(said))
    return f"{ASSUMED} assumed where the catalog leaves a blank: {where}" if where else ""


def requests_used(data: Data) -> Sequence[Data]:
    """The requests in force of all channels, each once, in the order of the board file."""
    names = dict.fromkeys(channel["request"] for channel in data["board"]["channels"])
    return [data["requests"][name] for name in names]
