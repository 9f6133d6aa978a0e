"""Many records taken up again, of shortlists and of boards, each request and set of catalogs read once."""

from __future__ import annotations

import os
from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from optimizer import record as records
from optimizer import study as studies
from optimizer.catalog.shelf import CatalogShelf
from optimizer.errors import InputError, Problem
from optimizer.planning.outline import Outline
from optimizer.planning.reading import read_board
from optimizer.record import BoardRecord, Record
from optimizer.review.board import Receiver, ReopenedBoard, receivers_of, reopen_board, with_opamp
from optimizer.review.reopen import Reopened, ReopenError, reopened
from optimizer.study import Study

Tell = Callable[[str], None]
Key = tuple[str, str, str]
"""The role, name and maker of a part."""

NAMED = (
    ("photodiode", "photodiode", "photodiode_maker"),
    ("opamp", "opamp", "opamp_maker"),
    ("resistor", "resistor_family", "resistor_maker"),
    ("capacitor", "capacitor_family", "capacitor_maker"),
    ("resistor", "divider_family", "divider_maker"),
    ("capacitor", "bypass_family", "bypass_maker"),
)
"""The role of each part of a candidate, and the keys of its name and its maker."""


@dataclass(frozen=True, slots=True)
class Taken:
    """A record by its name as typed, with its study, and the candidate that it marks as chosen.

    Of a board there is one for each way in which a channel is built, with the packages on the board.
    `board` is the board, `channel` the channel's name, and
    `pieces` those of each of its parts on the whole board, as far as no other channel stands for them.
    """

    name: str
    reopened: Reopened
    candidate: Mapping[str, Any]
    board: Outline | None = None
    channel: str | None = None
    pieces: Mapping[Key, int] | None = None


def take_up(paths: Iterable[str], tell: Tell = lambda _: None) -> list[Taken]:
    """The records at `paths`, each file once, with `tell` called as each is read.

    Raises InputError with the problems of all of them; a record that marks no candidate is one.
    """
    shelf = Shelf()
    places: dict[str, str] = {}
    for path in paths:
        places.setdefault(os.path.realpath(path), path)
    found: list[Taken] = []
    problems: dict[Problem, None] = {}
    for path in places.values():
        tell(path)
        try:
            found += shelf.taken(path)
        except ReopenError as error:
            problems |= dict.fromkeys(studies.from_here(error.problems, error.request))
        except InputError as error:
            problems |= dict.fromkeys(error.problems)
    if problems:
        raise InputError(problems)
    return found


@dataclass(slots=True)
class Shelf:
    """Requests, boards and catalogs that have been read, by their places."""

    studies: dict[str, Study] = field(default_factory=dict)
    outlines: dict[str, Outline] = field(default_factory=dict)
    catalogs: CatalogShelf = field(default_factory=CatalogShelf)

    def taken(self, path: str) -> list[Taken]:
        """What the record at `path` chooses, with its study: one candidate, or the channels of a board."""
        record = records.read_any(path)
        if isinstance(record, BoardRecord):
            opened = reopen_board(record, path, load=self.outline)
            return list(of_board(path, opened, _plan(path, opened)))
        return [Taken(path, reopened(record, path, load=self.study), _chosen(path, record))]

    def outline(self, place: Path) -> Outline:
        """The outline of the board file at `place`."""
        key = os.path.realpath(place)
        if key not in self.outlines:
            self.outlines[key] = read_board(place)
        return replace(self.outlines[key], path=place)

    def study(self, place: Path) -> Study:
        """The study of the request at `place`."""
        key = os.path.realpath(place)
        if key not in self.studies:
            self.studies[key] = studies.load(place, read=self.catalogs.read)
        return replace(self.studies[key], request=replace(self.studies[key].request, path=place))


def _chosen(path: str, record: Record) -> Mapping[str, Any]:
    for row in record.candidates:
        if row["rank"] == record.data["chosen"]:
            return row
    rule = "the record marks no candidate as chosen, so it uses no part"
    raise InputError([Problem(path, None, "chosen", None, rule, "leave it out, or choose one with --choose")])


def _plan(path: str, opened: ReopenedBoard) -> Mapping[str, Any]:
    plan = opened.record.chosen
    if plan is None:
        rule = "the record marks no plan as chosen, so it uses no part"
        raise InputError([Problem(path, None, "chosen", None, rule, "leave it out, or plan the board anew")])
    return plan


def of_board(path: str, opened: ReopenedBoard, plan: Mapping[str, Any]) -> Iterator[Taken]:
    """The channels of a board's `plan`; a part is counted once, with the first channel that uses it."""
    left = _pieces(plan)
    receivers = receivers_of(opened, plan)
    for receiver in (*receivers, *_buffers(plan, receivers)):
        mine = {key: left.pop(key) for key in _keys(receiver.built) if key in left}
        yield Taken(
            name=path,
            reopened=receiver.reopened,
            candidate=receiver.built,
            board=opened.outline,
            channel=receiver.channel,
            pieces=mine,
        )


def _pieces(plan: Mapping[str, Any]) -> Counter[Key]:
    """The pieces on a board of each part, of a family in all values."""
    pieces: Counter[Key] = Counter()
    for line in plan["bill"]:
        pieces[line["role"], line["part"], line["maker"]] += line["pieces"]
    return pieces


def _keys(candidate: Mapping[str, Any]) -> Iterator[Key]:
    for role, name, maker in NAMED:
        if candidate.get(name) is not None:
            yield role, candidate[name], candidate.get(maker) or ""


def _buffers(plan: Mapping[str, Any], receivers: Iterable[Receiver]) -> Iterator[Receiver]:
    """Packages that serve buffers alone: as the op-amp of a channel that uses the level."""
    serving = {(r.built["opamp"], r.built["opamp_maker"]) for r in receivers}
    users = {receiver.level: receiver for receiver in receivers if receiver.level is not None}
    packages = {(line["part"], line["maker"]): line["package"] for line in plan["bill"]}
    for package in plan["packages"]:
        part = package["opamp"], package["maker"]
        named = [place["level"] for place in package["places"] if place["level"] in users]
        if named and part not in serving:
            serving.add(part)
            user = users[named[0]]
            yield replace(user, built=with_opamp(user.built, part, packages.get(part)))
