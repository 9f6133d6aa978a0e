"""Channels with one request, compiled: the search's space, and which part number each of its choices is."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.planning.outline import Outline, Rules, Wanted
from optimizer.planning.shelf import Shelf, files_of
from optimizer.search import feed, roles
from optimizer.search.query import Query, graded, is_empty, query
from optimizer.search.space import Space, build_whole
from optimizer.study import Study

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

NONE = -1


@dataclass(frozen=True, slots=True)
class Kind:
    """All channels with one request: who they are, and how many copies in all.

    `space` grades a channel as a receiver by itself, at the board's quantity. By index of the space:
    `opamp_part`, `diode_part`, `resistor_part`, `capacitor_part` are places on the shelf, `divider` those of
    a context's two resistors and bypass (-1: there is none), `level` numbers the levels (-1 on ground).
    """

    channels: tuple[Wanted, ...]
    space: Space
    opamp_part: Ints
    diode_part: Ints
    resistor_part: Ints
    capacitor_part: Ints
    divider: Ints
    level: Ints

    @property
    def study(self) -> Study:
        """The request, with the board's quantity, and its catalogs."""
        return self.channels[0].study

    @property
    def count(self) -> int:
        """Copies on a board."""
        return sum(channel.count for channel in self.channels)

    @property
    def name(self) -> str:
        """What to call it: its channels."""
        return ", ".join(channel.name for channel in self.channels)


def kinds_of(outline: Outline, shelf: Shelf) -> tuple[Kind, ...]:
    """The kinds of channels of a board, in the order in which they are first named."""
    groups: dict[str, list[Wanted]] = {}
    for channel in outline.channels:
        groups.setdefault(channel.request, []).append(channel)
    rails: dict[tuple[float, float], int] = {}
    kinds = []
    for channels in groups.values():
        supply = channels[0].study.request.supply
        number = rails.setdefault((supply.high, supply.low), len(rails))
        kinds.append(_kind(tuple(channels), outline.rules, shelf, number))
    return tuple(kinds)


def board_space(study: Study, rules: Rules) -> Space:
    """The space in which a channel is graded: its request's own, with the second sources that `rules` ask.

    A second amplifier for a buffer comes from any package of the board, so a stock too small for two
    packages of one part does not rule out a buffered reference.
    """
    space = build_whole(study.request, study.catalogs)
    shared = replace(space.opamps, spare=np.ones_like(space.opamps.spare))
    judged = roles.judge_opamps(
        study.catalogs.opamps, study.request, space.contexts, bench=space.bench, arrays=shared
    )
    sources = max(space.sources, rules.opamp_sources)
    request = replace(space.request, resilience=replace(space.request.resilience, opamp_sources=sources))
    return replace(space, request=request, opamp_verdicts=judged, sources=sources)


def _kind(channels: tuple[Wanted, ...], rules: Rules, shelf: Shelf, rails: int) -> Kind:
    study = channels[0].study
    space, catalogs = board_space(study, rules), study.catalogs
    file = files_of(catalogs)
    divider, level = dividers_of(shelf, study, space)
    return Kind(
        channels=channels,
        space=space,
        opamp_part=shelf.rows(catalogs.opamps, file, rails),
        diode_part=shelf.rows(catalogs.photodiodes, file),
        resistor_part=_passive(shelf, study, space, "resistors"),
        capacitor_part=_passive(shelf, study, space, "capacitors"),
        divider=divider,
        level=level,
    )


def dividers_of(shelf: Shelf, study: Study, space: Space) -> tuple[Ints, Ints]:
    """The parts of each context's divider, and the number of its level; -1 on ground."""
    catalogs, x = study.catalogs, space.contexts
    file = files_of(catalogs)
    pieces = (
        shelf.values(catalogs.resistors, x.resistors.tolist(), np.nan_to_num(x.top).tolist(), file),
        shelf.values(catalogs.resistors, x.resistors.tolist(), np.nan_to_num(x.bottom).tolist(), file),
        shelf.values(catalogs.capacitors, x.bypass.tolist(), [space.bench.bypass] * x.size, file),
    )
    divider = np.column_stack(pieces)
    _, level = np.unique(divider, axis=0, return_inverse=True)
    return divider, np.where(x.divided, level.reshape(-1), NONE)


def _passive(shelf: Shelf, study: Study, space: Space, role: str) -> Ints:
    passives, parts = getattr(space, role), getattr(study.catalogs, role)
    rows = [NONE if family < 0 else passives.rows[family] for family in passives.family.tolist()]
    return shelf.values(parts, rows, passives.value.tolist(), files_of(study.catalogs))


def asked_of(kind: Kind) -> Query | None:
    """What a search for `kind` grades: everything but its cost, which prices will stand in for.

    None where an axis of the space is empty.
    """
    space = kind.space
    if is_empty(space):
        return None
    limits = {name: limit for name, limit in space.limits.items() if name != "cost"}
    return graded(query(space), limits, musts={}, comfort=space.comfort)


def affordable(asked: Query, opamps: Ints, limit: float | None) -> Bools:
    """By op-amp and photodiode: which pairs of `opamps` could, by themselves, cost at most `limit`."""
    space = asked.space
    able = np.zeros((space.opamps.gbw.size, space.diodes.price.size), dtype=bool)
    _, diodes = asked.eligible
    pairs = feed.pairs_of(asked.index, opamps, diodes, by="cost")
    fits = pairs.floor <= (np.inf if limit is None else limit)
    able[pairs.opamp[fits], pairs.diode[fits]] = True
    return able


def names_of(kinds: Sequence[Kind]) -> list[str]:
    """The channels of `kinds`, all by name."""
    return [channel.name for kind in kinds for channel in kind.channels]
