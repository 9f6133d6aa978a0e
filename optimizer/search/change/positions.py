"""What a substitute changes on a board: which positions, and how much of the board each change costs.

A board is one candidate, seen by its footprints. Every choice of the space is graded against it, axis by
axis: unchanged, or one of four kinds of change. A candidate's change is the greatest of its axes:

- `drop-in`: each withdrawn part gives way to one in the same package and pinout (a passive: to the same
  value of another family in the same package), and nothing else changes;
- `values`: besides that, Rf, Cf or the divider take other values, or come from another family, in the
  packages that are there; a capacitor may be left out;
- `footprint`: a withdrawn part gives way to one in another package or pinout, or a passive to one in
  another package; a capacitor is placed where there was none;
- `redesign`: a part that is not withdrawn changes, or the wiring, the kind of reference, its buffering,
  the number of packages, the low-pass.

Blank packages and pinouts never count as equal; a family always fits where it was.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.request.types import WIRINGS
from optimizer.search.change.outlines import cell
from optimizer.search.locate import POSITIONS, SAME_CUTOFF, referred, same
from optimizer.search.space import Choice, Space
from optimizer.search.values import Passives

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

SAME, DROP_IN, VALUES, FOOTPRINT, REDESIGN, OUT = range(6)
CHANGES = ("drop-in", "values", "footprint", "redesign")
"""The kinds of change, the least first; `CHANGES[grade - 1]` names a grade. OUT is no choice at all."""

USES = ("photodiode", "opamp", "feedback_resistance", "feedback_capacitance", "divider", "bypass")
"""Where a board uses a part."""

RECORDED = dict(zip(USES, ("photodiode", "opamp", "resistor", "capacitor", "divider", "bypass"), strict=True))
"""What the keys of a record that are about the part in each use begin with."""


@dataclass(frozen=True, slots=True)
class Fitted:
    """A part on the board; `maker` None: not known (any of that name). Blanks of its outline are ''."""

    name: str
    maker: str | None
    package: str
    pinout: str = ""

    def rows(self, parts: Parts, column: str) -> Bools:
        """Where `parts` hold it, by the text `column` that names them."""
        named = parts.text[column] == self.name
        return np.asarray(named if self.maker is None else named & (parts.text["maker"] == self.maker))


@dataclass(frozen=True, slots=True)
class Board:
    """One candidate: its parts by use (those that it has), and its other choices as a record holds them."""

    parts: Mapping[str, Fitted]
    candidate: Mapping[str, Any]

    @property
    def buffered(self) -> bool:
        """Whether a second amplifier drives the reference."""
        return bool(self.candidate["reference"]["buffered"])

    @property
    def extra_package(self) -> bool:
        """Whether that takes a second package."""
        return bool(self.candidate["reference"]["extra_package"])


@dataclass(frozen=True, slots=True)
class Out:
    """Catalog rows that are not to be had, by role."""

    opamps: Bools
    photodiodes: Bools
    resistors: Bools
    capacitors: Bools


@dataclass(frozen=True, slots=True)
class Plan:
    """What is asked of substitutes: the `board`, its `withdrawn` uses, what is `out`, positions to `keep`."""

    board: Board
    withdrawn: frozenset[str]
    out: Out
    keep: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True)
class Axis:
    """Along one axis of the space: how many positions each choice changes, and the grade of the change."""

    changed: Ints
    grade: Ints


@dataclass(frozen=True, slots=True)
class Grades:
    """The axes of a space, in the order of the columns of a `Choice`."""

    opamp: Axis
    diode: Axis
    context: Axis
    resistor: Axis
    capacitor: Axis
    low_pass: Axis

    @property
    def axes(self) -> tuple[Axis, ...]:
        """The six axes."""
        return (self.opamp, self.diode, self.context, self.resistor, self.capacitor, self.low_pass)


def board_of(space: Space, catalogs: Catalogs, candidate: Mapping[str, Any]) -> Board:
    """The board of a record's `candidate`.

    Outlines are the catalogs' for parts that are in them, else the record's. Where the record does not
    say which families a divider's parts come from, they are those that `space` prices today.
    """
    parts = {
        "photodiode": _active(catalogs.photodiodes, candidate, "photodiode"),
        "opamp": _active(catalogs.opamps, candidate, "opamp"),
        **{
            use: _family(catalogs.resistors, candidate, RECORDED[use])
            for use in ("feedback_resistance", "divider")
        },
        **{
            use: _family(catalogs.capacitors, candidate, RECORDED[use])
            for use in ("feedback_capacitance", "bypass")
        },
    }
    if candidate["reference"]["kind"] == "divider":
        level = np.flatnonzero(referred(space, candidate["reference"]))[:1]
        for use, priced in (("divider", space.contexts.resistors), ("bypass", space.contexts.bypass)):
            if parts[use] is None and level.size:
                of = catalogs.resistors if use == "divider" else catalogs.capacitors
                parts[use] = _listed(of, int(priced[level[0]]))
    return Board({use: part for use, part in parts.items() if part is not None}, candidate)


def _active(parts: Parts, candidate: Mapping[str, Any], role: str) -> Fitted:
    name, maker = str(candidate[role]), str(candidate[f"{role}_maker"])
    rows = np.flatnonzero(Fitted(name, maker, "").rows(parts, "part"))
    if rows.size:
        package, pinout = (cell(parts, column, int(rows[0])) for column in ("package", "pinout"))
    else:
        package, pinout = candidate.get(f"{role}_package"), candidate.get(f"{role}_pinout")
    return Fitted(name, maker, package or "", pinout or "")


def _family(parts: Parts, candidate: Mapping[str, Any], name: str) -> Fitted | None:
    family = candidate.get(f"{name}_family")
    if family is None:
        return None
    maker, package = candidate.get(f"{name}_maker"), candidate.get(f"{name}_package")
    rows = np.flatnonzero(Fitted(family, maker, "").rows(parts, "family"))
    return Fitted(family, maker, (cell(parts, "package", int(rows[0])) if rows.size else package) or "")


def _listed(parts: Parts, row: int) -> Fitted | None:
    family = cell(parts, "family", row)
    if family is None:
        return None
    return Fitted(family, cell(parts, "maker", row), cell(parts, "package", row) or "")


def outlines_of(board: Board) -> dict[str, str | None]:
    """The outlines of a board's parts by the keys of a record."""
    said: dict[str, str | None] = {}
    for use, part in board.parts.items():
        name = RECORDED[use]
        said[f"{name}_package"] = part.package or None
        if use in ("photodiode", "opamp"):
            said[f"{name}_pinout"] = part.pinout or None
        elif use in ("divider", "bypass"):
            said |= {f"{name}_family": part.name, f"{name}_maker": part.maker}
    return said


