"""The answer of one candidate to a step of light, in closed form: the matrix exponential of its poles.

Each real pole is a state of its own time constant and each resonant pair two states of its own
frequency, one behind the other, so that poles which coincide or lie far apart lose no digits.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optimizer.physics.roots import cubic_roots
from optimizer.search.glass.records import Step
from optimizer.search.glass.subject import Subject, number

Floats = NDArray[np.float64]

SETTLED = 0.01
NOISE = 1e-11  # above rounding in the exponential
LEAST_POINTS = 4096
MOST_POINTS = 1 << 18
PER_PERIOD = 40
SHOWN_PERIODS = 100
SHOWN_POINTS = 1500
SHOWN_BEYOND = 1.4  # of the settling time
BISECTIONS = 48


@dataclass(frozen=True, slots=True)
class Poles:
    """Time constants [s] of the real poles; sum [s] and product [s^2] of a resonant pair's (0: no pair)."""

    real: tuple[float, ...]
    pair: tuple[float, float]

    @property
    def horizon(self) -> float:
        """A time [s] by which the answer has settled: seven times what all poles take together."""
        return 7.0 * (sum(self.real) + 2.0 * self.decay)

    @property
    def decay(self) -> float:
        """Time constant [s] at which the resonant pair dies away; 0 without one."""
        total, product = self.pair
        return 2.0 * product / total if product else 0.0

    @property
    def shown(self) -> float:
        """The longest time [s] worth showing: a hundred periods where the pair rings on by itself."""
        return SHOWN_PERIODS * self.period if self.decay > sum(self.real) else float("inf")

    @property
    def period(self) -> float:
        """Of the resonant pair [s]; infinite without one."""
        total, product = self.pair
        damping = 0.25 * total**2 / product if product else 1.0
        return float(2.0 * np.pi * np.sqrt(product / (1.0 - damping))) if damping < 1.0 else float("inf")


def poles(c: Subject) -> Poles:
    """The poles of the loop, the diode and the low-pass."""
    alone, first, second = cubic_roots(c.loop.e1, c.loop.e2, c.loop.e3)
    lags = [-number(alone), number(c.s.pole), number(c.s.low_pass)]
    pair = (0.0, 0.0)
    if np.imag(first).any():
        pair = (-2.0 * number(np.real(first)), number(np.abs(first)) ** 2)
    else:
        lags += [-number(np.real(first)), -number(np.real(second))]
    return Poles(tuple(lag for lag in lags if lag > 0.0), pair)


@dataclass(frozen=True, slots=True)
class Answer:
    """The answer and its slope [1/s] at moments from 0, `interval` [s] apart."""

    interval: float
    value: Floats
    slope: Floats

    def reached(self, level: float) -> float:
        """When the answer first reaches `level`."""
        after = int(np.argmax(self.value >= level))
        return self._moment(after - 1, level)

    def settled(self) -> float:
        """When the answer last enters the band around 1."""
        last = int(np.flatnonzero(np.abs(self.value - 1.0) > SETTLED)[-1])
        return self._moment(last, 1.0 + SETTLED * float(np.sign(self.value[last] - 1.0)))

    def overshoot(self) -> float:
        """How far above 1 the highest point is."""
        top = int(np.argmax(self.value))
        if self.value[top] <= 1.0 + NOISE:
            return 0.0
        cubic = self._between(top if self.slope[top] > 0.0 else top - 1)
        return max(float(self.value[top]), float(cubic(_root(cubic.deriv())))) - 1.0

    def _moment(self, before: int, level: float) -> float:
        """When the answer passes `level` after the moment `before`."""
        return self.interval * (before + _root(self._between(before) - level))

    def _between(self, before: int) -> np.polynomial.Polynomial:
        """The cubic through two moments with their slopes, over the share of the interval."""
        (start, end), (rise, fall) = self.value[before : before + 2], self.slope[before : before + 2]
        rise, fall, gap = rise * self.interval, fall * self.interval, end - start
        return np.polynomial.Polynomial([start, rise, 3.0 * gap - 2.0 * rise - fall, rise + fall - 2.0 * gap])


def _root(change: np.polynomial.Polynomial) -> float:
    """Where, from 0 to 1, a polynomial takes the other sign, by bisection."""
    low, high = 0.0, 1.0
    start = change(low) < 0.0
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if (change(middle) < 0.0) == start else (low, middle)
    return low


def answer(found: Poles) -> Answer:
    """1 - c exp(M t) x at even moments up to the horizon, by powers of one interval's exponential."""
    from scipy.linalg import expm

    matrix, left, output = _states(found)
    count = max(LEAST_POINTS, min(MOST_POINTS, PER_PERIOD * found.horizon / found.period))
    interval = found.horizon / count
    power, states = expm(matrix * interval), left[:, None]
    while states.shape[1] < count:
        states, power = np.hstack([states, power @ states]), power @ power
    return Answer(interval, np.asarray(1.0 - states[output]), np.asarray(-(matrix @ states)[output]))


def _states(found: Poles) -> tuple[Floats, Floats, int]:
    """The matrix [1/s] of the states, the states at rest in the end, and the row that is the output.

    The resonant pair comes first, then the real poles, each fed by the one before.
    """
    total, product = found.pair
    start = 2 if product else 0
    size = start + len(found.real)
    matrix, rest = np.zeros((size, size)), np.ones(size)
    if product:
        turn = 1.0 / np.sqrt(product)
        matrix[:2, :2] = [[0.0, turn], [-turn, -total / product]]
        rest[1] = 0.0
    for row, lag in enumerate(found.real, start):
        matrix[row, row] = -1.0 / lag
        if row:
            matrix[row, 0 if row == start else row - 1] = 1.0 / lag
    return matrix, rest, size - 1 if found.real else 0


def step(c: Subject) -> Step:
    """The step response of `c`."""
    if not c.stable or not np.isfinite(c.s.pole).all():
        none = np.array([np.nan])
        return Step(none, none, np.nan, np.nan, np.nan)
    found = poles(c)
    sampled = answer(found)
    settling = sampled.settled()
    shown = int(min(SHOWN_BEYOND * settling, found.shown) / sampled.interval) + 1
    rows = np.arange(0, min(shown, sampled.value.size), max(1, shown // SHOWN_POINTS))
    return Step(
        time=np.asarray(sampled.interval * rows, dtype=float),
        value=sampled.value[rows],
        rise_time=sampled.reached(0.9) - sampled.reached(0.1),
        overshoot=sampled.overshoot(),
        settling_time=settling,
    )
