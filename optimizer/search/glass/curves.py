"""Gain, noise gain, loop gain and response of one candidate over frequency."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

from optimizer.physics import loop as loops
from optimizer.search.glass.records import Curves
from optimizer.search.glass.subject import Subject, number

Floats = NDArray[np.float64]

POINTS = 60  # a decade
LEAST = 400
AROUND_PEAK = 1.0 + np.linspace(-0.15, 0.15, 61)


def curves(c: Subject) -> Curves:
    """The curves of `c`."""
    crossover = number(loops.crossover(c.amp, c.loop)) / (2.0 * np.pi)
    bandwidth = number(loops.bandwidth(c.loop, diode=c.s.pole, low_pass=c.s.low_pass))
    bends = (*corners(c), crossover, bandwidth)
    frequency = spread(
        0.1 * np.nanmin(bends), 10.0 * np.nanmax(bends), marks=(crossover, bandwidth, *around_peak(c))
    )
    w = 2.0 * np.pi * frequency
    open_loop = c.amp.dc_gain / (np.hypot(1.0, c.amp.dominant * w) * np.hypot(1.0, c.amp.second * w))
    noise_gain = np.hypot(c.loop.dc_noise_gain, c.loop.total * w) / np.hypot(1.0, c.loop.feedback * w)
    response = c.transresistance / c.fall(w)
    outside = np.hypot(1.0, c.s.pole * w) * np.hypot(1.0, c.s.low_pass * w)
    return Curves(
        frequency=frequency,
        open_loop=open_loop,
        noise_gain=noise_gain,
        loop_gain=open_loop / noise_gain,
        loop_phase=_loop_phase(c, w),
        transresistance=response / outside,
        loop_transresistance=response,
        crossover=crossover,
        bandwidth=bandwidth,
    )


def _loop_phase(c: Subject, w: Floats) -> Floats:
    """180 deg + arg(A/NG), not wrapped around."""
    lag = np.arctan(c.amp.dominant * w) + np.arctan(c.amp.second * w)
    lag += np.arctan(c.loop.total * w / c.loop.dc_noise_gain) - np.arctan(c.loop.feedback * w)
    return np.asarray(180.0 - np.degrees(lag))


def corners(c: Subject) -> tuple[float, ...]:
    """Frequencies [Hz] around which something bends."""
    lags = (
        c.amp.dominant,
        c.amp.dominant / c.amp.dc_gain,
        c.amp.second,
        c.loop.total / c.loop.dc_noise_gain,
        c.loop.feedback,
        c.s.pole,
        c.s.low_pass,
    )
    return tuple(1.0 / (2.0 * np.pi * lag) for lag in map(number, lags) if lag > 0.0)


def around_peak(c: Subject) -> tuple[float, ...]:
    """Frequencies [Hz] that resolve a resonance; none where the response has no peak."""
    if not c.figures["peaking"] > 0.0:
        return ()
    return tuple((number(loops.peak_frequency(c.loop)) * AROUND_PEAK).tolist())


def spread(low: float, high: float, *, marks: Iterable[float]) -> Floats:
    """Frequencies [Hz] from `low` to `high`, even in their logarithm, with those of `marks` between them."""
    count = max(LEAST, int(np.ceil(POINTS * np.log10(high / low))))
    inside = [mark for mark in marks if low < mark < high]
    return np.unique(np.r_[np.geomspace(low, high, count), inside])
