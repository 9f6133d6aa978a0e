"""Proved bounds on boxes of settings: narrower Rf and Cf, and an upper bound on every margin.

Each inequality holds for every eligible setting of the box whose smallest margin is at least `level`.
Notation: W = 2 pi times the bandwidth that the level asks for, D = 1 + e1 s + e2 s^2 + e3 s^3,
M^2 = 2 / ((1 + (W tau_diode)^2)(1 + (W tau_low_pass)^2)), a and b the op-amp's time constants,
c = ab/(a + b) >= e3/e2. Where |D(jw)| <= M at w = W:

  real part:       e2 W^2 <= 1 + M
  imaginary part:  e1 <= M/W + c (1 + M)      (from e1 W <= M + e3 W^3 and e3 <= c e2), and closer
                   e1 <= sqrt(M^2 - (1 - e2 W^2)^2)/W + e3 W^2 once e2 and e3 are bounded
  noise:           the integral of |1/D|^2 is 1/(4 (e1 - e3/e2)) without a low-pass; with one, of
                   |1/(D Plp)|^2 at least 1/(4 (E1 - E3/E2)) and of |s/(D Plp)|^2 at least
                   1/(4 (E1 E2 - E3)), E the coefficients of the product (continued fractions of a
                   stable polynomial have positive terms)
  peaking <= p:    e1^2 >= 10^(-p/10) e2 (|D|^2 at w^2 = 1/e2 is at most e1^2/e2)

The tests hold these to random settings: none may be excluded at its own margin.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from optimizer.figures import Bench
from optimizer.physics import noise
from optimizer.search.flicker import flicker_flat, flicker_span
from optimizer.search.view import View

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

SLACK = 1e-7
"""How far margins are loosened against rounding: figures carry 9 digits, margins 1e-9."""

ROUNDING = 2e-8
"""Relative slack where a check compares figures rounded to 9 digits."""

ROOT2 = float(np.sqrt(2.0))


MET = -SLACK
"""The margin, loosened, of a target that must be met but is not graded."""


@dataclass(frozen=True, slots=True)
class Goals:
    """What is asked: the bench, the limits of graded targets, and comfort.

    `musts` are limits of targets that must be met (margin 0 or more) without being graded.
    """

    bench: Bench
    limits: Mapping[str, float]
    comfort: float
    musts: Mapping[str, float] = field(default_factory=dict)

    def limit(self, name: str) -> float | None:
        """The limit of a target, graded or not; None where there is none."""
        graded = self.limits.get(name)
        return self.musts.get(name) if graded is None else graded

    def factor(self, name: str, level: Floats) -> Floats:
        """1 + the margin that target `name` needs, not below 0; `level`: that of the graded ones."""
        needed_ = level if name in self.limits else np.full_like(level, MET)
        return np.maximum(1.0 + needed_, 0.0)


@dataclass(frozen=True, slots=True)
class Narrow:
    """What is left of Rf [ohm] and Cf [F], the largest swing [V], and where anything is left."""

    rf_low: Floats
    rf_high: Floats
    cf_low: Floats
    cf_high: Floats
    swing: Floats
    possible: Bools


@dataclass(frozen=True, slots=True)
class Coefficients:
    """Intervals of the denominator's coefficients over what is left, and g = 1 + Rf/Rsh."""

    e1_low: Floats
    e1_high: Floats
    e2_low: Floats
    e2_high: Floats
    e3_low: Floats
    e3_high: Floats
    g_low: Floats
    g_high: Floats


@dataclass(frozen=True, slots=True)
class Roof:
    """Upper bounds on e1 [s] and e2 [s^2] that the bandwidth at the level sets (inf: none)."""

    e1: Floats
    e2: Floats
    w: Floats
    m: Floats


def error_offset(v: View) -> Floats:
    """The part of the dc error [V] that does not grow with Rf, at least."""
    reference = np.where(v.divided, v.bias * v.source_low, 0.0) + np.where(v.buffered, v.vos, 0.0)
    return np.asarray(v.vos + reference)


def error_slope(v: View) -> Floats:
    """The part of the dc error that grows with Rf, per ohm [A], at least."""
    return v.vos * v.shunt_low + v.bias


def swing(v: View, bench: Bench, rf_low: Floats) -> Floats:
    """The largest swing [V] that any context of the box leaves for light, at the worse tolerance end."""
    error = (error_offset(v) + error_slope(v) * rf_low) * (1.0 - ROUNDING)
    top, bottom = bench.ends[1], bench.ends[0]
    floor = np.maximum(v.vref_floor, np.where(v.on_rail, -np.inf, v.dark_floor + error / top))
    ceiling = np.minimum(v.vref_ceiling, np.where(v.on_rail, np.inf, v.dark_ceiling - error / top))
    start = np.maximum(v.rise_from, floor)
    stop = np.minimum(v.fall_from, ceiling)
    up = np.minimum(v.upper[0] - start * bottom, v.upper[1] - start * top)
    down = np.minimum(stop * bottom - v.lower[0], stop * top - v.lower[1])
    near = 1e-9 * (1.0 + np.abs(v.upper[1]))
    rises = v.rises & (start <= ceiling + near) & (floor <= v.rise_to + near)
    falls = v.falls & (stop >= floor - near) & (ceiling >= v.fall_to - near)
    up = np.where(rises, up, -np.inf)
    down = np.where(falls, down, -np.inf)
    return np.maximum(up, down)


