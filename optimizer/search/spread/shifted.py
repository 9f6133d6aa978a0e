"""Boxes at a corner of the spreads: their intervals moved there, bounded, and the bounds moved back.

The worst margin of a setting is at most its margin at any one corner, so a bound over a box at a corner
bounds the worst margins of the box. A divider stands at the corner that moves Vref towards the light
(up where the output rises, down where it falls); `view.lay_out` has put it there.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.physics import noise
from optimizer.search.bounds import Goals, Narrow
from optimizer.search.boxes import Boxes, Run, Span
from optimizer.search.spread.corners import FIRST, UP, Corner, active
from optimizer.search.upper import Bound, bound
from optimizer.search.view import Index, View

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Stretch:
    """By what factors a corner moves Rf and placed Cf, the least and the most in each box."""

    rf_low: Floats
    rf_high: Floats
    cf_low: Floats
    cf_high: Floats
    parasitic_low: Floats
    parasitic_high: Floats


def bounded(index: Index, boxes: Boxes, v: View, goals: Goals, levels: tuple[Floats, Floats]) -> Bound:
    """Bounds over `boxes` (seen as `v`) at nominal, or the tightest over the likely corners.

    `levels`: the margin that a box needs, and that its margins other than cost and current need.
    """
    level, inner = levels
    if not active(index.space):
        return bound(v, goals, level, inner)
    tightest: Bound | None = None
    for corner in FIRST:
        moved, stretch = shifted(index, boxes, v, corner)
        there = bound(moved, goals, level, inner)
        there = replace(there, left=_moved_back(there.left, stretch, v))
        tightest = there if tightest is None else _tighter(tightest, there)
    assert tightest is not None
    return tightest


def _tighter(one: Bound, other: Bound) -> Bound:
    left, right = one.left, other.left
    both = Narrow(
        np.maximum(left.rf_low, right.rf_low),
        np.minimum(left.rf_high, right.rf_high),
        np.maximum(left.cf_low, right.cf_low),
        np.minimum(left.cf_high, right.cf_high),
        left.swing,
        left.possible & right.possible,
    )
    return Bound(
        one.possible & other.possible,
        np.minimum(one.margin_columns, other.margin_columns),
        np.minimum(one.snr, other.snr),
        one.cost,
        one.supply_current,
        both,
    )


def _ends(run: Run, span: Span, sign: float) -> tuple[Floats, Floats]:
    """The least and the most factor on the values of `run` in each range."""
    least, most = run.spread.least(span), -run.spread_most.least(span)
    low, high = 1.0 + sign * least, 1.0 + sign * most
    return np.minimum(low, high), np.maximum(low, high)


def shifted(index: Index, boxes: Boxes, v: View, corner: Corner) -> tuple[View, Stretch]:
    """The intervals of `boxes` at `corner`, and what it does to Rf and Cf."""
    space, column = index.space, boxes.column
    stated = space.request.tolerance.spreads
    factor = {axis: 1.0 + corner.get(axis, 1.0 if axis in UP else 0.0) * h for axis, h in stated.items()}
    o, opamps = column(Boxes.OPAMP), space.opamps
    stretch = _stretch(index, boxes, v, corner)
    stray = space.request.space.stray * factor["stray"]
    common, differential = opamps.common[o], opamps.differential[o]
    node = (common + differential) * factor["input_capacitance"] + stray
    bias = v.bias * factor["bias_current"]
    gain = v.gain * factor["open_loop_gain"]
    dominant = gain / (2.0 * np.pi * opamps.gbw[o] * factor["gbw"])
    moved = replace(
        v,
        gain=gain,
        dominant=dominant,
        both=dominant * v.second / (dominant + v.second),
        voltage_noise=v.voltage_noise * factor["voltage_noise"] ** 2,
        bias=bias,
        current_noise=np.fmax(opamps.own_noise[o], noise.shot_current(bias)),
        responsivity=v.responsivity * factor["responsivity"],
        dark_low=v.dark_low * factor["dark_current"],
        cin_low=v.junction_low * factor["diode_capacitance"] + node,
        cin_high=v.junction_high * factor["diode_capacitance"] + node,
        reference_node=common * factor["input_capacitance"] + stray,
        rf_low=v.rf_low * stretch.rf_low,
        rf_high=v.rf_high * stretch.rf_high,
        cf_low=(v.cf_low - stretch.parasitic_low) * stretch.cf_low + stretch.parasitic_low,
        cf_high=(v.cf_high - stretch.parasitic_high) * stretch.cf_high + stretch.parasitic_high,
    )
    return moved, stretch


def _stretch(index: Index, boxes: Boxes, v: View, corner: Corner) -> Stretch:
    column, capacitors = boxes.column, index.capacitors
    r = Span.of(column(Boxes.R0), column(Boxes.R1))
    c = Span.of(column(Boxes.C0), column(Boxes.C1))
    return Stretch(
        *_ends(index.resistors, r, corner.get("feedback_resistance", 0.0)),
        *_ends(capacitors, c, corner.get("feedback_capacitance", 0.0)),
        v.cf_low - capacitors.value[column(Boxes.C0)],
        v.cf_high - capacitors.value[column(Boxes.C1) - 1],
    )


def _moved_back(left: Narrow, s: Stretch, v: View) -> Narrow:
    """What is left at the corner as nominal values, loosened by what the way there and back may round."""
    placed_low = (left.cf_low - s.parasitic_high) / np.where(
        left.cf_low > s.parasitic_high, s.cf_high, s.cf_low
    )
    placed_high = (left.cf_high - s.parasitic_low) / np.where(
        left.cf_high > s.parasitic_low, s.cf_low, s.cf_high
    )
    room = 1e-12 * (v.cf_high + np.abs(left.cf_high))
    room = np.where(np.isfinite(room), room, 0.0)
    return replace(
        left,
        rf_low=left.rf_low / s.rf_high * (1.0 - 1e-12),
        rf_high=left.rf_high / s.rf_low * (1.0 + 1e-12),
        cf_low=placed_low + s.parasitic_high - room,
        cf_high=placed_high + s.parasitic_low + room,
    )
