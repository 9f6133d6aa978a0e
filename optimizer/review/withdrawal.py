"""What is gone from a board: named by the user, called obsolete by the catalogs, or vanished from them.

Entry point: `withdrawal`, the plan that the search for substitutes takes, with what was withdrawn and why.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.errors import InputError, Problem, clean, did_you_mean
from optimizer.review.reopen import COMMAND_LINE, Reopened
from optimizer.search.change.positions import USES, Board, Fitted, Out, Plan, board_of
from optimizer.search.space import Space
from optimizer.study import part_names
from optimizer.vocabulary import NAMES

Bools = NDArray[np.bool_]

NAMED, OBSOLETE, VANISHED = "named", "obsolete", "vanished"
CATALOG_OF = {
    "photodiode": "photodiodes",
    "opamp": "opamps",
    "feedback_resistance": "resistors",
    "feedback_capacitance": "capacitors",
    "divider": "resistors",
    "bypass": "capacitors",
}
"""Which catalog each use of a part buys from."""

RECORDED = (
    ("photodiode", "photodiode_maker"),
    ("opamp", "opamp_maker"),
    ("resistor_family", "resistor_maker"),
    ("capacitor_family", "capacitor_maker"),
    ("divider_family", "divider_maker"),
    ("bypass_family", "bypass_maker"),
)
"""Where a candidate of a record names its parts and their makers."""


@dataclass(frozen=True, slots=True)
class Wish:
    """What the user asks: names of parts that are gone, and of positions to keep."""

    gone: tuple[str, ...] = ()
    keep: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Withdrawn:
    """A part that the board can no longer have, in one use, and why: NAMED, OBSOLETE or VANISHED."""

    use: str
    part: str
    maker: str | None
    why: str


@dataclass(frozen=True, slots=True)
class Withdrawal:
    """The plan for the search, what is withdrawn, and every name (maker/part) that the user took away."""

    plan: Plan
    parts: tuple[Withdrawn, ...]
    names: tuple[str, ...]


def withdrawal(reopened: Reopened, space: Space, candidate: Mapping[str, Any], wish: Wish) -> Withdrawal:
    """What `wish` takes away from `candidate`, and what its catalogs no longer have.

    Raises InputError with every problem: an unknown name, a name that the candidate does not use, nothing
    gone at all, and a position to keep whose part is gone.
    """
    catalogs = reopened.study.catalogs
    board = board_of(space, catalogs, candidate)
    problems = list(_unknown(wish.gone, catalogs, reopened))
    if problems:
        raise InputError(problems)
    taken = taken_away(catalogs, board, wish)
    problems = [*_idle(taken.parts, board, wish.gone), *kept_yet_gone(taken.parts, wish.keep)]
    if problems:
        raise InputError(problems)
    return taken


def taken_away(catalogs: Catalogs, board: Board, wish: Wish) -> Withdrawal:
    """What `wish` and the catalogs take away from `board`, whatever it be."""
    out = _out(catalogs, wish.gone)
    parts = tuple(_withdrawn(catalogs, board, wish.gone, out))
    plan = Plan(board, frozenset(part.use for part in parts), out, frozenset(wish.keep))
    return Withdrawal(plan, parts, tuple(_names_of(catalogs, parts, wish.gone)))


def catalog_of(catalogs: Catalogs, use: str) -> Parts:
    """The catalog that `use` buys from."""
    parts: Parts = getattr(catalogs, CATALOG_OF[use])
    return parts


def rows_of(catalogs: Catalogs, use: str, part: Fitted) -> Bools:
    """Where the catalogs hold `part`."""
    parts = catalog_of(catalogs, use)
    return part.rows(parts, NAMES[parts.role])


def _out(catalogs: Catalogs, names: Sequence[str]) -> Out:
    """What is out of each catalog: what the user names, and what the catalog calls obsolete."""

    def out(parts: Parts) -> Bools:
        named = _named(parts, names)
        return np.asarray(named | (parts.text["status"] == OBSOLETE)) if "status" in parts.text else named

    roles = (catalogs.opamps, catalogs.photodiodes, catalogs.resistors, catalogs.capacitors)
    return Out(*(out(parts) for parts in roles))


def _named(parts: Parts, names: Sequence[str]) -> Bools:
    """Where a row is named by its part (or family) alone or as maker/part."""
    own = parts.text[NAMES[parts.role]]
    both = np.char.add(np.char.add(parts.text["maker"], "/"), own)
    return np.asarray(np.isin(own, list(names)) | np.isin(both, list(names)))


def _withdrawn(catalogs: Catalogs, board: Board, names: Sequence[str], out: Out) -> Iterator[Withdrawn]:
    for use in USES:
        part = board.parts.get(use)
        if part is None:
            continue
        rows = rows_of(catalogs, use, part)
        mask: Bools = getattr(out, CATALOG_OF[use])
        if not rows.any():
            yield Withdrawn(use, part.name, part.maker, VANISHED)
        elif not (rows & ~mask).any():
            named = bool((rows & _named(catalog_of(catalogs, use), names)).any())
            yield Withdrawn(use, part.name, part.maker, NAMED if named else OBSOLETE)


def _unknown(names: Iterable[str], catalogs: Catalogs, reopened: Reopened) -> Iterator[Problem]:
    """Names that neither the catalogs nor the record hold."""
    known = {name for name in part_names(catalogs) if name}
    for row in (*reopened.record.candidates, *reopened.record.near_misses):
        known |= set(_recorded(row))
    for name in names:
        if name not in known:
            rule = "neither the catalogs nor the record hold such a part"
            yield Problem(COMMAND_LINE, None, "--gone", name, rule, did_you_mean(name, sorted(known)))


def _recorded(row: Mapping[str, Any]) -> Iterator[str]:
    """The parts of a candidate, each as its name alone and as maker/part."""
    for name, maker in RECORDED:
        if row.get(name):
            yield row[name]
            yield f"{row.get(maker) or ''}/{row[name]}"


def is_named(part: Withdrawn, names: Sequence[str]) -> bool:
    """Whether `names` hold the part, alone or as maker/part."""
    if part.maker is None:
        return any(name.rpartition("/")[2] == part.part for name in names)
    return part.part in names or f"{part.maker}/{part.part}" in names


def _idle(parts: Sequence[Withdrawn], board: Board, names: Sequence[str]) -> Iterator[Problem]:
    """Why there is nothing to replace."""
    row = f"row {board.candidate['rank']}"
    used = ", ".join(dict.fromkeys(clean(part.name) for part in board.parts.values()))
    if not names and not parts:
        rule = f"no part of {row} is obsolete, or missing from the catalogs"
        yield Problem(COMMAND_LINE, None, "--gone", None, rule, f"name what is gone; it uses {used}")
    elif names and not any(is_named(part, names) for part in parts):
        said = " ".join(names)
        lost = ", ".join(dict.fromkeys(f"{clean(part.part)} is {WHY[part.why]}" for part in parts))
        remedy = f"it uses {used}" + (f"; without --gone, {lost}" if lost else "")
        yield Problem(COMMAND_LINE, None, "--gone", said, f"{row} does not use it", remedy)


WHY = {NAMED: "named as gone", OBSOLETE: "obsolete in the catalogs", VANISHED: "no longer in the catalogs"}


def kept_yet_gone(parts: Sequence[Withdrawn], keep: Sequence[str]) -> Iterator[Problem]:
    """Positions that are to be kept although their part is gone."""
    for part in parts:
        if part.use in keep:
            why = f"--gone {clean(part.part)}" if part.why == NAMED else WHY[part.why]
            rule = f"cannot be kept, for its {clean(part.part)} is gone ({why})"
            yield Problem(COMMAND_LINE, None, "--keep", part.use, rule)


def _names_of(catalogs: Catalogs, parts: Sequence[Withdrawn], names: Sequence[str]) -> list[str]:
    """Every maker/part that the user named or that has vanished."""
    taken = {f"{part.maker or ''}/{part.part}" for part in parts if part.why != OBSOLETE}
    for listed in (catalogs.opamps, catalogs.photodiodes, catalogs.resistors, catalogs.capacitors):
        column = listed.text[NAMES[listed.role]]
        taken |= {
            f"{listed.text['maker'][row]}/{column[row]}" for row in np.flatnonzero(_named(listed, names))
        }
    return sorted(taken)
