"""Rows about tolerance stacks, normal tables and intervals of proportions: what the engine says for them.

A stack is made of one receiver whose parts take the row's values, moved to every corner of the spreads
that its families and the request state. The row's sum, product or quotient is one that the receiver has:
a sum of capacitances, a quotient of voltage and resistance, the second coefficient of the loop.
"""

from __future__ import annotations

from collections.abc import Callable
from itertools import product
from math import inf, pi
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

from optimizer import statistics
from optimizer.figures import Settings, amplifier_of, evaluate, input_capacitance
from optimizer.physics import loop as loops
from optimizer.request.types import Tolerance
from optimizer.search.space import Choice, Space, build
from optimizer.search.spread.spreads import half_widths, moved
from tests.search import made

Values = float | tuple[float, ...]
Floats = NDArray[np.float64]

GBW = 100e6
SMALL = 3e-6
"""A spread so small that no normal deviation is cut; a third of it is one sigma."""


# Stacks


def receiver(
    *, rf: float = 1e3, tolerance: float = 0.0, capacitances: tuple[float, float, float] = (1e-12, 0.0, 0.0),
    high: float = 5.0, **spreads: float,
) -> tuple[Space, Choice]:  # fmt: skip
    """A receiver without errors, with Rf and the capacitances of diode, op-amp and board."""
    diode, opamp, stray = capacitances
    ideal: dict[str, Any] = {"open_loop_gain": 1e9, "offset_voltage": 0.0, "bias_current": 0.0}
    ideal |= {"bias_doubling": inf, "output_high": 0.0, "gbw": GBW, "supply_max": 100.0}
    ideal |= {"input_capacitance_common": opamp, "input_capacitance_differential": 0.0}
    catalogs = made.catalogs(
        opamps=[made.opamp(**ideal)],
        photodiodes=[
            made.diode(
                capacitance=[(0.0, diode)], responsivity=[(800e-9, 1.0), (900e-9, 1.0)], shunt_resistance=inf
            )
        ],
        resistors=[made.resistor(**made.listed(rf), tolerance=tolerance, parasitic_capacitance=0.0)],
    )
    request = made.request(
        supply={"high": high, "low": -high},
        space={"resistance": (rf, rf), "stray": stray, "references": ("ground",)},
        tolerance=Tolerance(**spreads),
    )
    return build(request, catalogs), Choice(*(np.zeros(1, dtype=np.int64) for _ in range(6)))


def at_corners(read: Callable[[Space, Settings], Floats], case: tuple[Space, Choice]) -> tuple[float, ...]:
    """What `read` finds at nominal, and its least and largest value over all corners of the spreads."""
    space, choice = case
    widths = {name: float(width[0]) for name, width in half_widths(space, choice).items() if width[0] > 0.0}
    signs = np.array([(0.0,) * len(widths), *product((-1.0, 1.0), repeat=len(widths))]).T
    every = choice.take(np.zeros(signs.shape[1], dtype=np.int64))
    found = read(
        space, moved(space, every, {n: w * s for (n, w), s in zip(widths.items(), signs, strict=True)})
    )
    return float(found[0]), float(found[1:].min()), float(found[1:].max())


def second_coefficient(_: Space, s: Settings) -> Floats:
    """Rf Cin/(2 pi GBW), which makes the loop a resonator; no Cf is placed."""
    return loops.close(amplifier_of(s), loops.Network(s.rf, s.cf, s.shunt, input_capacitance(s))).e2


def resonance(*, L: float, C: float, t: float) -> Values:
    """1/(2 pi sqrt(L C)) at the corners: the loop's natural frequency, L standing for Rf/(2 pi GBW)."""
    case = receiver(rf=2 * pi * GBW * L, tolerance=t, capacitances=(C, 0.0, 0.0), diode_capacitance=t)
    _, low, high = at_corners(lambda space, s: 1 / (2 * pi * np.sqrt(second_coefficient(space, s))), case)
    return low, high


def quotient(*, R: list[float], t: float) -> Values:
    """R2 R3/R1 and its deviation, to first order: half the distance between the extreme corners."""
    case = receiver(rf=R[1], tolerance=t, capacitances=(R[2] * 1e-12, 0.0, 0.0), gbw=t, diode_capacitance=t)
    scale = 2 * pi * 1e12 * GBW / R[0]
    value, low, high = at_corners(lambda space, s: scale * second_coefficient(space, s), case)
    return value, (high - low) / 2


def current(*, V: float, R: float, t: float) -> Values:
    """V/R at the corners: the largest photocurrent whose output stays within V."""
    case = receiver(rf=R, tolerance=t, high=V)
    _, low, high = at_corners(lambda space, s: evaluate(space.bench, s).figures["full_scale"], case)
    return high, low


def total(*, R: list[float], t: float) -> Values:
    """A sum of three and its deviation: the capacitances at the summing node."""
    case = receiver(capacitances=(R[0], R[1], R[2]), diode_capacitance=t, input_capacitance=t, stray=t)
    value, low, high = at_corners(lambda _, s: input_capacitance(s), case)
    return value, (high - low) / 2


# Normal tables


def quantile(share: float) -> float:
    """Standard deviations below which `share` of a normal distribution lies."""
    return float(statistics.normal(SMALL, share)) / (SMALL / 3)


def below(z: float) -> float:
    """The share that lies below z standard deviations: the quantile, solved for it."""
    return float(brentq(lambda share: quantile(share) - z, 1e-12, 1 - 1e-12, xtol=1e-14))


def between() -> Values:
    return below(1.28) - below(0.87), below(0.62) - below(-0.34)


def one_sided() -> Values:
    return quantile(0.99), quantile(0.95)


def mean_for(*, sd: float, p: float, lim: float) -> float:
    """The nominal value of which the share `p` is drawn below the limit."""

    def excess(mean: float) -> float:
        return mean * (1 + float(statistics.normal(3 * sd / mean, p))) - lim

    return float(brentq(excess, lim, 2 * lim, xtol=1e-13))


def at_most(*, n: int, p: float, x: int) -> float:
    """Normal approximation to the binomial distribution, with continuity correction."""
    return below((x + 0.5 - n * p) / float(np.sqrt(n * p * (1 - p))))


# Intervals


def wilson(*, x: int, n: int) -> Values:
    return statistics.wilson(x, n)


HELD: dict[str, Callable[..., Values]] = {
    "TOL-04": resonance,
    "TOL-05": quotient,
    "TOL-06": current,
    "TOL-07": total,
    "YLD-01": between,
    "YLD-02": one_sided,
    "YLD-04": mean_for,
    "YLD-05": at_most,
    "YLD-06": wilson,
    "YLD-08b": wilson,
    "YLD-08c": wilson,
    "YLD-08d": wilson,
}
