"""A lower bound on |D(jw)|^2 over a box that keeps Rf the same in its real and its imaginary part.

With x = w^2, y = Rf, and what else there is between its extremes,

  Re D = 1 - e2 x,  e2 between b0 + a0 y and b1 + a1 y;   Im D / w = e1 - e3 x >= l + k y.

Where k >= 0 the imaginary part grows with y, while the real part falls to 0 and then grows the other
way: the sum of their squares, each at least, is convex in y, so its least value is at the vertex of
the falling part, moved into the box. Apart, both parts could be small at once; near a resonance that
is far too good.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.search.bounds import Coefficients, Narrow
from optimizer.search.view import View

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Lines:
    """e2 and e1 as lines in Rf over what is left of a box: slopes and constants, at least and at most."""

    rf_low: Floats
    rf_high: Floats
    fall: Floats
    rise: Floats
    fall_from: Floats
    rise_from: Floats
    imaginary_from: Floats
    node_low: Floats
    node_high: Floats
    feedback: Floats
    product: Floats
    least: Floats
    most: Floats


def lines(v: View, left: Narrow, c: Coefficients) -> Lines:
    """The lines of what is left of each box."""
    a, b = v.dominant, v.second
    least, most = v.gain + c.g_low, v.gain + c.g_high
    low, high = v.cin_low + left.cf_low, v.cin_high + left.cf_high
    return Lines(
        rf_low=left.rf_low,
        rf_high=left.rf_high,
        fall=(a + b) * high / least,
        rise=(a + b) * low / most,
        fall_from=a * b * c.g_high / most,  # g/(A0 + g) rises with g
        rise_from=a * b * c.g_low / least,
        imaginary_from=(a + b) * c.g_low / least,
        node_low=low,
        node_high=high,
        feedback=v.gain * left.cf_low,
        product=a * b,
        least=least,
        most=most,
    )


def least_square(at: Lines, x: Floats) -> Floats:
    """|D|^2 at x = w^2, at least; 0 where the imaginary part may fall with Rf (nothing is said there)."""
    rest = 1.0 - at.product * x
    steep = at.feedback + np.where(rest >= 0.0, at.node_low, at.node_high) * rest
    slope = steep / at.most
    start, fall = 1.0 - at.fall_from * x, at.fall * x
    vertex = (start * fall - x * slope * at.imaginary_from) / (fall**2 + x * slope**2)
    y = np.clip(vertex, at.rf_low, at.rf_high)
    real = np.maximum(np.maximum(start - fall * y, (at.rise_from + at.rise * y) * x - 1.0), 0.0)
    square = real**2 + x * (at.imaginary_from + slope * y) ** 2
    return np.where(slope >= 0.0, square, 0.0)
