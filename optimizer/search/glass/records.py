"""What one candidate looks like under the glass: plain arrays in SI, no words."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Curves:
    """Responses over `frequency` [Hz], rising, with points where the curves bend and are read.

    `open_loop` |A|, `noise_gain` |NG| and `loop_gain` |A/NG| [1], `loop_phase` = 180 deg + arg(A/NG)
    [deg], `transresistance` |H Ppd Plp| and `loop_transresistance` |H| [ohm]. `crossover` [Hz]: where
    the loop gain is 1; `bandwidth` [Hz]. NaN where they do not exist or need an unknown value.
    """

    frequency: Floats
    open_loop: Floats
    noise_gain: Floats
    loop_gain: Floats
    loop_phase: Floats
    transresistance: Floats
    loop_transresistance: Floats
    crossover: float
    bandwidth: float


@dataclass(frozen=True, slots=True)
class NoiseSpectrum:
    """Noise at the output, after the low-pass, by contribution.

    `density` [V/rtHz] over `frequency` [Hz] and their `total` with the weakest light on; flicker is 0
    below the frequency from which it counts. `budget` [V^2]: mean squares over the whole band, a
    converter's with them; all NaN where the loop is unstable.
    """

    frequency: Floats
    density: Mapping[str, Floats]
    total: Floats
    budget: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Level:
    """The output between its rails [V] at one `end` of the supply: the factor on the rails.

    `limit_*`: output limits; `guard_*`: the same with the guard taken off. `dark_low` and `dark_high`:
    without light, with every error in either sign. `background`, `weakest` and `strongest` have the
    offset in the direction of light, the last two with the background too.
    """

    end: float
    rail_low: float
    rail_high: float
    limit_low: float
    limit_high: float
    guard_low: float
    guard_high: float
    vref: float
    dark_low: float
    dark_high: float
    background: float
    weakest: float
    strongest: float


Levels = tuple[Level, ...]
"""Lower end of the supply tolerance, nominal, upper end."""


@dataclass(frozen=True, slots=True)
class Step:
    """The output's answer to a step of light, diode pole and low-pass included; 1 at the end.

    `value` over `time` [s]; `rise_time` [s] from 10 % to 90 %, `overshoot` above 1 as a fraction,
    `settling_time` [s] after which it stays within 1 %. NaN where unstable or the diode's pole unknown.
    """

    time: Floats
    value: Floats
    rise_time: float
    overshoot: float
    settling_time: float


@dataclass(frozen=True, slots=True)
class Glass:
    """One candidate: its curves, noise, levels, step, and `values` by name, in SI, behind its figures."""

    curves: Curves
    noise: NoiseSpectrum
    levels: Levels
    step: Step
    values: Mapping[str, float]