def drives(v: View, bench: Bench) -> Bools:
    """Where some context of the box may leave the op-amp current enough for the load and the feedback."""
    if bench.load is None:
        return np.ones(v.gain.shape, dtype=bool)
    end = bench.ends[1]
    upper, lower = v.upper[1] + bench.guard, v.lower[1] - bench.guard
    if bench.load_to is None:
        least, most = np.minimum(v.rise_from, v.fall_to) * end, np.maximum(v.rise_to, v.fall_from) * end
        farthest = np.maximum(np.maximum(upper - most, least - lower), 0.5 * (upper - lower))
    else:
        farthest = np.maximum(np.abs(upper - bench.load_to), np.abs(lower - bench.load_to))
    light = v.responsivity * (bench.strongest + bench.background)
    needed_ = farthest / bench.load + light + v.dark_low + v.bias
    return np.asarray(needed_ * (1.0 - 1e-9) <= v.drive)


def rf_for_gain(v: View, transresistance: Floats) -> Floats:
    """The largest Rf [ohm] whose H0 does not exceed `transresistance` anywhere in the box."""
    with np.errstate(divide="ignore", invalid="ignore"):
        rf = transresistance * (v.gain + 1.0) / (v.gain - transresistance * v.shunt_high)
    return np.where(v.gain > transresistance * v.shunt_high, rf, np.inf)


def steady_limits(v: View, goals: Goals, level: Floats) -> tuple[Floats, Floats]:
    """Upper bound on Rf [ohm] from all that depends on Rf alone, and the largest swing [V]."""
    bench = goals.bench
    room = swing(v, bench, v.rf_low)
    fixed, slope = error_offset(v), error_slope(v)
    full, rate_limit, most = (goals.limit(name) for name in ("full_scale", "slew", "offset"))
    strongest = (0.0 if full is None else full) * goals.factor("full_scale", level)
    light = v.responsivity * (strongest + bench.background) + v.dark_low
    with np.errstate(divide="ignore", invalid="ignore"):
        gain = np.where(strongest > 0.0, (room - fixed) / (light + slope), np.inf)
        if rate_limit is not None and bench.bandwidth_target is not None:
            factor = goals.factor("slew", level)
            rate = rate_limit * factor * np.pi * bench.bandwidth_target * bench.strongest
            gain = np.minimum(gain, np.where(factor > 0.0, v.slew_rate / (rate * v.responsivity), np.inf))
        if most is not None:
            factor = goals.factor("offset", level)
            allowed = np.where(factor > 0.0, most / factor - fixed, np.inf)
            gain = np.minimum(gain, allowed / (v.dark_low + slope))
        bound = np.where(gain > 0.0, rf_for_gain(v, np.maximum(gain, 0.0)), -1.0)
        return np.minimum(bound, (v.gain - 1.0) / v.shunt_low), room


def roof(v: View, goals: Goals, level: Floats) -> Roof:
    """What the bandwidth target at `level` asks of the coefficients."""
    target = goals.limit("bandwidth")
    if target is None:
        none = np.full(v.gain.shape, np.inf)
        return Roof(none, none, np.zeros_like(none), np.full_like(none, ROOT2))
    w = 2.0 * np.pi * target * goals.factor("bandwidth", level)
    m = ROOT2 / np.sqrt((1.0 + (w * v.pole) ** 2) * (1.0 + (w * v.lag_low) ** 2))
    with np.errstate(divide="ignore"):
        return Roof(m / w + v.both * (1.0 + m), (1.0 + m) / w**2, w, m)


def narrow(v: View, goals: Goals, level: Floats) -> Narrow:
    """What is left of Rf and Cf where every margin is at least `level` (already loosened by SLACK)."""
    rf_high, room = steady_limits(v, goals, level)
    rf_high = np.minimum(rf_high, v.rf_high)
    ceiling = roof(v, goals, level)
    cf_low, cf_high = v.cf_low, v.cf_high
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        rf_high = np.minimum(rf_high, _rf_from_e2(v, ceiling, cf_low))
        rf_high = np.minimum(rf_high, _rf_from_e1(v, ceiling, cf_low))
        cf_high = np.minimum(cf_high, _cf_from_e1(v, ceiling))
        decompensated = v.min_gain > 1.0
        cf_high = np.where(decompensated, np.minimum(cf_high, v.cin_high / (v.min_gain - 1.0)), cf_high)
    possible = v.possible & ~(v.buffered & ~v.buffers) & ((room >= 0.0) | v.on_rail)
    possible = possible & drives(v, goals.bench)
    loose = 1.0 + ROUNDING
    rf_high, cf_high = rf_high * loose, cf_high * loose
    possible = possible & (rf_high >= v.rf_low) & (cf_high >= cf_low)
    return Narrow(v.rf_low, rf_high, cf_low, cf_high, room, possible)


