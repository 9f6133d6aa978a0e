"""One question to the search: which parts, which values and which targets, and what ranks.

The shortlist is one such question. Others restrict the space (to a part, to values that a board has
already), grade other targets, or ask that some be met without grading them.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import feed
from optimizer.search.bounds import Goals
from optimizer.search.contexts import Contexts
from optimizer.search.crew import Found, gathered, nothing
from optimizer.search.hunt import Rules
from optimizer.search.roles import PASSES, Verdicts
from optimizer.search.space import Space, build_whole
from optimizer.search.values import Passives
from optimizer.search.view import Index, lay_out

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]
Table = TypeVar("Table", Contexts, Passives)


@dataclass(frozen=True, slots=True)
class Query:
    """A space laid out for the search, with what is graded in it."""

    space: Space
    index: Index

    @property
    def goals(self) -> Goals:
        """What is graded, and what must only be met."""
        space = self.space
        return Goals(space.bench, space.limits, space.comfort, space.musts)

    @property
    def eligible(self) -> tuple[Ints, Ints]:
        """Op-amps and photodiodes that pass all checks of their own in some context."""
        opamps, diodes = self.space.opamp_verdicts.alone, self.space.diode_verdicts.alone
        return np.flatnonzero(opamps == PASSES), np.flatnonzero(diodes == PASSES)


def query(space: Space) -> Query:
    """Lay out `space`, which must not be empty on any axis."""
    return Query(space, lay_out(space))


def whole(request: Request, catalogs: Catalogs) -> Space:
    """The space of `request` with every family of capacitors, to be restricted before it is searched."""
    return build_whole(request, catalogs)


def graded(asked: Query, limits: Mapping[str, float], *, musts: Mapping[str, float], comfort: float) -> Query:
    """`asked` with other targets graded, `musts` to be met ungraded, margins from `comfort` up alike."""
    space = replace(asked.space, limits=dict(limits), musts=dict(musts), comfort=comfort)
    return Query(space, replace(asked.index, space=space))


@dataclass(frozen=True, slots=True)
class Masks:
    """Which contexts, resistors, capacitors and low-passes of a space stay; None: all of them."""

    contexts: Bools | None = None
    resistors: Bools | None = None
    capacitors: Bools | None = None
    low_passes: Bools | None = None


def restricted(space: Space, masks: Masks) -> Space:
    """What is left of `space`; an axis may come out empty (see `is_empty`)."""
    contexts, opamps, diodes = space.contexts, space.opamp_verdicts, space.diode_verdicts
    capacitance = space.diodes.capacitance
    if masks.contexts is not None:
        contexts = _kept(contexts, masks.contexts)
        _, group = np.unique(contexts.group, return_inverse=True)
        contexts = replace(contexts, group=np.asarray(group, dtype=np.int64))
        opamps, diodes = _seen(opamps, masks.contexts), _seen(diodes, masks.contexts)
        capacitance = capacitance[:, masks.contexts]
    resistors, capacitors, low_passes = space.resistors, space.capacitors, space.low_passes
    return replace(
        space,
        contexts=contexts,
        opamp_verdicts=opamps,
        diode_verdicts=diodes,
        diodes=replace(space.diodes, capacitance=capacitance),
        resistors=resistors if masks.resistors is None else _kept(resistors, masks.resistors),
        capacitors=capacitors if masks.capacitors is None else _kept(capacitors, masks.capacitors),
        low_passes=low_passes if masks.low_passes is None else low_passes[masks.low_passes],
    )


def is_empty(space: Space) -> bool:
    """Whether some axis of `space` offers nothing."""
    return not min(space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)


def _kept(table: Table, mask: Bools) -> Table:
    """The rows of `table` where `mask` holds."""
    size = mask.size
    columns = {field.name: getattr(table, field.name) for field in fields(table)}
    arrays: dict[str, Any] = {
        n: c[mask] for n, c in columns.items() if isinstance(c, np.ndarray) and c.shape == (size,)
    }
    return replace(table, **arrays)


def _seen(verdicts: Verdicts, mask: Bools) -> Verdicts:
    """`verdicts` in the contexts of `mask` only."""
    code = verdicts.code[:, mask]
    alone = code.max(axis=1, initial=-1).astype(np.int64)
    return replace(verdicts, code=code, blank=verdicts.blank[:, mask], alone=alone)


def ask(asked: Query, opamps: Ints, diodes: Ints, rules: Rules) -> Found:
    """The best `rules.show` pairs of `opamps` x `diodes` (indices, as in `Query.eligible`)."""
    pairs = feed.pairs_of(asked.index, opamps, diodes, by=rules.by)
    return ask_pairs(asked, pairs, rules)


def ask_pairs(asked: Query, pairs: feed.Pairs, rules: Rules) -> Found:
    """The best `rules.show` of `pairs`, each with its best setting; fewer where fewer are admitted."""
    if not pairs.size:
        return nothing(len(asked.space.limits))
    with np.errstate(all="ignore"):  # absurd but stated values overflow; their figures do not exist
        return gathered(feed.run(asked.index, asked.goals, rules, pairs=pairs, watch=_never))


def _never(*_: object) -> bool:
    return False
