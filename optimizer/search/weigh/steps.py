"""Steps of one target: its limit moved by a margin, or dropped.

A step of m moves the limit to where the margin against the stated limit is m, so unlike targets move
alike: relaxed by 10 % (m = -0.1) admits what misses the stated limit by 10 %, tightened by 10 % asks
for 10 % to spare. Solved from the definitions of `margins` for limit L:

  at least, linear      L (1 + m)
  at least, dB          L + 20 log10(1 + m)
  phase margin          L + 30 deg m
  peaking               L (1 - m)
  at most, linear       L / (1 + m)
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from optimizer import margins
from optimizer.figures import rounded
from optimizer.vocabulary import VOCABULARY

Floats = NDArray[np.float64]

RELAXED = (-0.5, -0.2, -0.1, -0.05)
TIGHTENED = (0.05, 0.1, 0.2, 0.5)
DROPPED = None
STEPS: tuple[float | None, ...] = (DROPPED, *RELAXED, *TIGHTENED)
"""Every step of a target, the loosest first."""

_FREE = {
    **dict.fromkeys(margins.AT_LEAST, 0.0),
    **dict.fromkeys((*margins.DECIBELS, "phase_margin"), -np.inf),
    **dict.fromkeys(("peaking", *margins.AT_MOST), np.inf),
}


def moved(name: str, limit: float, step: float | None) -> float:
    """The limit of target `name` after `step` [margin against `limit`]; None frees it.

    Rounded to 9 digits as figures are, so that it can be typed into a request.
    """
    if step is None:
        return free(name)
    if name in margins.AT_LEAST:
        there = limit * (1.0 + step)
    elif name in margins.DECIBELS:
        there = limit + 20.0 * float(np.log10(1.0 + step))
    elif name == "phase_margin":
        there = limit + margins.PHASE_SCALE * step
    elif name == "peaking":
        there = limit * (1.0 - step)
    else:
        there = limit / (1.0 + step)
    return float(rounded(np.array(there)))


def free(name: str) -> float:
    """The limit of target `name` that stands for none at all: no candidate can miss it."""
    return _FREE[name]


def graded(name: str, values: Floats, limits: Floats) -> Floats:
    """Margins of `values` against `limits`, as `margins.margin`; the largest where the limit is free.

    Figures that do not exist (NaN) meet a free limit too, as they do where a target is dropped.
    """
    against: float = limits  # type: ignore[assignment]  # margins broadcast over limits
    return np.where(limits == free(name), margins.LARGEST, margins.margin(name, values, against))


_FINEST = {**dict.fromkeys(margins.DECIBELS, 1e-8), "phase_margin": 1e-7}
"""Values [dB, deg] closer than this count as one: margins do not tell them apart."""


def stricter(name: str, value: float) -> float | None:
    """The loosest limit of target `name` that `value` misses: one step of its last digit further.

    None where nothing can be better.
    """
    higher = VOCABULARY[name].better == "higher"
    if value == 0.0:
        return SMALLEST if higher else None
    # towards 0 the step just beyond a power of ten is the finer one
    size = abs(value) * (1.0 + 1e-12 if higher == (value > 0.0) else 1.0 - 1e-12)
    step = max(10.0 ** (np.floor(np.log10(size)) - 8.0), _FINEST.get(name, 0.0))
    return float(rounded(np.array(value + step if higher else value - step)))


SMALLEST = 1e-300


def far_below(name: str, limit: float) -> float:
    """A limit of target `name` a thousand times looser than `limit` (60 dB; for a phase margin, 0)."""
    if name == "phase_margin":
        return 0.0
    if name in margins.DECIBELS:
        return limit - 60.0
    return limit / 1e3 if name in margins.AT_LEAST else limit * 1e3


def loosest(name: str) -> float:
    """A limit of target `name` that every value meets, if it exists (and is not 0 where more is better)."""
    if name in (*margins.DECIBELS, "phase_margin"):
        return -1e3
    return SMALLEST if name in margins.AT_LEAST else 1.0 / SMALLEST
