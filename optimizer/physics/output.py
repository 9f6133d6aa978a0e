"""Where the output rests and how far it may go: errors, full scale, slewing, load."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def offset_voltage(maximum: ArrayLike, drift: ArrayLike, distance: float) -> Floats:
    """Input offset [V] at `distance` [K] from 25 C: maximum at 25 C plus drift [V/K] times distance."""
    return np.add(maximum, np.asarray(drift, dtype=float) * distance)


def dc_error(offset: Floats, bias: Floats, resistance: Floats, shunt: Floats) -> Floats:
    """Output error [V] without reference: Vos (1 + Rf/Rsh) + Ib Rf, in the worse sign.

    `offset` [V], `bias` [A], `resistance` Rf [ohm], `shunt` 1/Rsh [S].
    """
    return np.asarray(offset * (1.0 + resistance * shunt) + bias * resistance)


def room(limit: Floats, reference: Floats, sign: Floats) -> Floats:
    """Swing [V] from `reference` towards `limit` (guard already taken off): sign (limit - reference)."""
    return np.asarray(sign * (limit - reference))


def full_scale(swing: Floats, offset: Floats, transresistance: Floats, responsivity: Floats) -> Floats:
    """Light, background included, that uses up `swing` [V] after `offset` [V]; in the light's unit.

    `responsivity` is in A per unit of light. May be negative: the output is out of room without light.
    """
    return np.asarray((swing - offset) / (transresistance * responsivity))


def slew_ratio(rate: Floats, frequency: ArrayLike, amplitude: Floats) -> Floats:
    """Slew rate [V/s] over what a sine of peak-to-peak `amplitude` [V] at `frequency` [Hz] needs, pi f A."""
    return np.asarray(rate / (np.pi * np.asarray(frequency, dtype=float) * amplitude))
