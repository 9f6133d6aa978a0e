"""Second sources: settings that op-amps of several makers in the same package and pinout can serve.

A setting is admitted only if, with its photodiode, wiring, reference, Rf, Cf and low-pass unchanged,
op-amps of at least `space.sources` makers meet what is asked. A blank package or pinout fits nothing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.search.bounds import Goals
from optimizer.search.boxes import Boxes
from optimizer.search.plain import Judged, judge
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from optimizer.search.spread.corners import judged_whole
from optimizer.search.spread.shifted import bounded
from optimizer.search.view import Index, view

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

BLOCK = 32768


def mates(space: Space, opamp: Ints) -> tuple[Ints, Ints]:
    """Pairs (row, op-amp): for each row every op-amp of another maker in the package and pinout of its own.

    Only op-amps that pass their own checks in some context.
    """
    passes = space.opamp_verdicts.alone == PASSES
    fitting = np.flatnonzero(passes & (space.footprint >= 0))
    order = fitting[np.argsort(space.footprint[fitting], kind="stable")]
    kinds = space.footprint[order]
    wanted = space.footprint[opamp]
    start, stop = np.searchsorted(kinds, wanted, "left"), np.searchsorted(kinds, wanted, "right")
    count = np.where(wanted >= 0, stop - start, 0)
    row = np.repeat(np.arange(opamp.size), count)
    step = np.arange(row.size) - np.repeat(np.cumsum(count) - count, count)
    mate = order[np.repeat(start, count) + step]
    other = space.makers[mate] != space.makers[opamp[row]]
    return row[other], mate[other]


def enough(space: Space, size: int, row: Ints, mate: Ints) -> Bools:
    """Which of `size` rows have mates of enough makers, their own maker counted."""
    several = int(space.makers.max(initial=0)) + 1
    each = np.unique(row * several + space.makers[mate]) // several
    return np.asarray(np.bincount(each, minlength=size) + 1 >= space.sources)


def offered(space: Space) -> Bools:
    """Which op-amps have mates of enough makers at all."""
    every = np.arange(space.footprint.size)
    return enough(space, every.size, *mates(space, every))


def may_be_sourced(index: Index, boxes: Boxes, goals: Goals, least: float) -> Bools:
    """Where no bound rules out that op-amps of enough makers serve some setting of a box."""

    def possible(row: Ints, mate: Ints) -> Bools:
        rows = boxes.rows[row]
        rows[:, Boxes.OPAMP] = mate
        theirs = Boxes(rows)
        level = np.full(len(theirs), least)
        return bounded(index, theirs, view(index, theirs), goals, (level, level)).possible

    return _enough_of(index.space, boxes.column(Boxes.OPAMP), possible)


def is_sourced(space: Space, choice: Choice, least: float) -> Bools:
    """Where op-amps of enough makers serve a setting."""
    return _enough_of(space, choice.opamp, lambda row, mate: _serves(space, choice.take(row), mate, least))


def _serves(space: Space, choice: Choice, mate: Ints, least: float) -> Bools:
    """Where the op-amp `mate` in place of the chosen one is admitted with margins of at least `least`."""
    judged = with_opamp(space, choice, mate)
    return np.asarray(judged.admitted & (judged.vector[:, 0] >= least))


def with_opamp(space: Space, choice: Choice, mate: Ints) -> Judged:
    """The settings of `choice` with the op-amps `mate`, judged; at their corners where those are graded."""
    theirs = Choice(mate, *choice.columns()[1:])
    return judged_whole(space, judge(space, theirs, "cost"), "cost")


def _enough_of(space: Space, opamp: Ints, serves: Callable[[Ints, Ints], Bools]) -> Bools:
    row, mate = mates(space, opamp)
    ok = np.zeros(row.size, dtype=bool)
    for begin in range(0, row.size, BLOCK):
        part = slice(begin, begin + BLOCK)
        ok[part] = serves(row[part], mate[part])
    return enough(space, opamp.size, row[ok], mate[ok])


@dataclass(frozen=True, slots=True)
class Served:
    """Op-amps that serve settings in place of the chosen ones: row, op-amp, and the setting judged."""

    row: Ints
    opamp: Ints
    judged: Judged


def alternates(space: Space, choice: Choice) -> Served:
    """Every op-amp of another maker that meets what is asked in place of the chosen one."""
    row, mate = mates(space, choice.opamp)
    judged = with_opamp(space, choice.take(row), mate)
    good = np.flatnonzero(judged.meets)
    return Served(row[good], mate[good], judged.take(good))
