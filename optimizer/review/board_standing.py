"""A board that is built, in terms of the ways to build it anew: its packages and levels, what ways change."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

import numpy as np

from optimizer.board.keeping import Standing
from optimizer.planning.columns import Assembled, Field
from optimizer.planning.kinds import NONE, Kind
from optimizer.review.board_field import Ways
from optimizer.review.board_gone import Gone
from optimizer.search.locate import referred

Divider = tuple[int, int, int]
"""Top, bottom and bypass of a divider by place on the shelf."""


def standing_of(
    plan: Mapping[str, Any], gone: Gone, of: tuple[Field, Assembled], ways: Sequence[Ways]
) -> Standing:
    """The board as it is built, in terms of the one to choose from."""
    field_, made = of
    names = [level["name"] for level in plan["levels"]]
    packages, lost = _packages_of(plan, field_, made)
    there = _dividers_there(made, ways)
    return Standing(
        packages=packages,
        lost=lost,
        moves=tuple(tuple(way.moves[key] for key in keys) for way, keys in zip(ways, made.keys, strict=True)),
        homes=tuple(None if h.receiver.level is None else names.index(h.receiver.level) for h in gone.hits),
        kin=tuple(_kin(name, gone, field_, there) for name in names),
        swaps=0 if any("opamp" in hit.taken.plan.keep for hit in gone.hits) else None,
    )


def _packages_of(plan: Mapping[str, Any], of: Field, made: Assembled) -> tuple[dict[int, int], int]:
    """The old packages by part of the board to choose from, and how many are of none of them."""
    place = {part: index for index, part in enumerate(made.parts)}
    counts: dict[int, int] = {}
    lost = 0
    for package in plan["packages"]:
        part = place.get(_shelf_place(package, plan, of))
        if part is None:
            lost += 1
        else:
            counts[part] = counts.get(part, 0) + 1
    return counts, lost


def _shelf_place(package: Mapping[str, Any], plan: Mapping[str, Any], of: Field) -> int:
    """The op-amp of a package by place on the shelf, on the rails of what it serves; NONE where unknown."""
    levels = {place["level"] for place in package["places"]}
    served = {(place["channel"], place["copy"]) for place in package["places"]}
    for place, built in enumerate(plan["channels"]):
        if built["level"] in levels or any((built["channel"], copy) in served for copy in built["copies"]):
            parts = of.kinds[place].study.catalogs.opamps.text
            rows = (parts["part"] == package["opamp"]) & (parts["maker"] == package["maker"])
            found = of.kinds[place].opamp_part[np.flatnonzero(rows)]
            if found.size:
                return int(found[0])
    return NONE


def _kin(name: str, gone: Gone, of: Field, dividers_there: Mapping[int, Divider]) -> frozenset[int]:
    """The references that are the level of that name as it stands: of the same parts, all of its own."""
    users = [place for place, hit in enumerate(gone.hits) if hit.receiver.level == name]
    if any({"divider", "bypass"} & gone.hits[place].taken.plan.withdrawn for place in users):
        return frozenset()
    own = {divider for place in users for divider in _divider_of(place, gone, of)}
    return frozenset(reference for reference, divider in dividers_there.items() if divider in own)


def _divider_of(place: int, gone: Gone, of: Field) -> Iterator[Divider]:
    """The parts of the level that a receiver has."""
    kind = of.kinds[place]
    here = referred(kind.space, gone.hits[place].receiver.candidate["reference"])
    for row in np.flatnonzero(here & kind.space.contexts.buffered)[:1]:
        yield _parts(kind, int(row))


def _parts(kind: Kind, context: int) -> Divider:
    top, bottom, bypass = kind.divider[context].tolist()
    return top, bottom, bypass


def _dividers_there(made: Assembled, ways: Sequence[Ways]) -> dict[int, Divider]:
    """The divider of each reference of the board to choose from."""
    found: dict[int, Divider] = {}
    for way, channel, keys in zip(ways, made.board.channels, made.keys, strict=True):
        for option, key in zip(channel.options, keys, strict=True):
            if option.reference is not None:
                found[option.reference] = _parts(way.pool.kind, way.pool.held[key][1][2])
    return found
