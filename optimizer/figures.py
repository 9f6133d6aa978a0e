"""Every figure of a candidate, and the checks that make it eligible, from the physics.

Entry point: `evaluate(bench, settings)`. `Bench` holds what the request fixes (scalars); `Settings`
holds one array element a candidate, already at the hottest ambient where a temperature law applies.
Returns `Evaluated`: figures rounded to 9 significant digits and the failed checks. Independent of how
the candidates were batched.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.physics import loop as loops
from optimizer.physics import noise, output

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

FIGURES = (
    "bandwidth",
    "snr",
    "dynamic_range",
    "phase_margin",
    "peaking",
    "offset",
    "full_scale",
    "slew",
    "supply_current",
    "cost",
    "error",
    "output_noise_dark",
    "output_noise_weak",
    "noise_equivalent_light",
    "transresistance",
    "input_capacitance",
    "reverse_bias",
)

CHECKS = (
    "status",
    "excluded",
    "stock",
    "temperature",
    "wavelength",
    "supply",
    "missing",
    "reverse_bias",
    "input_range",
    "window",
    "dark_output",
    "load",
    "gain",
    "min_gain",
    "unstable",
)
"""Eligibility in the order in which it is checked."""


@dataclass(frozen=True, slots=True)
class Bench:
    """What the request fixes. Volts, C (kelvin: `kelvin`), light in W or W/m2, seconds for none."""

    high: float
    low: float
    tolerance: float
    guard: float
    kelvin: float
    weakest: float
    strongest: float
    background: float
    noise_from: float
    bypass: float
    bandwidth_target: float | None
    converter: tuple[float, float, int] | None
    converter_follows: bool
    load: float | None
    load_to: float | None
    dark_on_rail: bool

    @property
    def ends(self) -> tuple[float, float]:
        """Factors on the rails at the two ends of the supply tolerance."""
        return 1.0 - self.tolerance, 1.0 + self.tolerance


@dataclass(frozen=True, slots=True)
class Settings:
    """Candidates, one array element each (broadcastable).

    Op-amp: `dc_gain`, `gbw` [Hz], `second_pole` [Hz], `min_gain`, `slew_rate` [V/s], `voltage_noise`
    [V/rtHz], `noise_corner` [Hz], `current_noise` squared and hot [A^2/Hz], `bias` hot [A], `vos` over
    the ambient [V], `output_low`, `output_high` [V from the rails], `common`, `differential`, and of
    the board `stray` [F],
    `output_current` [A], `buffers` (may follow at noise gain 1). Diode: `responsivity` [A per unit of
    light], `capacitance` at its bias [F], `dark` [A] and `shunt` [S] in its wiring, `pole` [s].
    Context: `sign` (+1 rising), `vref` [V], `biased`, `divided`, `buffered`, `source` = R1 || R2 [ohm],
    `reverse_bias` [V]. Choices: `rf` [ohm], `cf` [F] parasitic included, `low_pass` [s];
    `supply_current` [A] and `cost` are added up beforehand.
    """

    dc_gain: Floats
    gbw: Floats
    second_pole: Floats
    min_gain: Floats
    slew_rate: Floats
    voltage_noise: Floats
    noise_corner: Floats
    current_noise: Floats
    bias: Floats
    vos: Floats
    output_low: Floats
    output_high: Floats
    common: Floats
    differential: Floats
    stray: Floats
    output_current: Floats
    buffers: Bools
    responsivity: Floats
    capacitance: Floats
    dark: Floats
    shunt: Floats
    pole: Floats
    sign: Floats
    vref: Floats
    biased: Bools
    divided: Bools
    buffered: Bools
    source: Floats
    reverse_bias: Floats
    rf: Floats
    cf: Floats
    low_pass: Floats
    supply_current: Floats
    cost: Floats


@dataclass(frozen=True, slots=True)
class Evaluated:
    """Figures by name, and by name of check where it fails."""

    figures: Mapping[str, Floats]
    fails: Mapping[str, Bools]

    @property
    def eligible(self) -> Bools:
        """Where no check fails."""
        return np.asarray(~np.any([np.asarray(f) for f in self.fails.values()], axis=0))


_TENS = np.array([float(f"1e{power}") for power in range(301)])


def rounded(values: Floats) -> Floats:
    """`values` rounded to 9 significant digits (the nearest float to that decimal, up to 1e22 scale)."""
    x = np.asarray(values, dtype=float)
    with np.errstate(divide="ignore", invalid="ignore"):
        exponent = np.floor(np.log10(np.abs(x)))
        places = np.where(np.isfinite(exponent), 8.0 - exponent, 0.0).astype(np.int64)
        up, down = _TENS[np.clip(places, 0, 300)], _TENS[np.clip(-places, 0, 300)]
        whole = np.rint(x * up / down)
        back = whole / up * down
    return np.asarray(np.where(np.isfinite(x) & (x != 0.0), back, x))


def output_limits(bench: Bench, end: float, low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """Output limits [V] at one tolerance `end`: rails less `low` and `high`, cut by the converter's range."""
    lower, upper = bench.low * end + low, bench.high * end - high
    if bench.converter is not None:
        floor, ceiling, _ = bench.converter
        top = bench.high * end if bench.converter_follows else ceiling
        lower, upper = np.maximum(lower, floor), np.minimum(upper, top)
    return lower, upper


