"""Op-amps that are the same amplifier in different packages, for all channels of a board alike.

A package belongs to one group only. Two packages are of one group if the catalog's `family` and maker are
the same, every electrical value of one amplifier is, and every channel admits both or neither: so a plan
may count amplifiers, and buy them in whatever packages are cheapest.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Parts
from optimizer.planning.kinds import NONE, Kind
from optimizer.planning.shelf import Shelf
from optimizer.search.roles import PASSES
from optimizer.search.values import corners

Ints = NDArray[np.int64]

OF_PACKAGE = {"channels", "stock", "lead_weeks", "board_area"}
"""Number columns that differ from package to package of one amplifier."""


@dataclass(frozen=True, slots=True)
class Amplifiers:
    """The groups: their names and packages (places on the shelf), and the group of every op-amp by kind.

    `rows`: by kind, one op-amp of each group that it admits, that in the smallest package; `group`: by
    kind and op-amp, -1 where it is not admitted.
    """

    names: tuple[str, ...]
    packages: tuple[tuple[int, ...], ...]
    rows: tuple[Ints, ...]
    group: tuple[Ints, ...]


def amplifiers_of(kinds: Sequence[Kind], shelf: Shelf, limited: Sequence[str] = ()) -> Amplifiers:
    """Group the op-amps of `kinds`; those without what a limit of `limited` needs to know are left out."""
    signs: dict[int, list[Hashable]] = {}
    for number, kind in enumerate(kinds):
        for row, part in enumerate(kind.opamp_part.tolist()):
            if part != NONE and _counted(shelf, part, limited) and _admitted(kind, row):
                sign = signs.setdefault(part, [])
                sign.append((number, _electrical(kind, row)))
    groups: dict[Hashable, list[int]] = {}
    alone = any(kind.space.sources > 1 for kind in kinds)
    for part, sign in sorted(
        signs.items(), key=lambda item: (shelf.parts[item[0]].entry.amplifiers, item[0])
    ):
        groups.setdefault((part if alone else NONE, *sign), []).append(part)
    number_of = {part: g for g, parts in enumerate(groups.values()) for part in parts}
    table = np.full(len(shelf.parts) + 1, NONE, dtype=np.int64)
    for part, place in number_of.items():
        table[part] = place
    group = tuple(
        np.where([_admitted(kind, row) for row in range(kind.opamp_part.size)], table[kind.opamp_part], NONE)
        for kind in kinds
    )
    return Amplifiers(
        names=tuple(shelf.parts[parts[0]].key[2] for parts in groups.values()),
        packages=tuple(map(tuple, groups.values())),
        rows=tuple(_smallest(kind, of, shelf) for kind, of in zip(kinds, group, strict=True)),
        group=group,
    )


def _counted(shelf: Shelf, part: int, limited: Sequence[str]) -> bool:
    """Whether all is known of a package that the limits of the board need."""
    stocked = shelf.parts[part]
    if stocked.unknown_current and "supply_current" in limited:
        return False
    return not (stocked.entry.area is None and "area" in limited)


def _admitted(kind: Kind, row: int) -> bool:
    return bool(kind.space.opamp_verdicts.alone[row] == PASSES)


def _electrical(kind: Kind, row: int) -> Hashable:
    """Everything of one op-amp that a figure or a check of this kind of channel sees."""
    parts, verdicts = kind.study.catalogs.opamps, kind.space.opamp_verdicts
    values = tuple(
        _comparable(parts, column, row) for column in sorted(parts.number) if column not in OF_PACKAGE
    )
    filled = tuple(bool(mask[row]) for _, mask in sorted(parts.assumed.items()))
    own = (str(parts.text["maker"][row]), str(parts.text["family"][row]))
    footprint = int(kind.space.footprint[row]) if kind.space.sources > 1 else NONE
    return own, values, filled, verdicts.code[row].tobytes(), footprint, corners(kind.space.request)


def _comparable(parts: Parts, column: str, row: int) -> float | None:
    value = float(parts.number[column][row])
    return None if np.isnan(value) else value


def _smallest(kind: Kind, group: Ints, shelf: Shelf) -> Ints:
    """One op-amp of each group, that with the fewest amplifiers (of those the first on the shelf)."""
    rows = np.flatnonzero(group != NONE)
    size = np.array([shelf.parts[int(kind.opamp_part[row])].entry.amplifiers for row in rows])
    order = np.lexsort((kind.opamp_part[rows], size, group[rows]))
    ordered = rows[order]
    first = np.r_[True, np.diff(group[ordered]) != 0] if ordered.size else np.zeros(0, dtype=bool)
    return np.sort(ordered[first])