def _linear(slope: Floats, right: Floats) -> Floats:
    """The largest Rf >= 0 with slope Rf <= right; -1 where even 0 is too much, inf where none is."""
    bound = np.where(slope > 0.0, right / slope, np.inf)
    return np.where(right < 0.0, np.where(slope >= 0.0, -1.0, np.inf), bound)


def _rf_from_e2(v: View, ceiling: Roof, cf_low: Floats) -> Floats:
    a, b, k = v.dominant, v.second, ceiling.e2
    free = a * b - k
    shunt = np.where(free > 0.0, v.shunt_low, v.shunt_high)
    slope = _least_sum((a + b) * (v.cin_low + cf_low), free * shunt)
    bound = _linear(slope, -_least_sum(a * b, -k * (v.gain + 1.0)))
    return np.where(np.isfinite(k), bound, np.inf)


def _rf_from_e1(v: View, ceiling: Roof, cf_low: Floats) -> Floats:
    free = v.dominant + v.second - ceiling.e1
    shunt = np.where(free > 0.0, v.shunt_low, v.shunt_high)
    slope = _least_sum(v.gain * cf_low + v.cin_low + cf_low, free * shunt)
    return np.where(np.isfinite(ceiling.e1), _linear(slope, _spare(v, ceiling)), np.inf)


def _cf_from_e1(v: View, ceiling: Roof) -> Floats:
    free = v.dominant + v.second - ceiling.e1
    shunt = np.where(free > 0.0, v.shunt_low, v.shunt_high)
    right = -_least_sum(v.cin_low + free * shunt, -_spare(v, ceiling) / v.rf_low)
    return np.where(np.isfinite(ceiling.e1), right / (v.gain + 1.0), np.inf)


def _spare(v: View, ceiling: Roof) -> Floats:
    """e1 (A0 + 1) - a - b [s], at most."""
    return -_least_sum(v.dominant + v.second, -ceiling.e1 * (v.gain + 1.0))


def _least_sum(left: Floats, right: Floats) -> Floats:
    """left + right, at least: the terms can nearly cancel, so their rounding is taken off."""
    return left + right - 1e-13 * (np.abs(left) + np.abs(right))


def coefficients(v: View, left: Narrow, ceiling: Roof) -> Coefficients:
    """Intervals of e1, e2, e3 over what is left, cut by the roof."""
    a, b = v.dominant, v.second
    g_low, g_high = 1.0 + left.rf_low * v.shunt_low, 1.0 + left.rf_high * v.shunt_high
    slowest = np.minimum(left.rf_high * left.cf_high, ceiling.e1 * (v.gain + g_high) / v.gain)
    feedback = (left.rf_low * left.cf_low, slowest)
    total = (left.rf_low * (v.cin_low + left.cf_low), left.rf_high * v.cin_high + slowest)

    def e1(end: int, g: Floats) -> Floats:
        return (v.gain * feedback[end] + total[end] + g * (a + b)) / (v.gain + g)

    def e2(end: int, g: Floats) -> Floats:
        return ((a + b) * total[end] + g * a * b) / (v.gain + g)

    e2_low = np.minimum(e2(0, g_low), e2(0, g_high))
    e2_high = np.minimum(np.maximum(e2(1, g_low), e2(1, g_high)), ceiling.e2)
    e3_high = a * b * total[1] / (v.gain + g_low)
    e1_high = np.minimum(np.maximum(e1(1, g_low), e1(1, g_high)), ceiling.e1)
    return Coefficients(
        e1_low=np.minimum(e1(0, g_low), e1(0, g_high)),
        e1_high=np.minimum(e1_high, _imaginary_roof(ceiling, (e2_low, e2_high), e3_high)),
        e2_low=e2_low,
        e2_high=e2_high,
        e3_low=a * b * total[0] / (v.gain + g_high),
        e3_high=e3_high,
        g_low=g_low,
        g_high=g_high,
    )


