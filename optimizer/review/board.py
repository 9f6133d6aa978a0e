"""A board's record found again together with its board file, requests and catalogs, as they are now.

Entry points: `reopen_board`, all of it and which input files have changed since; `plan_of`, the plan that
is meant; `receivers_of`, each way a channel is built, as a receiver by itself.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np

from optimizer.errors import InputError, Problem
from optimizer.planning.amplifiers import amplifiers_of
from optimizer.planning.kinds import kinds_of
from optimizer.planning.outline import Outline, Wanted
from optimizer.planning.reading import read_board
from optimizer.planning.shelf import Shelf
from optimizer.record import BoardRecord, Record
from optimizer.record.board import inputs_of as named_inputs
from optimizer.review.reopen import (
    COMMAND_LINE,
    Changed,
    Reopened,
    ReopenError,
    changes,
    found_at,
    inputs_of,
)
from optimizer.search.change.positions import Out
from optimizer.search.change.substitutes import barred
from optimizer.search.space import Space

Load = Callable[[Path], Outline]


@dataclass(frozen=True, slots=True)
class ReopenedBoard:
    """A board's record, its outline as the files say now, and what changed since."""

    record: BoardRecord
    outline: Outline
    changed: tuple[Changed, ...]

    def channel(self, name: str) -> Wanted:
        """The channel of that name."""
        return next(channel for channel in self.outline.channels if channel.name == name)


@dataclass(frozen=True, slots=True)
class Receiver:
    """One way a channel is built: its name and copies, and its candidate as the only one of a record.

    The candidate has the smallest package of its op-amp, `built` the one on the board.
    """

    channel: str
    copies: tuple[int, ...]
    reopened: Reopened
    candidate: Mapping[str, Any]
    built: Mapping[str, Any]
    level: str | None


def reopen_board(
    record: BoardRecord, path: str | Path, board: str | Path | None = None, *, load: Load = read_board
) -> ReopenedBoard:
    """The board's `record`, read at `path`, with its board file and all that it names, by `load`.

    `board` says where the board file is; left out, it is looked for by name beside the record, then where
    the record says it was, and the one with the recorded hash is preferred.
    Raises InputError where it cannot be found, or no longer has a channel of the record, ReopenError where
    it or a file that it names cannot be used.
    """
    inputs = inputs_of(record.data, str(path))
    recorded = record.data.get("board_file")
    place = Path(board) if board is not None else found_at(Path(path), inputs[0], recorded, "board file")
    try:
        outline = load(place)
    except InputError as error:
        raise ReopenError(error.problems, place) from None
    problems = list(_differing(record, outline, str(path)))
    if problems:
        raise InputError(problems)
    outline = _without(outline, record.data.get("replaces", {}).get("out", ()))
    return ReopenedBoard(record, outline, tuple(changes(inputs, named_inputs(outline))))


def _differing(record: BoardRecord, outline: Outline, path: str) -> Iterator[Problem]:
    """Channels of the record that the board file has otherwise, or not at all, and new ones."""
    then = {channel["name"]: channel["count"] for channel in record.data["board"]["channels"]}
    now = {channel.name: channel.count for channel in outline.channels}
    for name in dict.fromkeys((*then, *now)):
        if then.get(name) != now.get(name):
            said = f"{then.get(name, 0)} in the record and {now.get(name, 0)} in {outline.path.name}"
            rule = f"the board has other channels now: of this one, {said}"
            remedy = "plan the board again with luxsift board, and take its new record"
            yield Problem(path, None, "board.channels", name, rule, remedy)


def _without(outline: Outline, out: tuple[str, ...]) -> Outline:
    """The outline whose requests exclude what the record's plans replace: that stays gone."""
    if not out:
        return outline
    return replace(outline, channels=tuple(_excluding(channel, out) for channel in outline.channels))


def _excluding(channel: Wanted, out: tuple[str, ...]) -> Wanted:
    request = channel.study.request
    excluded = tuple(dict.fromkeys((*request.space.exclude, *out)))
    request = replace(request, space=replace(request.space, exclude=excluded))
    return replace(channel, study=replace(channel.study, request=request))


def plan_of(record: BoardRecord, rank: int | None = None) -> Mapping[str, Any]:
    """The plan with `rank`; left out, the one that the record marks as chosen. InputError where none is."""
    plans = record.plans
    wanted = record.data["chosen"] if rank is None else rank
    for plan in plans:
        if plan["rank"] == wanted:
            return plan
    typed = None if rank is None else str(rank)
    if not plans:
        rule = "the record holds no plan: nothing met its board file"
        raise InputError([Problem(COMMAND_LINE, None, None, typed, rule)])
    which = "the one plan, 1" if len(plans) == 1 else f"the rank of a plan, from 1 to {len(plans)}"
    rule, remedy = f"expected {which}", ""
    if rank is None:
        rule, remedy = f"{rule}: the record marks no plan as chosen", "give --rank"
    raise InputError([Problem(COMMAND_LINE, None, "--rank", typed, rule, remedy)])


def receivers_of(opened: ReopenedBoard, plan: Mapping[str, Any]) -> tuple[Receiver, ...]:
    """Each way a channel is built in `plan`, in the order of the record."""
    packages = {(line["part"], line["maker"]): line["package"] for line in plan["bill"]}
    return tuple(_receiver(opened, built, packages) for built in plan["channels"])


def _receiver(
    opened: ReopenedBoard, built: Mapping[str, Any], packages: Mapping[tuple[str, str], str | None]
) -> Receiver:
    """One entry of a plan as a record of its own, so that all that reads candidates can read it."""
    data, study = opened.record.data, opened.channel(built["channel"]).study
    own = {
        "name": f"{data['name']}, {built['channel']}",
        "request": data["requests"][built["request"]],
        "currency": data.get("currency"),
        "chosen": built["candidate"]["rank"],
        "candidates": [built["candidate"]],
        "near_misses": [],
    }
    record = Record({key: data[key] for key in ("created", "version", "inputs", "search")} | own)
    part = built["opamp"], built["opamp_maker"]
    return Receiver(
        channel=built["channel"],
        copies=tuple(built["copies"]),
        reopened=Reopened(record, study, opened.changed),
        candidate=built["candidate"],
        built=with_opamp(built["candidate"], part, packages.get(part)),
        level=built["level"],
    )


def with_opamp(candidate: Mapping[str, Any], part: tuple[str, str], package: str | None) -> Mapping[str, Any]:
    """`candidate` with the op-amp `part` (name and maker), which is the same amplifier, in its place."""
    if (candidate["opamp"], candidate["opamp_maker"]) == part:
        return candidate
    named = {"opamp": part[0], "opamp_maker": part[1]}
    return {**candidate, **named, "opamp_package": package, "opamp_pinout": None}


def space_of(outline: Outline, channel: Wanted, out: Out | None = None) -> Space:
    """What a channel of a board chooses from, by itself: every package of an amplifier as its smallest.

    So the supply current and cost of a receiver are those that the board's plans grade it by. What is
    `out` is not to be had, so it is the smallest of nothing.
    """
    shelf = Shelf()
    (kind,) = kinds_of(replace(outline, channels=(channel,)), shelf)
    if out is not None:
        kind = replace(kind, space=barred(kind.space, out))
    of = amplifiers_of((kind,), shelf)
    smallest = np.arange(kind.opamp_part.size)
    for row in of.rows[0]:
        smallest[of.group[0] == of.group[0][row]] = row
    opamps = kind.space.opamps
    alike = {name: getattr(opamps, name)[smallest] for name in ("spare", "cool", "single", "double")}
    return replace(kind.space, opamps=replace(opamps, **alike))