def amplifier_of(s: Settings) -> loops.Amplifier:
    """The op-amps of `s`."""
    return loops.amplifier(s.dc_gain, s.gbw, s.second_pole)


def input_capacitance(s: Settings) -> Floats:
    """Cin at the summing node [F]."""
    return np.asarray(s.capacitance + s.common + s.differential + s.stray)


def dc_error(s: Settings) -> Floats:
    """The figure `error` [V]."""
    own = output.dc_error(s.vos, s.bias, s.rf, s.shunt)
    reference = np.where(s.divided, s.bias * s.source, 0.0) + np.where(s.buffered, s.vos, 0.0)
    return np.asarray(own + reference)


def evaluate(bench: Bench, s: Settings) -> Evaluated:
    """All figures and checks of the candidates `s`; NaN where a figure needs an unknown value."""
    amp = amplifier_of(s)
    cin = input_capacitance(s)
    loop = loops.close(amp, loops.Network(s.rf, s.cf, s.shunt, cin))
    transresistance = s.rf * loop.gain
    error = dc_error(s)
    offset = error + s.dark * transresistance
    phase = loops.phase_margin(amp, loop)
    stable = loop.e1 * loop.e2 > loop.e3
    dark, weak = _noise(bench, s, (loop, transresistance, stable))
    scale = _full_scale(bench, s, (transresistance, offset))
    per_light = s.responsivity * transresistance
    with np.errstate(divide="ignore", invalid="ignore"):
        figures = {
            "bandwidth": loops.bandwidth(loop, diode=s.pole, low_pass=s.low_pass),
            "snr": 20.0 * np.log10(per_light * bench.weakest / weak),
            "dynamic_range": np.where(scale > 0.0, 20.0 * np.log10(per_light * scale / dark), np.nan),
            "phase_margin": phase,
            "peaking": np.where(stable, loops.peaking(loop), np.nan),
            "offset": offset,
            "full_scale": scale,
            "slew": _slew(bench, s, per_light),
            "supply_current": s.supply_current,
            "cost": s.cost,
            "error": error,
            "output_noise_dark": dark,
            "output_noise_weak": weak,
            "noise_equivalent_light": dark / per_light,
            "transresistance": transresistance,
            "input_capacitance": cin,
            "reverse_bias": s.reverse_bias,
        }
    exact = {name: rounded(np.asarray(value)) for name, value in figures.items()}
    return Evaluated(exact, checks(bench, s, (transresistance, offset, exact["phase_margin"])))


