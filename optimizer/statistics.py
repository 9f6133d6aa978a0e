"""The statistics of spreads: how far a random part is from nominal, and how sure a counted share is.

Pure functions. Deviations are relative to the nominal value, which cannot be left behind by as much as
itself: a part has no value below zero, so both distributions are cut at -1. That changes neither unless
a spread is wide (uniform: above 1; normal: from about 0.5 up).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]

SIGMAS = 3.0
"""How many standard deviations of a normal distribution a stated spread is."""

CONFIDENCE = 0.95

_LEAST_SHARE = 2.0**-54
"""Half of the smallest step of a random number: a share of exactly 0 would lie infinitely far out."""


def uniform(spread: ArrayLike, share: ArrayLike) -> Floats:
    """Deviations below which `share` of the parts lie, all within `spread` being equally likely.

    Args:
        spread: greatest deviation to either side, relative, 0 or more.
        share: in [0, 1), broadcastable with `spread`.

    Returns:
        The relative deviations, not below -1.

    Example:
        >>> uniform(0.05, [0.25, 0.5, 0.75]).tolist()
        [-0.025, 0.0, 0.025]
    """
    width, part = np.asarray(spread, dtype=float), _inside(share)
    return np.asarray(np.where(width < 1.0, width * (2.0 * part - 1.0), (width + 1.0) * part - 1.0))


def normal(spread: ArrayLike, share: ArrayLike) -> Floats:
    """Deviations below which `share` of the parts lie, normally distributed with `spread` as 3 sigma.

    Args:
        spread: three standard deviations, relative, 0 or more.
        share: in [0, 1), broadcastable with `spread`.

    Returns:
        The relative deviations, not below -1.

    Example:
        >>> normal(0.03, [0.5, 0.95]).round(6).tolist()
        [0.0, 0.016449]
    """
    from scipy.special import ndtr, ndtri

    sigma = np.asarray(spread, dtype=float) / SIGMAS
    with np.errstate(divide="ignore", over="ignore"):
        cut = ndtr(-1.0 / sigma)
    return np.asarray(np.maximum(sigma * ndtri(cut + (1.0 - cut) * _inside(share)), -1.0))


def _inside(share: ArrayLike) -> Floats:
    return np.asarray(np.maximum(np.asarray(share, dtype=float), _LEAST_SHARE))


def wilson(passed: int, draws: int, confidence: float = CONFIDENCE) -> tuple[float, float]:
    """The share that `passed` of `draws` stands for, as a score interval without continuity correction.

    Source: E. B. Wilson, Probable inference, the law of succession, and statistical inference,
    Journal of the American Statistical Association 22 (1927), 209-212; method 3 of R. G. Newcombe,
    Statistics in Medicine 17 (1998), 857-872 (both cited from memory).

    Args:
        passed: how many passed, 0 to `draws`.
        draws: how many there were, 1 or more.
        confidence: of the interval, in (0, 1).

    Returns:
        The two ends, in [0, 1].

    Raises:
        ValueError: `passed` or `draws` is outside its range.

    Example:
        >>> low, high = wilson(15, 148)
        >>> round(low, 4), round(high, 4)
        (0.0624, 0.1605)
    """
    from scipy.stats import binomtest

    interval = binomtest(passed, draws).proportion_ci(confidence, method="wilson")
    return float(interval.low), float(interval.high)
