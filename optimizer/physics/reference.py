"""The reference at the non-inverting input: ground, or a divider between the rails."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def divided(high: ArrayLike, low: ArrayLike, top: ArrayLike, bottom: ArrayLike) -> Floats:
    """Voltage [V] of a divider between the rails: V- + (V+ - V-) R2/(R1 + R2).

    `top` R1 [ohm] goes to `high` [V], `bottom` R2 to `low`; arrays broadcast.
    """
    share = np.asarray(bottom, dtype=float) / np.add(top, bottom)
    return np.asarray(np.asarray(low, dtype=float) + np.subtract(high, low) * share)


def parallel(top: ArrayLike, bottom: ArrayLike) -> Floats:
    """Source resistance [ohm] of the divider, R1 || R2."""
    product = np.multiply(top, bottom, dtype=float)
    return np.asarray(product / np.add(top, bottom))


def current(high: ArrayLike, low: ArrayLike, top: ArrayLike, bottom: ArrayLike) -> Floats:
    """Current [A] that the divider draws."""
    return np.asarray(np.subtract(high, low) / np.add(top, bottom))