def screen(bench: Bench, s: Settings) -> dict[str, Bools]:
    """The checks of `evaluate` alone, without the figures that they do not need."""
    amp = amplifier_of(s)
    network = loops.Network(s.rf, s.cf, s.shunt, input_capacitance(s))
    loop = loops.close(amp, network)
    transresistance = s.rf * loop.gain
    offset = dc_error(s) + s.dark * transresistance
    return checks(bench, s, (transresistance, offset, rounded(loops.phase_margin(amp, loop))))


def _slew(bench: Bench, s: Settings, per_light: Floats) -> Floats:
    if bench.bandwidth_target is None:
        return np.full(np.shape(per_light), np.nan)
    return output.slew_ratio(s.slew_rate, bench.bandwidth_target, per_light * bench.strongest)


def _full_scale(bench: Bench, s: Settings, state: tuple[Floats, Floats]) -> Floats:
    """The figure `full_scale`: light at the worse end of the supply tolerance, not below 0."""
    transresistance, offset = state
    swing = np.min([headroom(bench, s, end) for end in bench.ends], axis=0)
    light = output.full_scale(swing, offset, transresistance, s.responsivity)
    return np.asarray(np.maximum(light - bench.background, 0.0))


def headroom(bench: Bench, s: Settings, end: float) -> Floats:
    """Swing [V] from Vref to the limit in the direction of light, guard taken off, at one tolerance end."""
    lower, upper = output_limits(bench, end, s.output_low, s.output_high)
    limit = np.where(s.sign > 0.0, upper - bench.guard, lower + bench.guard)
    return output.room(limit, s.vref * end, s.sign)


def _noise(bench: Bench, s: Settings, state: tuple[loops.Loop, Floats, Bools]) -> tuple[Floats, Floats]:
    """Total rms noise [V] at the output in the dark and at the weakest light; NaN where unstable."""
    loop, transresistance, stable = state
    safe = _stabilised(loop, stable)
    polynomial = noise.times_pole((safe.e1, safe.e2, safe.e3), s.low_pass)
    white = noise.white_band(polynomial)
    flicker = noise.flicker_band(safe, s.low_pass, bench.noise_from)
    density = noise.thermal_current(s.rf, bench.kelvin) + s.current_noise
    density = density + noise.thermal_conductance_current(s.shunt, bench.kelvin)
    steady = noise.shot_current(s.responsivity * bench.background + s.dark)
    signal = noise.output_current(transresistance, noise.shot_current(s.responsivity * bench.weakest), white)
    square = s.voltage_noise**2
    rest = noise.output_current(transresistance, density + steady, white)
    rest = rest + noise.amplifier_voltage(safe, square, white)
    rest = rest + noise.amplifier_voltage(safe, square * s.noise_corner, flicker)
    rest = rest + _reference_noise(bench, s, (safe, polynomial, white, flicker))
    if bench.converter is not None:
        floor, ceiling, bits = bench.converter
        rest = rest + noise.quantisation(ceiling - floor, bits)
    rest = np.where(stable, rest, np.nan)
    return np.asarray(np.sqrt(rest)), np.asarray(np.sqrt(rest + signal))


def _stabilised(loop: loops.Loop, stable: Bools) -> loops.Loop:
    """The loop with harmless coefficients where it is not stable (its noise is then masked)."""
    return loops.Loop(
        loop.gain,
        loop.dc_noise_gain,
        np.where(stable, loop.e1, 1.0),
        np.where(stable, loop.e2, 1.0),
        np.where(stable, loop.e3, 0.0),
        loop.feedback,
        loop.total,
    )


_ReferenceState = tuple[loops.Loop, tuple[Floats, ...], noise.Band, noise.Band]


