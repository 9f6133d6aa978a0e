"""Upper bounds on the margins, the snr and (from below) cost and supply current of boxes of settings."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.figures import rounded
from optimizer.physics.loop import Amplifier, crossover_polynomial
from optimizer.physics.roots import root_from_above
from optimizer.search.bounds import (
    SLACK,
    Coefficients,
    Floor,
    Goals,
    Narrow,
    coefficients,
    error_offset,
    error_slope,
    narrow,
    needed,
    noise_floor,
    roof,
    tightened,
)
from optimizer.search.output_noise import output_floor
from optimizer.search.view import View

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

_NEWTON_STEPS = 5
EARLIER = (1.0, 0.2)
"""Where the response is looked at, as shares of the square of the frequency in question."""
_STEPS = 5
"""Bisections between level and comfort that place the bound on the bandwidth margin."""


@dataclass(frozen=True, slots=True)
class Bound:
    """What no setting of a box can beat, one row a box.

    `margin_columns` in the order of the stated targets, cut at comfort; `snr` [dB], `cost` and
    `supply_current` [A] rounded as figures are; `left` what remains of Rf and Cf.
    """

    possible: Bools
    margin_columns: Floats
    snr: Floats
    cost: Floats
    supply_current: Floats
    left: Narrow


def bound(v: View, goals: Goals, level: Floats, inner: Floats | None = None) -> Bound:
    """Bounds over every setting of each box whose smallest margin is at least its `level`.

    `inner`, at least `level`: what the margins other than cost and supply current must reach.
    """
    inner = level if inner is None else inner
    loose = inner - SLACK * (1.0 + np.abs(inner))
    left = narrow(v, goals, loose)
    ceiling = roof(v, goals, loose)
    c = coefficients(v, left, ceiling)
    with np.errstate(all="ignore"):
        left = tightened(v, left, c, noise_floor(v, left, c, goals.bench), needed(v, goals, loose))
        c = coefficients(v, left, ceiling)
        floor = noise_floor(v, left, c, goals.bench)
        snr = _decibels(v.responsivity * goals.bench.weakest, floor.weak)
        columns = _ceilings(v, (left, c, floor), goals, level=inner, snr=snr)
    cost, current = rounded(v.cost), rounded(v.supply_current)
    exact = {"cost": cost, "supply_current": current}
    table = np.empty((v.gain.size, len(goals.limits)))
    possible = left.possible
    for k, (name, column) in enumerate(columns.items()):
        if name in exact:
            highest, least = margins.margin(name, exact[name], _limit(goals, name)), level
        else:
            highest, least = _on_grid(name, column), inner
        possible = possible & (highest >= (least if name in goals.limits else 0.0))
        if name in goals.limits:
            table[:, k] = highest
    return Bound(possible, np.clip(table, -1.0, goals.comfort), snr + 1e-6, cost, current, left)


def _on_grid(name: str, column: Floats) -> Floats:
    """A bound on a margin as margins are: of a figure with 9 digits, and a whole number of 1e-9.

    What the figure's rounding can add is added, then the bound is cut to the grid below, so that
    margins that cannot differ are seen to be equal. NaN is an unknown value that no target needs.
    """
    known = np.clip(np.where(np.isnan(column), np.inf, column), -2.0, margins.LARGEST)
    if name in margins.DECIBELS:
        slack = 1.2e-7 * (1.0 + known)
    elif name == "phase_margin":
        slack = np.full(known.shape, 5e-8)
    elif name == "peaking":
        slack = 6e-9 * (1.0 + np.abs(known))
    else:
        slack = 6e-9 * (1.0 + known)
    # half a step is what a margin may be rounded up by
    steps = np.floor((known + np.maximum(slack, 0.0)) * 1e9 + 0.501)
    return np.clip(steps / 1e9, -1.0, margins.LARGEST)


def _decibels(signal: Floats, square: Floats) -> Floats:
    return np.where(square > 0.0, 20.0 * np.log10(signal) - 10.0 * np.log10(square), np.inf)


_State = tuple[Narrow, Coefficients, Floor]


def _limit(goals: Goals, name: str) -> float:
    limit = goals.limit(name)
    assert limit is not None, name
    return limit


def _ceilings(v: View, state: _State, goals: Goals, *, level: Floats, snr: Floats) -> dict[str, Floats]:
    """Upper bound on the margin of each target, the graded ones first and in their order.

    Cost and supply current come later.
    """
    left, c, _ = state
    limits = {**goals.musts, **goals.limits}
    scale = margins.PHASE_SCALE
    bounds: dict[str, Callable[[], Floats]] = {
        "bandwidth": lambda: _bandwidth(v, c, goals, level),
        "snr": lambda: margins.raw_margin("snr", snr, limits["snr"]),
        "dynamic_range": lambda: margins.raw_margin(
            "dynamic_range", _dynamic_range(v, state, goals), limits["dynamic_range"]
        ),
        "full_scale": lambda: _full_scale(v, left, goals) / limits["full_scale"] - 1.0,
        "phase_margin": lambda: _phase_margin(v, left, c) / scale - limits["phase_margin"] / scale,
        "peaking": lambda: 1.0 - _peaking(c) / limits["peaking"],
        "slew": lambda: _slew(v, left, goals) / limits["slew"] - 1.0,
        "offset": lambda: limits["offset"] / _offset(v, left) - 1.0,
        "supply_current": lambda: np.full(v.gain.shape, np.inf),
        "cost": lambda: np.full(v.gain.shape, np.inf),
    }
    return {name: bounds[name]() for name in (*goals.limits, *goals.musts)}


def _offset(v: View, left: Narrow) -> Floats:
    """Offset [V] at least."""
    return error_offset(v) + error_slope(v) * left.rf_low + v.dark_low * _gain_low(v, left)


def _gain_low(v: View, left: Narrow) -> Floats:
    """H0 [ohm] at least: at the smallest Rf and the largest shunt conductance."""
    return left.rf_low * v.gain / (v.gain + 1.0 + left.rf_low * v.shunt_high)


def _full_scale(v: View, left: Narrow, goals: Goals) -> Floats:
    """Light at most, background taken off, at the smallest Rf that is left."""
    gain = _gain_low(v, left)
    light = (left.swing - error_offset(v) - error_slope(v) * left.rf_low) / gain - v.dark_low
    return np.maximum(light / v.responsivity - goals.bench.background, 0.0)


def _dynamic_range(v: View, state: _State, goals: Goals) -> Floats:
    """The dynamic range [dB] at most: by light and noise at the input, or by volts at the output."""
    left, c, floor = state
    light = _decibels(v.responsivity * _full_scale(v, left, goals), floor.dark)
    room = np.maximum(left.swing - error_offset(v) - error_slope(v) * left.rf_low, 0.0)
    return np.fmin(light, _decibels(room, output_floor(v, left, c, goals.bench)))


def _slew(v: View, left: Narrow, goals: Goals) -> Floats:
    frequency = goals.bench.bandwidth_target
    if frequency is None:
        return np.full(v.gain.shape, np.inf)
    amplitude = _gain_low(v, left) * v.responsivity * goals.bench.strongest
    return v.slew_rate / (np.pi * frequency * amplitude)


def _bandwidth(v: View, c: Coefficients, goals: Goals, level: Floats) -> Floats:
    """The margin up to comfort that the bandwidth can have: where |H| is certainly below H0/sqrt 2."""
    target = 2.0 * np.pi * _limit(goals, "bandwidth")
    if "bandwidth" not in goals.limits:
        level = np.zeros_like(level)

    def below(x: Floats) -> Bools:
        real = np.maximum(np.maximum(1.0 - c.e2_high * x, c.e2_low * x - 1.0), 0.0)
        imaginary = np.maximum(np.maximum(c.e1_low - c.e3_high * x, c.e3_low * x - c.e1_high), 0.0)
        poles = (1.0 + v.pole**2 * x) * (1.0 + v.lag_low**2 * x)
        return np.asarray((real**2 + x * imaginary**2) * poles > 2.0 * (1.0 + 1e-9))

    def excluded(margin: Floats) -> Bools:
        # a response that falls below earlier and rises again in a resonance has the lower bandwidth
        x = (target * np.maximum(1.0 + margin, 0.0)) ** 2
        return np.asarray(np.any([below(part * x) for part in EARLIER], axis=0))

    low, high = level, np.full(level.shape, goals.comfort)
    # just above the level first: margins that cannot exceed it are then known to tie with it
    near = level + 1e-10
    tied = excluded(near)
    over = excluded(high)
    low = np.where(over, low, high)
    for _ in range(_STEPS):
        middle = np.where(
            high > 4.0, np.sqrt((1.0 + np.maximum(low, -0.99)) * (1.0 + high)) - 1.0, 0.5 * (low + high)
        )
        out = excluded(middle)
        high = np.where(out, middle, high)
        low = np.where(out, low, middle)
    least = np.where(tied, near, np.where(over, high, np.inf))
    # the level is a rounded margin: the figure may be as far below it as rounding reaches
    return np.where(excluded(level - 1e-8 * (1.0 + np.abs(level))), -np.inf, least)


def _peaking(c: Coefficients) -> Floats:
    """Peaking [dB] at least: |D|^2 with coefficients from above, at their minimum (any x is a bound)."""
    c1 = c.e1_high**2 - 2.0 * c.e2_low
    c2 = c.e2_high**2 - 2.0 * c.e1_low * c.e3_low
    c3 = c.e3_high**2
    x = -c1 / (c2 + np.sqrt(np.maximum(c2 * c2 - 3.0 * c1 * c3, 0.0)))
    x = np.where(np.isfinite(x) & (x > 0.0), x, 0.0)
    least = np.clip(1.0 + x * (c1 + x * (c2 + x * c3)), 1e-30, 1.0)
    return -10.0 * np.log10(least)


def _phase_margin(v: View, left: Narrow, c: Coefficients) -> Floats:
    """Phase margin [deg] at most, with the crossover between its extremes."""
    t_low = left.rf_low * (v.cin_low + left.cf_low)
    t_high = left.rf_high * (v.cin_high + left.cf_high)
    f_low, f_high = left.rf_low * left.cf_low, left.rf_high * left.cf_high
    w_low = np.fmax(_crossover(v, (c.g_high, t_high, f_low), False), _slowest(v, left, c))
    w_high = _crossover(v, (c.g_low, t_low, f_high), True)
    lag = np.arctan(v.dominant * w_low) + np.arctan(v.second * w_low)
    network = np.arctan(f_high * w_high) - np.arctan(t_low / c.g_high * w_low)
    return np.asarray(180.0 - np.degrees(lag - np.fmin(network, _lead(v, left, c))))


def _slowest(v: View, left: Narrow, c: Coefficients) -> Floats:
    """The crossover [rad/s] at least, whatever Rf: the noise gain is at most g or 1 + Cin/Cf.

    The root of (1 + a^2 x)(1 + b^2 x) = (A0 / that)^2, x = w^2.
    """
    with np.errstate(all="ignore"):
        highest = np.fmax(c.g_high, 1.0 + v.cin_high / left.cf_low)
        excess = (v.gain / highest) ** 2 - 1.0
        a2, b2 = v.dominant**2, v.second**2
        x = 2.0 * excess / (a2 + b2 + np.sqrt((a2 + b2) ** 2 + 4.0 * a2 * b2 * excess))
    return np.sqrt(np.where(excess > 0.0, x, 0.0)) * (1.0 - 1e-9)


def _lead(v: View, left: Narrow, c: Coefficients) -> Floats:
    """The phase [rad] by which the feedback network can lead, at most.

    With x = Rf Cf w and r = (1 + Cin/Cf)/g it is arctan x - arctan(r x): not above 0 for r >= 1, else
    largest at x = r^-1/2.
    """
    ratio = (1.0 + v.cin_low / left.cf_high) / c.g_high
    return np.where(ratio >= 1.0, 0.0, np.arctan(0.5 * (1.0 - ratio) / np.sqrt(ratio)))


def _crossover(v: View, loop: tuple[Floats, Floats, Floats], above: bool) -> Floats:
    """The crossover [rad/s] of one loop (g, Rf (Cin + Cf), Rf Cf), from above or from below.

    Newton's method from above stays above; the chord from 0 to a point above cuts the axis below the
    root, since the polynomial is convex.
    """
    k = crossover_polynomial(Amplifier(v.gain, v.dominant, v.second), *loop)
    k0, k1, k2, k3 = k
    x = np.nan_to_num(root_from_above(k, _NEWTON_STEPS), posinf=0.0)
    if above:
        return np.sqrt(x * (1.0 + 1e-9))
    value = np.maximum(((k3 * x + k2) * x + k1) * x - k0, 0.0)
    chord = np.where(value + k0 > 0.0, x * (k0 / (value + k0)), x)
    return np.sqrt(np.maximum(chord * (1.0 - 1e-9), 0.0))
