"""What a plan better than the best known may use: by kind, the parts, groups and pairs that are left."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.planning.columns import Field
from optimizer.planning.kinds import NONE, Kind
from optimizer.search.boxes import Boxes, Run
from optimizer.search.collect import Collected
from optimizer.search.query import Query

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Reach:
    """Masks of one kind. By part of the shelf: `own` as photodiode, resistor or capacitor, and `divider`;

    by group: `groups` as receiver, `buffers` of a level. `pairs` by op-amp and photodiode.
    """

    own: Bools
    divider: Bools
    groups: Bools
    buffers: Bools
    pairs: Bools

    def __and__(self, other: Reach) -> Reach:
        """What both leave."""
        return Reach(
            self.own & other.own,
            self.divider & other.divider,
            self.groups & other.groups,
            self.buffers & other.buffers,
            self.pairs & other.pairs,
        )


def everything(field: Field, kind: int, pairs: Bools) -> Reach:
    """What a kind can use before anything is proved: the `pairs` with all passives and contexts."""
    space = field.kinds[kind].space
    spans = _Spans(
        pairs,
        np.ones(space.contexts.size, dtype=bool),
        np.ones(space.resistors.size, dtype=bool),
        np.ones(space.capacitors.size, dtype=bool),
    )
    return _reach(field, kind, spans)


def left_by(field: Field, kind: int, asked: Query, found: Collected) -> Reach:
    """What the settings found use, and those that may be in boxes still open."""
    space, boxes, choice = asked.space, found.open, found.choice
    pairs = np.zeros((space.opamps.gbw.size, space.diodes.price.size), dtype=bool)
    pairs[choice.opamp, choice.diode] = True
    pairs[boxes.column(Boxes.OPAMP), boxes.column(Boxes.DIODE)] = True
    contexts = _covered(space.contexts.size, boxes, (Boxes.X0, Boxes.X1))
    contexts[choice.context] = True
    spans = _Spans(
        pairs,
        contexts,
        _passives(asked.index.resistors, boxes, (Boxes.R0, Boxes.R1), choice.resistor),
        _passives(asked.index.capacitors, boxes, (Boxes.C0, Boxes.C1), choice.capacitor),
    )
    return _reach(field, kind, spans)


@dataclass(frozen=True, slots=True)
class _Spans:
    """Masks by index of the space of a kind."""

    pairs: Bools
    contexts: Bools
    resistors: Bools
    capacitors: Bools


def _covered(size: int, boxes: Boxes, ends: tuple[int, int]) -> Bools:
    """Which places of an axis some box covers."""
    edges = np.bincount(boxes.column(ends[0]), minlength=size + 1).astype(np.int64)
    edges -= np.bincount(boxes.column(ends[1]), minlength=size + 1)
    return np.asarray(np.cumsum(edges)[:size] > 0)


def _passives(run: Run, boxes: Boxes, ends: tuple[int, int], used: Ints) -> Bools:
    mask = np.zeros(run.index.size, dtype=bool)
    mask[run.index[_covered(run.index.size, boxes, ends)]] = True
    mask[used] = True
    return mask


def _reach(field: Field, number: int, spans: _Spans) -> Reach:
    kind = field.kinds[number]
    own = _marked(field, kind.diode_part[spans.pairs.any(axis=0)])
    own |= _marked(field, kind.resistor_part[spans.resistors])
    own |= _marked(field, kind.capacitor_part[spans.capacitors])
    groups = np.zeros(len(field.amplifiers.names), dtype=bool)
    used = field.amplifiers.group[number][spans.pairs.any(axis=1)]
    groups[used[used != NONE]] = True
    buffered = bool((kind.space.contexts.buffered & spans.contexts).any())
    divider = _marked(field, _dividers(kind, spans.contexts))
    return Reach(own, divider, groups, groups & buffered, spans.pairs)


def _dividers(kind: Kind, contexts: Bools) -> Ints:
    return np.asarray(kind.divider[contexts].reshape(-1), dtype=np.int64)


def _marked(field: Field, parts: Ints) -> Bools:
    mask = np.zeros(len(field.shelf.parts), dtype=bool)
    mask[parts[parts != NONE]] = True
    return mask
