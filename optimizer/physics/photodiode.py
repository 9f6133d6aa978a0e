"""The photodiode: responsivity, junction capacitance, leakage over temperature, its own pole."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optimizer.physics.constants import ELEMENTARY_CHARGE, LIGHT_SPEED, PLANCK

Floats = NDArray[np.float64]

BUILT_IN_POTENTIAL = 0.6
"""Built-in potential of the junction law [V]; a usual value for silicon (common practice, no source)."""

RISE_TIME_FACTOR = float(np.log(9.0))
"""10 % to 90 % rise time of one pole over its time constant: ln 9."""


def responsivity(wavelength: ArrayLike, points: Sequence[tuple[float, float]]) -> Floats:
    """Responsivity at `wavelength` [m], linear between `points` (wavelength [m], responsivity [A/W]).

    Returns [A/W] in the shape of `wavelength`; NaN outside the points, which are x-rising.
    """
    x, y = np.array(points, dtype=float).reshape(-1, 2).T
    if not x.size:
        return np.full(np.shape(wavelength), np.nan)
    return np.asarray(
        np.interp(np.asarray(wavelength, dtype=float), x, y, left=np.nan, right=np.nan), dtype=np.float64
    )


def quantum_responsivity(efficiency: ArrayLike, wavelength: ArrayLike) -> Floats:
    """Responsivity [A/W] of a quantum `efficiency` [1] at `wavelength` [m]: eta q lambda / (h c).

    Source: photon energy h c / lambda with the exact constants of the SI (BIPM 2019).
    """
    return np.asarray(
        np.multiply(efficiency, wavelength) * (ELEMENTARY_CHARGE / (PLANCK * LIGHT_SPEED)), dtype=float
    )


def junction_capacitance(bias: ArrayLike, points: Sequence[tuple[float, float]]) -> Floats:
    """Capacitance [F] at reverse `bias` [V] >= 0, from `points` (bias [V], capacitance [F]).

    One point: C ~ (1 + V/0.6 V)^-0.5 through it (abrupt junction). Several: linear in
    (ln(1 + V/0.6 V), ln C) between them, that law below the first, the last value held above the
    last. Returns the shape of `bias`; NaN without points.
    """
    reverse = np.asarray(bias, dtype=float)
    x, y = np.array(points, dtype=float).reshape(-1, 2).T
    if not x.size:
        return np.full(reverse.shape, np.nan)
    depth = np.log1p(reverse / BUILT_IN_POTENTIAL)
    known = np.log1p(x / BUILT_IN_POTENTIAL)
    law = y[0] * np.exp(-0.5 * (depth - known[0]))
    if x.size == 1:
        return np.asarray(law)
    between = np.exp(np.interp(depth, known, np.log(y)))
    return np.asarray(np.where(depth < known[0], law, between))


def doubled(value: ArrayLike, temperature: ArrayLike, interval: ArrayLike) -> Floats:
    """A current known at 25 C, at `temperature` [C], doubling every `interval` [K] (inf: flat).

    At 25 C the interval need not be known (NaN).

    Source: doubling per 10 C of junction leakage, L. Orozco, MS-2624, Analog Devices 2014, p. 3.
    """
    distance = np.asarray(temperature, dtype=float) - 25.0
    steps = np.where(distance == 0.0, 0.0, distance / np.asarray(interval, dtype=float))
    return np.asarray(np.asarray(value, dtype=float) * np.exp2(steps))


def shunt_conductance(resistance: ArrayLike, temperature: ArrayLike, interval: ArrayLike) -> Floats:
    """1/Rsh [S] at `temperature` [C] of a shunt `resistance` [ohm] at 25 C that halves every `interval` [K].

    An infinite resistance has no conductance at any temperature.
    """
    return doubled(1.0 / np.asarray(resistance, dtype=float), temperature, interval)


def own_pole(rise_time: ArrayLike) -> Floats:
    """Time constant [s] of the diode's own pole from its 10 % to 90 % `rise_time` [s] (0: no pole)."""
    return np.asarray(np.asarray(rise_time, dtype=float) / RISE_TIME_FACTOR)
