"""Which settings the board may use, and in which package each is graded as a receiver by itself."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.figures import evaluate
from optimizer.planning.columns import Field
from optimizer.planning.kinds import NONE, Kind
from optimizer.search.sources import is_sourced
from optimizer.search.space import Choice, settings

Bools = NDArray[np.bool_]

OF_PACKAGES = ("cost", "supply_current")
"""Targets whose figures differ from package to package of one amplifier."""


def packaged(of: Field, i: int, choice: Choice) -> Choice:
    """Settings of kind `i` in the smallest package of their op-amps with which they keep their targets.

    In the smallest of all where none does. A buffered receiver may keep a cost in a dual that it misses in
    two singles.
    """
    opamp, group = choice.opamp.copy(), of.amplifiers.group[i]
    for row in of.amplifiers.rows[i].tolist():
        mine = np.flatnonzero(group[choice.opamp] == group[row])
        opamp[mine] = row
        if mine.size and "cost" in of.kinds[i].space.limits:
            for other in reversed(packages(of, i, row)):
                there = _with(choice.take(mine), other)
                opamp[mine[_keeps(of.kinds[i], there)]] = other
    return Choice(opamp, *choice.columns()[1:])


def packages(of: Field, i: int, row: int) -> list[int]:
    """The op-amps of kind `i` in the group of `row`, the fewest amplifiers first."""
    kind, group = of.kinds[i], of.amplifiers.group[i]
    rows = np.flatnonzero(group == group[row]).tolist()
    parts = {other: int(kind.opamp_part[other]) for other in rows}
    return sorted(rows, key=lambda other: (of.shelf.parts[parts[other]].entry.amplifiers, parts[other]))


def _with(choice: Choice, row: int) -> Choice:
    return Choice(np.full_like(choice.opamp, row), *choice.columns()[1:])


def _keeps(kind: Kind, choice: Choice) -> Bools:
    """Which settings keep the targets that depend on the package, as receivers by themselves."""
    with np.errstate(all="ignore"):
        figures = evaluate(kind.space.bench, settings(kind.space, choice)).figures
    stated = {name: kind.space.limits[name] for name in OF_PACKAGES if name in kind.space.limits}
    kept = [margins.margin(name, figures[name], limit) >= 0.0 for name, limit in stated.items()]
    return np.asarray(np.all(kept, axis=0)) if kept else np.ones(choice.opamp.size, dtype=bool)


def usable(of: Field, i: int, choice: Choice) -> Bools:
    """Which settings keep the targets of their request, as receivers by themselves, and have op-amps

    that the board may use, and areas that are known where they are limited.
    """
    kind = of.kinds[i]
    fit = of.amplifiers.group[i][choice.opamp] != NONE
    if "cost" in kind.space.limits and choice.opamp.size:
        fit &= _keeps(kind, choice)
        if kind.space.sources > 1:
            # so must its alternates: the prices of a bound, at which it was found, say nothing of that
            fit[fit] = is_sourced(kind.space, choice.take(fit), 0.0)
    if of.outline.limits.area is not None:
        fit &= _has_areas(of, kind, choice)
    return np.asarray(fit)


def _has_areas(of: Field, kind: Kind, choice: Choice) -> Bools:
    """Where the areas of all parts besides the op-amps are known."""
    known = np.array([part.entry.area is not None for part in of.shelf.parts] + [True])
    columns = (
        kind.diode_part[choice.diode],
        kind.resistor_part[choice.resistor],
        kind.capacitor_part[choice.capacitor],
        *kind.divider[choice.context].T,
    )
    return np.asarray(np.all([known[column] for column in columns], axis=0))
