"""The worst value of every target of a few settings over their corners, and at which corner it falls."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.search.space import Choice, Space
from optimizer.search.spread.corners import Corner, active, blocks, deviations, evaluated
from optimizer.search.spread.spreads import AXES, half_widths
from optimizer.vocabulary import VOCABULARY

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Worst:
    """By target: the worst margin and value of each setting, and the deviations where they fall.

    `deviation` holds one array an axis, 0 where the axis stays at nominal or has no influence.
    """

    margin: Mapping[str, Floats]
    value: Mapping[str, Floats]
    deviation: Mapping[str, Mapping[str, Floats]]

    def corner(self, target: str, row: int) -> dict[str, float]:
        """The axes that deviate where `target` of setting `row` is worst, and by what fraction."""
        by_axis = self.deviation[target]
        return {axis: float(by_axis[axis][row]) for axis in AXES if by_axis[axis][row]}


def worst(space: Space, choice: Choice) -> Worst | None:
    """The worst of nominal and of every corner for the settings of `choice`; None where nothing spreads."""
    if not active(space):
        return None
    size = choice.opamp.size
    names = tuple(space.limits)
    best, values = _graded(space, choice, {axis: np.zeros(size) for axis in AXES})
    signs = {name: {axis: np.zeros(size) for axis in AXES} for name in names}
    divided = space.contexts.divided[choice.context]
    for kind in (False, True):
        rows = np.flatnonzero(divided == kind)
        for block in blocks(space, divided=kind):
            for corner in block:
                _take(space, choice, rows, corner, (best, values, signs))
    widths = half_widths(space, choice)
    at = {name: {axis: signs[name][axis] * widths[axis] for axis in AXES} for name in names}
    essential = {name: _essential(space, choice, name, (values[name], at[name])) for name in names}
    return Worst(best, values, essential)


_State = tuple[dict[str, Floats], dict[str, Floats], dict[str, dict[str, Floats]]]


def _take(space: Space, choice: Choice, rows: NDArray[np.int64], corner: Corner, state: _State) -> None:
    """Take what is worse at `corner` for the settings at `rows` into `state`."""
    if not rows.size:
        return
    best, values, signs = state
    there, deviation = deviations(space, choice.take(rows), (corner,))
    found, figures = _graded(space, there, deviation)
    for name, margin in found.items():
        worse = _level(name, figures[name]) < _level(name, values[name][rows])
        best[name][rows] = np.minimum(margin, best[name][rows])
        values[name][rows] = np.where(worse, figures[name], values[name][rows])
        for axis in AXES:
            now = signs[name][axis]
            now[rows] = np.where(worse, corner.get(axis, 0.0), now[rows])


def _level(name: str, value: Floats) -> Floats:
    """`value` so that less is worse: it also tells apart what margins do not, which are clipped."""
    signed = value if VOCABULARY[name].better == "higher" else -value
    return np.where(np.isnan(value), -np.inf, signed)


def _graded(
    space: Space, choice: Choice, deviation: Mapping[str, Floats]
) -> tuple[dict[str, Floats], dict[str, Floats]]:
    """Margin and value of every graded target of the settings so moved."""
    figures = evaluated(space, choice, deviation)[0].figures
    values = {name: np.array(np.broadcast_to(figures[name], choice.opamp.shape)) for name in space.limits}
    return {name: margins.margin(name, values[name], limit) for name, limit in space.limits.items()}, values


def _essential(
    space: Space, choice: Choice, name: str, state: tuple[Floats, dict[str, Floats]]
) -> dict[str, Floats]:
    """The deviations without those that do not matter to target `name` of a setting."""
    value, at = state
    for axis in AXES:
        if not at[axis].any():
            continue
        without = {**at, axis: np.zeros_like(at[axis])}
        there = _graded(space, choice, without)[1][name]
        same = (there == value) | (np.isnan(there) & np.isnan(value))
        at = {**at, axis: np.where(same, 0.0, at[axis])}
    return at
