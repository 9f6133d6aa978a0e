"""The output noise of one candidate, contribution by contribution: over frequency and integrated.

The integrals are those of the figures, taken one source at a time; the tests hold their sum to the
figures, and the densities to the integrals.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.physics import noise
from optimizer.search.glass.curves import around_peak, corners, spread
from optimizer.search.glass.records import NoiseSpectrum
from optimizer.search.glass.subject import Subject, number

Floats = NDArray[np.float64]

SIGNAL = "signal_shot"
"""The one contribution that the dark output does not have."""

CONVERTER = "converter"
_NONE = noise.Band(np.array([np.nan]), np.array([np.nan]))


@dataclass(frozen=True, slots=True)
class Bands:
    """Integrals of 1/D, low-pass included: `white`, `flicker`, and `bypassed` behind the divider's pole.

    All NaN where the loop is unstable.
    """

    white: noise.Band
    flicker: noise.Band
    bypassed: noise.Band


@dataclass(frozen=True, slots=True)
class _Source:
    """One source: its `density` squared at the output over frequency [V^2/Hz], its `mean` square [V^2]."""

    name: str
    density: Floats
    mean: float


def bands(c: Subject) -> Bands:
    """The integrals that the noise of `c` takes."""
    if not c.stable:
        return Bands(_NONE, _NONE, _NONE)
    polynomial = noise.times_pole((c.loop.e1, c.loop.e2, c.loop.e3), c.s.low_pass)
    bypassed = noise.times_pole(polynomial, c.s.source * c.bench.bypass)
    return Bands(
        noise.white_band(polynomial),
        noise.flicker_band(c.loop, c.s.low_pass, c.bench.noise_from),
        noise.white_band(bypassed),
    )


def reference_slope(c: Subject) -> Floats:
    """Time constant [s] of the numerator of NGref: Rf (Cf + Cref)."""
    moving = np.where(c.s.biased, c.s.capacitance, 0.0) + c.s.common + c.s.stray
    return np.asarray(c.loop.feedback + c.s.rf * moving)


def spectrum(c: Subject) -> NoiseSpectrum:
    """The noise of `c`."""
    frequency = _frequencies(c)
    density: dict[str, Floats] = {}
    budget: dict[str, float] = {}
    integrals = bands(c)
    for source in (*_currents(c, frequency, integrals), *_voltages(c, frequency, integrals)):
        density[source.name] = density.get(source.name, 0.0) + source.density
        budget[source.name] = budget.get(source.name, 0.0) + source.mean
    total = np.sqrt(np.sum(list(density.values()), axis=0))
    if c.bench.converter is not None:
        floor, ceiling, bits = c.bench.converter
        budget[CONVERTER] = number(noise.quantisation(ceiling - floor, bits))
    return NoiseSpectrum(frequency, {k: np.sqrt(v) for k, v in density.items()}, total, budget)


def _frequencies(c: Subject) -> Floats:
    """From where flicker counts, or a decade below the lowest bend, to a decade above the highest."""
    start, bends = c.bench.noise_from, corners(c)
    if c.s.divided.any():
        bends += (1.0 / (2.0 * np.pi * number(c.s.source) * c.bench.bypass),)
    known = [bend for bend in bends if np.isfinite(bend)]
    low, high = min(start, 0.1 * min(known)), 10.0 * max(start, *known)
    return spread(low, high, marks=(start, *around_peak(c)))


def currents(c: Subject) -> dict[str, float]:
    """Densities squared [A^2/Hz] of the noise currents at the summing node that exist."""
    s, bench = c.s, c.bench
    squares = {
        "feedback_resistor": noise.thermal_current(s.rf, bench.kelvin),
        "shunt": noise.thermal_conductance_current(s.shunt, bench.kelvin),
        SIGNAL: noise.shot_current(s.responsivity * bench.weakest),
        "background_shot": noise.shot_current(s.responsivity * bench.background),
        "dark_shot": noise.shot_current(s.dark),
        "amplifier_current": s.current_noise,
    }
    return {name: number(square) for name, square in squares.items() if number(square) != 0.0}


def _currents(c: Subject, frequency: Floats, integrals: Bands) -> Iterator[_Source]:
    """What flows into the summing node: through H and the low-pass."""
    gain = c.transresistance**2 * _filtered(c, frequency)
    whole = number(noise.output_current(np.array(c.transresistance), np.array(1.0), integrals.white))
    for name, square in currents(c).items():
        yield _Source(name, square * gain, square * whole)


def _voltages(c: Subject, frequency: Floats, integrals: Bands) -> Iterator[_Source]:
    """What stands at the op-amp's inputs: its own noise, and that of a divider and its buffer."""
    s, loop = c.s, c.loop
    white, w2 = s.voltage_noise**2, (2.0 * np.pi * frequency) ** 2
    below = _filtered(c, frequency) * loop.gain**2
    pink = white * s.noise_corner * np.where(frequency >= c.bench.noise_from, 1.0 / frequency, 0.0)
    own, slope = below * (loop.dc_noise_gain**2 + loop.total**2 * w2), reference_slope(c)
    mean = noise.amplifier_voltage(loop, white, integrals.white)
    yield _Source("amplifier_voltage", white * own, number(mean))
    if s.noise_corner.any():
        mean = noise.amplifier_voltage(loop, white * s.noise_corner, integrals.flicker)
        yield _Source("amplifier_flicker", pink * own, number(mean))
    through = below * (1.0 + slope**2 * w2)
    if s.divided.any():
        square = divider_density(c)
        mean = noise.output_voltage(loop, square, slope, integrals.bypassed)
        shorted = 1.0 / (1.0 + (s.source * c.bench.bypass) ** 2 * w2)
        yield _Source("reference_divider", square * through * shorted, number(mean))
    if s.buffered.any():
        mean = noise.output_voltage(loop, white, slope, integrals.white)
        mean = mean + noise.output_voltage(loop, white * s.noise_corner, slope, integrals.flicker)
        yield _Source("reference_buffer", (white + pink) * through, number(mean))


def divider_density(c: Subject) -> Floats:
    """Density squared [V^2/Hz] of the divider's noise, the op-amp's current through it included."""
    return np.asarray(noise.thermal_voltage(c.s.source, c.bench.kelvin) + c.s.current_noise * c.s.source**2)


def _filtered(c: Subject, frequency: Floats) -> Floats:
    """|1/D|^2 with the low-pass; NaN where the loop is unstable."""
    w = 2.0 * np.pi * frequency
    power = c.fall(w) ** 2 * (1.0 + (c.s.low_pass * w) ** 2)
    return np.asarray(1.0 / power if c.stable else np.full(power.shape, np.nan))