def _imaginary_roof(ceiling: Roof, e2: tuple[Floats, Floats], e3_high: Floats) -> Floats:
    """Upper bound on e1 from |D(jw)| <= M with what the real part, at least, takes of it."""
    x = ceiling.w**2
    real = np.maximum(np.maximum(1.0 - e2[1] * x, e2[0] * x - 1.0), 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        imaginary = np.sqrt(np.maximum(ceiling.m**2 - real**2, 0.0))
        roof_ = imaginary / ceiling.w + e3_high * x
    return np.where(ceiling.w > 0.0, roof_ * (1.0 + 1e-9), np.inf)


@dataclass(frozen=True, slots=True)
class Floor:
    """Lower bounds on noise referred to the input, as current squared [A^2].

    `flat`, `rising`: of the integrals of |1/D|^2 and |s/D|^2; `dark` without light at the signal
    wavelength, `weak` with the weakest; `per_conductance` what 1/Rf multiplies.
    """

    flat: Floats
    rising: Floats
    dark: Floats
    weak: Floats
    per_conductance: Floats


Four = tuple[Floats, Floats, Floats, Floats]


def filtered(v: View, c: Coefficients) -> tuple[Four, tuple[Floats, Floats]]:
    """The coefficients of s to s^4 of D and the low-pass together, at most; the first two at least."""
    t_low, t_high = v.lag_low, v.lag_high
    first, second = c.e1_high + t_high, c.e2_high + t_high * c.e1_high
    high = (first, second, c.e3_high + t_high * c.e2_high, t_high * c.e3_high)
    return high, (c.e1_low + t_low, c.e2_low + t_low * c.e1_low)


def noise_floor(v: View, left: Narrow, c: Coefficients, bench: Bench) -> Floor:
    """Lower bounds on the noise over what is left."""
    high, low = filtered(v, c)
    first, second = high[:2]
    third = c.e3_low + v.lag_low * c.e2_low
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        flat = _reciprocal(4.0 * (first - third / second))
        rising = _reciprocal(4.0 * (first * second - third))
        level = flat + flicker_flat(first, second, bench.noise_from) * v.noise_corner
        span = flicker_span(high, low, bench.noise_from)
        slope = rising + 0.5 * span / first**2 * v.noise_corner
        per_volt = v.voltage_noise / left.rf_high**2
        node, moved = v.cin_low + left.cf_low, left.cf_low + v.reference_node
        amplifier = per_volt * c.g_low**2 * level + v.voltage_noise * node**2 * slope
        buffer = per_volt * level + v.voltage_noise * moved**2 * slope
        amplifier = amplifier + np.where(v.buffered, buffer, 0.0)
        steady = noise.shot_current(v.responsivity * bench.background + v.dark_low) + v.current_noise
        steady = steady + noise.thermal_conductance_current(v.shunt_low, bench.kelvin)
        rest = steady * flat + amplifier
        if bench.converter is not None:
            floor, ceiling, bits = bench.converter
            rest = rest + noise.quantisation(ceiling - floor, bits) / left.rf_high**2
        per_conductance = noise.thermal_conductance_current(1.0, bench.kelvin) * flat
        dark = rest + per_conductance / left.rf_high
    shot = noise.shot_current(v.responsivity * bench.weakest) * flat
    return Floor(flat, rising, dark, dark + shot, per_conductance)


def _reciprocal(value: Floats) -> Floats:
    """1/value where that is a positive finite number, else 0 (no bound)."""
    return np.where((value > 0.0) & np.isfinite(value), 1.0 / value, 0.0)


def needed(v: View, goals: Goals, level: Floats) -> Floats:
    """The most noise [A^2], referred to the input, that the snr target at `level` leaves; inf for none."""
    limit = goals.limit("snr")
    if limit is None:
        return np.full(v.gain.shape, np.inf)
    factor = goals.factor("snr", level)
    with np.errstate(divide="ignore"):
        return np.asarray((v.responsivity * goals.bench.weakest / factor) ** 2 * 10.0 ** (-limit / 10.0))


def tightened(v: View, left: Narrow, c: Coefficients, floor: Floor, most: Floats) -> Narrow:
    """`left` with Rf from below by its thermal noise, and both from above by the closer roof on e1."""
    spare = most * (1.0 + 1e-9) - (floor.weak - floor.per_conductance / left.rf_high)
    rf_low = np.where(spare > 0.0, floor.per_conductance / spare, np.inf) * (1.0 - 1e-9)
    rf_low = np.maximum(left.rf_low, np.where(np.isfinite(most), rf_low, 0.0))
    closer = Roof(c.e1_high, c.e2_high, c.e1_high, c.e1_high)
    rf_high = np.minimum(left.rf_high, _rf_from_e1(v, closer, left.cf_low) * (1.0 + 1e-9))
    cf_high = np.minimum(left.cf_high, _cf_from_e1(replace(v, rf_low=rf_low), closer) * (1.0 + 1e-9))
    possible = left.possible & (rf_high >= rf_low) & (cf_high >= left.cf_low)
    return Narrow(rf_low, rf_high, left.cf_low, cf_high, left.swing, possible)
