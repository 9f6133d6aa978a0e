"""Lower bounds on integrals of flicker noise, from intervals of the coefficients of the denominator.

D = 1 + E1 s + E2 s^2 + E3 s^3 + E4 s^4, stable, the low-pass included; with x = w^2

  |D|^2 = (1 - E2 x + E4 x^2)^2 + x (E1 - E3 x)^2.

Stability gives E3 < E1 E2 and E4 < E2^2. So up to x = 1/E2 the real part lies between 0 and 1 and the
imaginary part is at most E1 w: |D|^2 <= 1 + E1^2 x. As long as E3 x <= 2 E1 and E4 x <= E2 the real part
is at most max(1, E2 x - 1): |D|^2 <= 1 + E1^2 x + E2^2 x^2 <= (1 + p x)(1 + r x), p = E1^2, r = (E2/E1)^2.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def flicker_flat(first: Floats, second: Floats, start: float) -> Floats:
    """The integral of |1/D|^2 / f over f from `start` [Hz], at least; E1 and E2 at most.

    Up to x = 1/E2 it is half the logarithm of (1/x0 + E1^2) / (E2 + E1^2).
    """
    ratio = ((2.0 * np.pi * start) ** -2 + first**2) / (second + first**2)
    return 0.5 * np.log(np.maximum(np.where(np.isfinite(ratio), ratio, 1.0), 1.0))


def flicker_span(high: Sequence[Floats], low: Sequence[Floats], start: float) -> Floats:
    """E1^2 times twice the integral of |s/D|^2 / f over f from `start` [Hz], at least.

    `high`: E1 to E4 at most; `low`: E1 and E2 at least. The integral of 1/((1 + p x)(1 + r x)) is a
    logarithm, which rises with p and falls with r, over p - r <= E1^2.
    """
    first, second = low
    begin = (2.0 * np.pi * start) ** 2
    end = np.fmin(2.0 * first / high[2], second / high[3])  # NaN where neither sets an end
    p, r = first**2, (high[1] / first) ** 2
    span = _logarithm(p, r, np.where(np.isnan(end), np.inf, end)) - _logarithm(p, r, begin)
    return np.where((p > r) & (end > begin) & np.isfinite(span), np.maximum(span, 0.0), 0.0)


def _logarithm(p: Floats, r: Floats, x: Floats | float) -> Floats:
    ratio = np.where(np.isinf(x), p / r, (1.0 + p * x) / (1.0 + r * x))
    return np.asarray(np.log(ratio))