def _reference_noise(bench: Bench, s: Settings, state: _ReferenceState) -> Floats:
    """Mean square [V^2] of the divider's noise and, where buffered, of the buffer's own."""
    loop, polynomial, white, flicker = state
    moving = np.where(s.biased, s.capacitance, 0.0) + s.common + s.stray
    slope = loop.feedback + s.rf * moving
    square = s.voltage_noise**2
    buffer = noise.output_voltage(loop, square, slope, white)
    buffer = buffer + noise.output_voltage(loop, square * s.noise_corner, slope, flicker)
    bypassed = noise.white_band(noise.times_pole(polynomial, s.source * bench.bypass))
    density = noise.thermal_voltage(s.source, bench.kelvin) + s.current_noise * s.source**2
    own = noise.output_voltage(loop, density, slope, bypassed)
    return np.asarray(np.where(s.divided, own, 0.0) + np.where(s.buffered, buffer, 0.0))


def checks(bench: Bench, s: Settings, state: tuple[Floats, Floats, Floats]) -> dict[str, Bools]:
    """Where each check that depends on the whole setting fails.

    `state`: transresistance [ohm], offset [V], phase margin [deg] (rounded).
    """
    transresistance, offset, phase = state
    return {
        **steady_checks(bench, s, (transresistance, offset)),
        "min_gain": min_gain_fails(s),
        "unstable": np.asarray(~(phase > 0.0)),
    }


def steady_checks(bench: Bench, s: Settings, state: tuple[Floats, Floats]) -> dict[str, Bools]:
    """The checks that do not depend on Cf; `state`: transresistance [ohm] and offset [V]."""
    return {
        "dark_output": dark_output_fails(bench, s, state),
        "load": load_fails(bench, s),
        "gain": np.asarray(s.dc_gain <= 1.0 + s.rf * s.shunt),
    }


def min_gain_fails(s: Settings) -> Bools:
    """Where the op-amp works below the noise gain at which it is stable, or cannot buffer its reference."""
    with np.errstate(divide="ignore", invalid="ignore"):
        small = 1.0 + rounded(input_capacitance(s)) / s.cf < s.min_gain
    return np.asarray(small | (s.buffered & ~s.buffers))


def steady_state(s: Settings) -> tuple[Floats, Floats]:
    """Transresistance [ohm] and offset [V] without the dynamics."""
    transresistance = s.rf * s.dc_gain / (s.dc_gain + (1.0 + s.rf * s.shunt))
    return transresistance, dc_error(s) + s.dark * transresistance


def dark_output_fails(bench: Bench, s: Settings, state: tuple[Floats, Floats]) -> Bools:
    """Where the output without light is not the guard voltage inside both limits at a tolerance end.

    `state`: transresistance [ohm] and offset [V]; they and the error are compared as rounded figures.
    """
    transresistance, offset = (rounded(value) for value in state)
    error = rounded(dc_error(s))
    leaning = transresistance * s.responsivity * bench.weakest - error
    on_rail = (s.sign > 0.0) & ~s.divided if bench.dark_on_rail and bench.low == 0.0 else np.False_
    fails = np.zeros(np.shape(transresistance), dtype=bool)
    for end in bench.ends:
        lower, upper = output_limits(bench, end, s.output_low, s.output_high)
        lower, upper = lower + bench.guard, upper - bench.guard
        vref = s.vref * end
        moved = vref + s.sign * offset
        lowest, highest = np.minimum(vref - error, moved), np.maximum(vref + error, moved)
        outside = ~((lowest >= lower) & (highest <= upper))
        fails |= np.where(on_rail, ~(vref + leaning >= lower), outside)
    return fails


def load_fails(bench: Bench, s: Settings) -> Bools:
    """Where the op-amp cannot drive the stated load and the feedback at the high end of the supply."""
    if bench.load is None:
        return np.zeros(np.shape(s.rf), dtype=bool)
    end = bench.ends[1]
    lower, upper = output_limits(bench, end, s.output_low, s.output_high)
    to = s.vref * end if bench.load_to is None else bench.load_to
    farthest = np.maximum(np.abs(upper - to), np.abs(lower - to))
    light = s.responsivity * (bench.strongest + bench.background)
    return np.asarray(~(farthest / bench.load + light + s.dark + s.bias <= s.output_current))
