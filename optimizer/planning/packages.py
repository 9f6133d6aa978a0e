"""Which package serves which copies and buffers: the largest are filled first, in the channels' order."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from optimizer.planning.columns import Field, Key
from optimizer.planning.plan import Package, Place

Copy = tuple[str, int]
"""A channel by name, and which of its copies, from 1."""


@dataclass(frozen=True, slots=True)
class Taken:
    """One copy on the board: who it is, its kind, and the option that it takes."""

    copy: Copy
    kind: int
    key: Key


def packed(
    field: Field, taken: Sequence[Taken], buffers: Mapping[str, int], pieces: Mapping[int, int]
) -> tuple[Package, ...]:
    """The packages of a plan that takes `taken`, with the groups of the levels' `buffers`.

    `pieces` a board by part of the shelf.
    """
    groups = sorted({one.key[1] for one in taken} | set(buffers.values()))
    found: list[Package] = []
    for group in groups:
        found += _of_group(field, group, _places(taken, buffers, group), pieces)
    return tuple(found)


def _places(taken: Sequence[Taken], buffers: Mapping[str, int], group: int) -> list[Place]:
    places = [Place(*one.copy) for one in taken if one.key[1] == group]
    return places + [Place(None, 0, level) for level, of in buffers.items() if of == group]


def _of_group(field: Field, group: int, places: list[Place], pieces: Mapping[int, int]) -> Iterator[Package]:
    parts = field.shelf.parts
    bought = [part for part in field.amplifiers.packages[group] for _ in range(pieces.get(part, 0))]
    for part in sorted(bought, key=lambda p: -parts[p].entry.amplifiers):
        stocked = parts[part]
        size = stocked.entry.amplifiers
        served, places = places[:size], places[size:]
        yield Package(stocked.key[2], stocked.key[1], size, tuple(served))