def graded(space: Space, catalogs: Catalogs, plan: Plan) -> Grades:
    """Every choice of `space` against the plan's board."""
    board = plan.board
    opamp = _actives(catalogs.opamps, plan, "opamp", plan.out.opamps)
    if board.buffered:
        another = space.opamps.spare == board.extra_package
        opamp = Axis(opamp.changed, np.maximum(opamp.grade, np.where(another, REDESIGN, SAME)))
    return Grades(
        opamp=opamp,
        diode=_actives(catalogs.photodiodes, plan, "photodiode", plan.out.photodiodes),
        context=_contexts(space, catalogs, plan),
        resistor=_passives(
            (space.resistors, catalogs.resistors), plan, "feedback_resistance", plan.out.resistors
        ),
        capacitor=_passives(
            (space.capacitors, catalogs.capacitors), plan, "feedback_capacitance", plan.out.capacitors
        ),
        low_pass=_low_passes(space, plan),
    )


def positions_of(space: Space, board: Board, grades: Grades, choice: Choice) -> list[tuple[str, ...]]:
    """The positions that each setting changes on `board`, in the order of POSITIONS."""
    rewired = (~wired(space, board)).astype(np.int64)[choice.context]
    changed = {
        "photodiode": grades.diode.changed[choice.diode],
        "opamp": grades.opamp.changed[choice.opamp],
        "wiring": rewired,
        "reference": grades.context.changed[choice.context] - rewired,
        "feedback_resistance": grades.resistor.changed[choice.resistor],
        "feedback_capacitance": grades.capacitor.changed[choice.capacitor],
        "low_pass": grades.low_pass.changed[choice.low_pass],
    }
    return [tuple(name for name in POSITIONS if changed[name][row]) for row in range(choice.opamp.size)]


