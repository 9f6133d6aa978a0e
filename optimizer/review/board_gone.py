"""What is gone from a board: named by the user, called obsolete by the catalogs, or vanished from them.

Entry point: `gone_from`, what of each receiver and which packages must be replaced, and what may stay.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from optimizer.catalog.parts import Catalogs
from optimizer.errors import InputError, Problem, clean, did_you_mean
from optimizer.review.board import Receiver, ReopenedBoard, receivers_of, space_of
from optimizer.review.exposure import no_longer
from optimizer.review.reopen import COMMAND_LINE
from optimizer.review.withdrawal import (
    NAMED,
    OBSOLETE,
    RECORDED,
    VANISHED,
    WHY,
    Wish,
    Withdrawal,
    Withdrawn,
    is_named,
    kept_yet_gone,
    taken_away,
)
from optimizer.search.change.positions import board_of
from optimizer.search.space import Space
from optimizer.study import part_names


@dataclass(frozen=True, slots=True)
class Hit:
    """One receiver of a board: what is withdrawn from it, and why it does not hold as it stands.

    `space` is what it chooses from, without what is gone. `moves`: whether it may change, because
    something is withdrawn, it no longer holds, or it shares a level with one that may change.
    """

    receiver: Receiver
    space: Space
    taken: Withdrawal
    stale: tuple[str, ...]
    moves: bool

    @property
    def catalogs(self) -> Catalogs:
        """Its catalogs."""
        return self.receiver.reopened.study.catalogs

    @property
    def hit(self) -> bool:
        """Whether it cannot stay as it is."""
        return bool(self.taken.parts or self.stale)


@dataclass(frozen=True, slots=True)
class Gone:
    """All receivers of a plan, every part that is gone from the board, and names to exclude from now on.

    `packages`: how many op-amp packages are gone.
    """

    hits: tuple[Hit, ...]
    parts: tuple[Withdrawn, ...]
    names: tuple[str, ...]
    packages: int


def gone_from(opened: ReopenedBoard, plan: Mapping[str, Any], wish: Wish) -> Gone:
    """What `wish` and the catalogs take away from a board's `plan`.

    Raises InputError with every problem: an unknown name, names that the board does not use, nothing gone
    at all, and a position to keep whose part is gone.
    """
    problems = list(_unknown(opened, wish.gone))
    if problems:
        raise InputError(problems)
    hits = tuple(_hit(opened, receiver, wish) for receiver in receivers_of(opened, plan))
    parts = _each_once(part for hit in hits for part in hit.taken.parts)
    packages, lost = _packages(opened, plan, wish)
    parts = _each_once((*parts, *lost))
    problems = [*_idle(plan, parts, hits, wish.gone), *kept_yet_gone(parts, wish.keep)]
    if problems:
        raise InputError(problems)
    names = tuple(sorted({name for hit in hits for name in hit.taken.names}))
    return Gone(_closed(hits, _levels_hit(plan, lost)), parts, names, packages)


def _hit(opened: ReopenedBoard, receiver: Receiver, wish: Wish) -> Hit:
    study = receiver.reopened.study
    channel = opened.channel(receiver.channel)
    space = space_of(opened.outline, channel)
    taken = taken_away(study.catalogs, board_of(space, study.catalogs, receiver.built), wish)
    space = space_of(opened.outline, channel, taken.plan.out)
    stale = () if taken.parts else tuple(no_longer(space, study.catalogs, receiver.built))
    return Hit(receiver, space, taken, stale, moves=bool(taken.parts or stale))


def _closed(hits: Sequence[Hit], levels: set[str]) -> tuple[Hit, ...]:
    """The same, with all moving that share a level with one that moves, or use one of `levels`."""
    levels = levels | {hit.receiver.level for hit in hits if hit.moves and hit.receiver.level is not None}
    return tuple(
        Hit(hit.receiver, hit.space, hit.taken, hit.stale, hit.moves or hit.receiver.level in levels)
        for hit in hits
    )


def _each_once(parts: Sequence[Withdrawn] | Iterator[Withdrawn]) -> tuple[Withdrawn, ...]:
    return tuple(dict.fromkeys(parts))


def _packages(
    opened: ReopenedBoard, plan: Mapping[str, Any], wish: Wish
) -> tuple[int, tuple[Withdrawn, ...]]:
    """How many packages of the plan are gone, and their parts."""
    found, count = [], 0
    for package in plan["packages"]:
        why = _why_gone(opened, (package["opamp"], package["maker"]), wish)
        if why is not None:
            count += 1
            found.append(Withdrawn("opamp", package["opamp"], package["maker"], why))
    return count, tuple(dict.fromkeys(found))


def _why_gone(opened: ReopenedBoard, part: tuple[str, str], wish: Wish) -> str | None:
    """Why no catalog of the board has an op-amp any more; None where one has."""
    name, maker = part
    if {name, f"{maker}/{name}"} & set(wish.gone):
        return NAMED
    statuses = set()
    for channel in opened.outline.channels:
        parts = channel.study.catalogs.opamps
        rows = (parts.text["part"] == name) & (parts.text["maker"] == maker)
        statuses |= set(parts.text["status"][np.flatnonzero(rows)].tolist())
    if not statuses:
        return VANISHED
    return OBSOLETE if statuses == {OBSOLETE} else None


def _levels_hit(plan: Mapping[str, Any], lost: Sequence[Withdrawn]) -> set[str]:
    """The levels whose buffers are in packages that are gone."""
    gone = {(part.part, part.maker) for part in lost}
    return {
        place["level"]
        for package in plan["packages"]
        for place in package["places"]
        if place["level"] is not None and (package["opamp"], package["maker"]) in gone
    }


def _unknown(opened: ReopenedBoard, names: Sequence[str]) -> Iterator[Problem]:
    """Names that neither the catalogs of a channel nor the record hold."""
    known = {name for channel in opened.outline.channels for name in part_names(channel.study.catalogs)}
    for plan in opened.record.plans:
        known |= {name for line in plan["bill"] for name in (line["part"], f"{line['maker']}/{line['part']}")}
        for built in plan["channels"]:
            known |= {built["candidate"].get(name) or "" for name, _ in RECORDED}
    known -= {""}
    for name in names:
        if name not in known:
            rule = "neither the catalogs nor the record hold such a part"
            yield Problem(COMMAND_LINE, None, "--gone", name, rule, did_you_mean(name, sorted(known)))


def _idle(
    plan: Mapping[str, Any], parts: Sequence[Withdrawn], hits: Sequence[Hit], names: Sequence[str]
) -> Iterator[Problem]:
    """Why there is nothing to replace."""
    which = f"plan {plan['rank']}"
    used = ", ".join(dict.fromkeys(clean(line["part"]) for line in plan["bill"]))
    if not names and not parts and not any(hit.stale for hit in hits):
        rule = f"no part of {which} is obsolete, or missing from the catalogs"
        yield Problem(COMMAND_LINE, None, "--gone", None, rule, f"name what is gone; it uses {used}")
    elif names and not any(is_named(part, names) for part in parts):
        lost = ", ".join(dict.fromkeys(f"{clean(part.part)} is {WHY[part.why]}" for part in parts))
        remedy = f"it uses {used}" + (f"; without --gone, {lost}" if lost else "")
        yield Problem(COMMAND_LINE, None, "--gone", " ".join(names), f"{which} does not use it", remedy)
