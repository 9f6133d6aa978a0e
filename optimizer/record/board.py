"""From a board file and what planning it returned to the record that every command on records reads."""

from __future__ import annotations

import posixpath
from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import asdict
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any

from optimizer.record.build import candidate_row, installed_version, plain, yield_row
from optimizer.record.model import BOARD_FORMAT, BoardRecord

if TYPE_CHECKING:
    from optimizer.catalog.parts import Source
    from optimizer.planning.outline import Outline, Wanted
    from optimizer.planning.plan import BoardPlan, Build, Package, Planned, Refusal, Total


def build(outline: Outline, planned: Planned) -> BoardRecord:
    """Write down what the board file asks and what planning it came to; the first plan is marked as chosen.

    Files are named as seen from the board file's folder, each once. Money is a board's, save `cost` and
    `bound` of plans and of channels alone (cents a build) and of the bill (a build).
    """
    from optimizer.planning.in_force import in_force

    data = {
        "format": BOARD_FORMAT,
        "name": outline.name,
        "created": datetime.now(UTC).isoformat(timespec="seconds"),
        "version": installed_version(),
        "board": in_force(outline),
        "board_file": outline.path.as_posix(),
        "requests": _requests(outline),
        "chosen": planned.plans[0].rank if planned.plans else None,
        "currency": _currency(outline),
        "inputs": [asdict(source) for source in inputs_of(outline)],
        "left_out": _left_out(outline),
        "search": _search(planned),
        "plans": [_plan(outline, plan) for plan in planned.plans],
        "alone": None if planned.alone is None else asdict(planned.alone),
        "refusal": None if planned.refusal is None else _refusal(planned.refusal),
    }
    return BoardRecord(plain(data))


def inputs_of(outline: Outline) -> list[Source]:
    """Every input file once, as seen from the board file's folder: itself, the requests, their catalogs."""
    named: dict[str, Source] = {}
    for source in (outline.source, *_request_files(outline), *_catalog_files(outline)):
        named.setdefault(source.file, source)
    return list(named.values())


def _request_files(outline: Outline) -> Iterator[Source]:
    for channel in outline.channels:
        source = channel.study.request_source
        yield type(source)(seen_from_board(channel.request), source.sha256, source.rows)


def _catalog_files(outline: Outline) -> Iterator[Source]:
    for channel in outline.channels:
        for source in channel.study.catalogs.sources:
            file = seen_from_board(channel.request, source.file)
            yield type(source)(file, source.sha256, source.rows)


def seen_from_board(request: str, file: str | None = None) -> str:
    """`file`, named as seen from its request's folder, as seen from the board's; alone, the request's."""
    path = request if file is None else posixpath.join(posixpath.dirname(request), file)
    return posixpath.normpath(path)


def _requests(outline: Outline) -> dict[str, Any]:
    """The requests in force by their paths as the board file writes them."""
    from optimizer.request.in_force import in_force

    return {channel.request: in_force(channel.study.request) for channel in outline.channels}


def _currency(outline: Outline) -> str | None:
    from optimizer.request.values import CATALOG_CURRENCY

    found = (channel.study.catalogs.currency for channel in outline.channels)
    stated = None if outline.currency == CATALOG_CURRENCY else outline.currency
    return stated or next((currency for currency in found if currency), None)


def _left_out(outline: Outline) -> list[dict[str, Any]]:
    """How many rows of each file were left out on the user's word."""
    rows: dict[str, int] = {}
    for channel in outline.channels:
        counted = Counter(entry.file for entry in channel.study.catalogs.left_out)
        rows |= {seen_from_board(channel.request, file): number for file, number in counted.items()}
    return [{"file": file, "rows": number} for file, number in sorted(rows.items())]


def _search(planned: Planned) -> dict[str, Any]:
    """How the plans were found; `proven` and `bound` are those of the first plan."""
    first = planned.plans[0] if planned.plans else None
    return {
        "status": planned.status,
        "solver": planned.solver,
        "seconds": planned.seconds,
        "rounds": planned.rounds,
        "floor": planned.floor,
        "bound": None if first is None else first.bound,
        "proven": "none" if first is None else first.proven,
        "only": planned.only,
        "faults": planned.faults,
        "notes": planned.notes,
        "pools": [asdict(pool) for pool in planned.pools],
    }


def _plan(outline: Outline, plan: BoardPlan) -> dict[str, Any]:
    channels = {channel.name: channel for channel in outline.channels}
    return {
        "rank": plan.rank,
        "cost": plan.cost,
        "bound": plan.bound,
        "proven": plan.proven,
        "totals": [_total(total) for total in plan.totals],
        "limiting": plan.limiting,
        "channels": [_channel(build, plan.rank, channels) for build in plan.builds],
        "packages": [_package(package) for package in plan.packages],
        "levels": [asdict(level) for level in plan.levels],
        "bill": [asdict(line) for line in plan.bill],
    }


def _total(total: Total) -> dict[str, Any]:
    return asdict(total) | {"margin": total.margin}


def _channel(build: Build, rank: int, channels: Mapping[str, Wanted]) -> dict[str, Any]:
    """How some copies of a channel are built; the candidate as a row of a shortlist's record.

    `opamp` is the package on the board, the candidate's the smallest of the same amplifier.
    """
    wanted = channels[build.channel]
    drawn = yield_row(build.candidate.simulated, wanted.study.request.tolerance.yield_)
    return {
        "channel": build.channel,
        "copies": build.copies,
        "request": wanted.request,
        "level": build.level,
        "opamp": build.opamp or build.candidate.opamp,
        "opamp_maker": build.opamp_maker or build.candidate.opamp_maker,
        "candidate": candidate_row(build.candidate, rank) | drawn,
    }


def _package(package: Package) -> dict[str, Any]:
    return {
        "opamp": package.opamp,
        "maker": package.maker,
        "amplifiers": package.amplifiers,
        "spare": package.spare,
        "places": [asdict(place) for place in package.places],
    }


def _refusal(refusal: Refusal) -> dict[str, Any]:
    """Why there is no plan; near misses of hopeless channels as rows of a shortlist's record."""
    return {
        "hopeless": [
            {
                "channel": one.channel,
                "request": one.request,
                "impossible": one.impossible,
                "blocking": one.blocking,
                "near_misses": [
                    candidate_row(near, rank) | {"missed": near.missed}
                    for rank, near in enumerate(one.near_misses, 1)
                ],
                "dropped": dict(sorted(one.dropped.items())),
            }
            for one in refusal.hopeless
        ],
        "limits": refusal.limits,
        "channels": refusal.channels,
        "smallest": refusal.smallest,
        "relaxations": [asdict(relaxation) for relaxation in refusal.relaxations],
    }