def _axis(changed: Bools, grade: Any, *, frozen: bool, out: Any = False) -> Axis:
    out = out | (changed if frozen else False)
    return Axis(changed.astype(np.int64), np.where(out, OUT, grade).astype(np.int64))


def _actives(parts: Parts, plan: Plan, role: str, out: Bools) -> Axis:
    old = plan.board.parts[role]
    own = old.rows(parts, "part")
    grade = np.full(parts.size, REDESIGN)
    if role in plan.withdrawn:
        fits = (parts.text["package"] == old.package) & (parts.text["pinout"] == old.pinout)
        grade = np.where(fits & bool(old.package and old.pinout), DROP_IN, FOOTPRINT)
    return _axis(~own, np.where(own, SAME, grade), frozen=role in plan.keep, out=out)


def fits(parts: Parts, rows: Ints, old: Fitted | None) -> Bools:
    """Where a family of `parts` (catalog rows, -1: none) fits where `old` was."""
    if old is None:
        return np.asarray(rows < 0)
    alike = old.rows(parts, "family") | ((parts.text["package"] == old.package) & bool(old.package))
    return np.asarray(np.r_[alike, True][rows])


def _passives(choices: tuple[Passives, Parts], plan: Plan, position: str, out: Bools) -> Axis:
    offered, parts = choices
    old = plan.board.parts.get(position)
    rows = np.r_[np.array(offered.rows, dtype=np.int64), -1][offered.family]
    own = rows < 0 if old is None else np.r_[old.rows(parts, "family"), False][rows]
    valued = same(offered.value, float(plan.board.candidate[position]))
    kept = valued & own
    other = np.where(valued & (position in plan.withdrawn), DROP_IN, VALUES)
    grade = np.where(fits(parts, rows, old), other, FOOTPRINT)
    gone = np.r_[out, False][rows]
    return _axis(~kept, np.where(kept, SAME, grade), frozen=position in plan.keep, out=gone)


def _low_passes(space: Space, plan: Plan) -> Axis:
    cutoff = plan.board.candidate["low_pass"]
    constant = 0.0 if cutoff is None else 1.0 / (2.0 * np.pi * float(cutoff))
    own = same(space.low_passes, constant, SAME_CUTOFF)
    return _axis(~own, np.where(own, SAME, REDESIGN), frozen="low_pass" in plan.keep)


def wired(space: Space, board: Board) -> Bools:
    """Where the contexts of `space` have the board's wiring."""
    name = board.candidate["wiring"]
    return np.asarray(space.contexts.wiring == (WIRINGS.index(name) if name in WIRINGS else -1))


def _contexts(space: Space, catalogs: Catalogs, plan: Plan) -> Axis:
    x, board = space.contexts, plan.board
    same_wiring = wired(space, board)
    level = referred(space, board.candidate["reference"]) & (x.buffered == board.buffered)
    afresh = level & x.divided & bool({"divider", "bypass"} & plan.withdrawn)
    kind = (x.divided == (board.candidate["reference"]["kind"] == "divider")) & (x.buffered == board.buffered)
    grade = np.where(same_wiring & kind, _dividers(space, catalogs, plan, level), REDESIGN)
    lost = x.divided & ~np.isfinite(x.cost)
    lost = lost | (~same_wiring & ("wiring" in plan.keep)) | (~level & ("reference" in plan.keep))
    changed = (~same_wiring).astype(np.int64) + (~level | afresh)
    return Axis(changed, np.where(lost, OUT, grade).astype(np.int64))


def _dividers(space: Space, catalogs: Catalogs, plan: Plan, level: Bools) -> Ints:
    """What the divider of each context costs the board, where it has one; `level`: where it is the board's.

    A bypass that is not withdrawn stays where it is at any level.
    """
    x, parts = space.contexts, plan.board.parts
    fit = fits(catalogs.resistors, x.resistors, parts.get("divider"))
    stays = level & ("divider" not in plan.withdrawn)
    grade = np.where(stays, SAME, np.where(fit, np.where(level, DROP_IN, VALUES), FOOTPRINT))
    if "bypass" in plan.withdrawn:
        fit = fits(catalogs.capacitors, x.bypass, parts.get("bypass"))
        grade = np.maximum(grade, np.where(fit, DROP_IN, FOOTPRINT))
    return np.where(x.divided, grade, SAME)
