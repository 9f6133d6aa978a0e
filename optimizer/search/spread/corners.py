"""Settings at the corners of their spreads: the worst margin of every target, and where it falls.

A corner puts every spread at one of its two ends. What is graded is the worst of nominal and of all
corners; a setting is admitted if it is eligible at all of them. Only these directions are proved, and
spare half of the corners each:

  voltage noise, dark current, bias current up: snr, dynamic range, full scale, offset, dark output and
      load only get worse (noise and error are sums of terms that do not fall with any of them)
  responsivity up: full scale, dynamic range, slew and load only get worse (the swing is shared by more
      current); down: snr (R^2/(a + b R) rises with R) and an output that leans on the weakest light

Bandwidth, phase margin, peaking and noise have no such direction in Rf, Cf, GBW, A0 or any capacitance
(see `bounds`), nor the noise of a divider in R1 or R2: all their corners are tried.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from itertools import product

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.figures import Evaluated, evaluate
from optimizer.search import keys
from optimizer.search.plain import Judged
from optimizer.search.space import Choice, Space
from optimizer.search.spread.spreads import AXES, PARTS, half_widths, moved, moved_checks
from optimizer.search.values import corners as asked_for

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

Corner = Mapping[str, float]
"""Signs by axis: -1 and 1 the ends of its spread; an axis left out stays at nominal."""

BLOCK = 16384
UP = ("voltage_noise", "dark_current", "bias_current")
DIVIDER = ("divider_top", "divider_bottom")
_SLOW = {
    "gbw": -1.0, "open_loop_gain": -1.0, "input_capacitance": 1.0, "diode_capacitance": 1.0, "stray": 1.0,
    "feedback_resistance": 1.0, "feedback_capacitance": 1.0, "responsivity": 1.0,
}  # fmt: skip
FIRST: tuple[Corner, ...] = (
    _SLOW,
    {**_SLOW, "feedback_capacitance": -1.0},
    {**_SLOW, "feedback_resistance": -1.0, "feedback_capacitance": -1.0, "gbw": 1.0, "responsivity": -1.0},
)
"""Corners that are often the worst: tried, and bounded, before the others."""


def active(space: Space) -> tuple[str, ...]:
    """The axes that spread anywhere in `space`; none where the request grades nominal values."""
    if not asked_for(space.request):
        return ()
    stated = space.request.tolerance.spreads
    widths = {
        "feedback_resistance": space.resistors.spread,
        "feedback_capacitance": space.capacitors.spread,
        **dict.fromkeys(DIVIDER, space.contexts.spread),
    }
    spread = {axis for axis, width in widths.items() if np.any(width > 0.0)}
    spread |= {axis for axis in PARTS if stated[axis] > 0.0}
    return tuple(axis for axis in AXES if axis in spread)


def blocks(space: Space, *, divided: bool) -> Iterator[tuple[Corner, ...]]:
    """The corners that decide, in blocks: the likely ones first. Nothing where nothing spreads."""
    axes = [axis for axis in active(space) if divided or axis not in DIVIDER]
    if not axes:
        return
    ends = [(1.0,) if axis in UP else (-1.0, 1.0) for axis in axes]
    every = [dict(zip(axes, signs, strict=True)) for signs in product(*ends)]
    first = [corner for corner in every if _is_first(corner)]
    rest = [corner for corner in every if not _is_first(corner)]
    yield tuple(first)
    for begin in range(0, len(rest), 32):
        yield tuple(rest[begin : begin + 32])


def _is_first(corner: Corner) -> bool:
    return any(
        all(likely.get(axis, sign) == sign for axis, sign in corner.items() if axis not in DIVIDER)
        for likely in FIRST
    )


def deviations(space: Space, choice: Choice, corners: tuple[Corner, ...]) -> tuple[Choice, dict[str, Floats]]:
    """Each choice once for each corner (corner by corner), and how far each axis deviates there."""
    repeated = choice.take(np.tile(np.arange(choice.opamp.size), len(corners)))
    widths = half_widths(space, repeated)
    signs = {axis: np.repeat([c.get(axis, 0.0) for c in corners], choice.opamp.size) for axis in AXES}
    return repeated, {axis: signs[axis] * widths[axis] for axis in AXES}


def evaluated(space: Space, choice: Choice, deviation: Mapping[str, Floats]) -> tuple[Evaluated, Bools]:
    """Figures of the settings so moved, and where all checks that a deviation can change still pass."""
    with np.errstate(all="ignore"):
        s = moved(space, choice, deviation)
        result = evaluate(space.bench, s)
        outside = np.any(list(moved_checks(space, choice, s).values()), axis=0)
    return result, np.asarray(result.eligible & ~outside)


def worsened(space: Space, judged: Judged, corners: tuple[Corner, ...], by: str) -> Judged:
    """`judged` with what is worse at any of `corners`."""
    step = max(BLOCK // len(corners), 1)
    size = judged.reach.size
    parts = [judged.take(np.arange(b, min(b + step, size))) for b in range(0, size, step)]
    return _joined([_worse(space, part, corners, by) for part in parts]) if parts else judged


def _worse(space: Space, judged: Judged, corners: tuple[Corner, ...], by: str) -> Judged:
    shape = (len(corners), judged.reach.size)
    choice, deviation = deviations(space, judged.choice, corners)
    result, fine = evaluated(space, choice, deviation)
    met = np.all(margins.margins(result.figures, space.musts) >= 0.0, axis=1)
    table = margins.margins(result.figures, space.limits).reshape(*shape, -1)
    columns = np.minimum(judged.margin_columns, table.min(axis=0))
    vector = keys.comfortable(space, columns)
    first = keys.primary(by, result.figures, np.full(choice.opamp.size, np.inf)).reshape(shape)
    worst = -vector[:, 0] if by == "margin" else np.maximum(judged.primary, first.max(axis=0))
    admitted = judged.admitted & (fine & met).reshape(shape).all(axis=0)
    return replace(judged, admitted=admitted, margin_columns=columns, primary=worst, vector=vector)


def _joined(parts: list[Judged]) -> Judged:
    names = ("reach", "admitted", "margin_columns", "primary", "cost", "vector")
    columns = zip(*(part.choice.columns() for part in parts), strict=True)
    choice = Choice(*(np.concatenate(column) for column in columns))
    return Judged(choice, *(np.concatenate([getattr(part, name) for part in parts]) for name in names))


def judged_whole(space: Space, judged: Judged, by: str) -> Judged:
    """`judged` at nominal made worse by every corner that decides; in the same order."""
    divided = space.contexts.divided[judged.choice.context]
    done, rows = [], []
    for kind in (False, True):
        here = np.flatnonzero(divided == kind)
        part = judged.take(here)
        for block in blocks(space, divided=kind):
            part = worsened(space, part, block, by)
        done.append(part)
        rows.append(here)
    return _joined(done).take(np.argsort(np.concatenate(rows), kind="stable"))
