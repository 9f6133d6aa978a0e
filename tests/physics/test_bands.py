"""Noise integrals at the edges: absent poles, coincident ones, resonances, extreme starts of flicker."""

from __future__ import annotations

import warnings
from collections.abc import Callable, Sequence
from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import quad

from optimizer.physics.loop import Loop
from optimizer.physics.noise import Band, flicker_band, times_pole, white_band

ZERO = np.zeros(1)


def loop_of(constants: Sequence[complex]) -> Loop:
    """A loop whose denominator is the product of (1 + s t) over up to three time constants."""
    padded = [*constants, *([0.0] * (3 - len(constants)))]
    e1, e2, e3 = np.poly([-t for t in padded])[1:].real
    one = np.ones(1)
    return Loop(one, one, np.array([e1]), np.array([e2]), np.array([e3]), ZERO, ZERO)


def by_quadrature(constants: Sequence[complex], start: float, *, rising: bool, flicker: bool) -> float:
    """Adaptive quadrature over ln f of |1/D|^2 or |s/D|^2, over f where `flicker`."""
    sizes = np.abs([t for t in constants if t != 0])
    low = np.log(start) if start else np.log(1e-7 / sizes.max())
    high = np.log(1e9 / sizes.min())
    corners = [np.log(abs(t) / (2 * np.pi * abs(t) ** 2)) for t in constants if t != 0]
    for t in constants:
        if np.imag(t):
            # the resonance itself, and a few widths beside it
            corners += [
                np.log(abs(np.imag(1 / t)) / (2 * np.pi)) + k * abs(np.real(t) / t)
                for k in (-30, -3, 0, 3, 30)
            ]
    edges = np.unique(np.clip([low, *corners, high], low, high))

    def density(u: float) -> float:
        f = np.exp(u)
        s = 2j * np.pi * f
        gain = 1.0 / abs(np.prod([1.0 + s * t for t in constants])) ** 2
        return float(gain * (abs(s) ** 2 if rising else 1.0) * (1.0 if flicker else f))

    pieces = [
        quad(density, a, b, epsrel=1e-12, epsabs=0.0, limit=500)[0]
        for left, right in pairwise(edges)
        for a, b in [(left, (left + right) / 2), ((left + right) / 2, right)]
    ]
    below = 0.0 if start or rising or flicker else float(np.exp(low))
    return float(np.sum(pieces)) + below


def both(band: Band) -> tuple[float, float]:
    return float(np.ravel(band.flat)[0]), float(np.ravel(band.rising)[0])


POLES: dict[str, Sequence[complex]] = {
    "two apart": (1e-5, 1e-7),
    "two alike": (1e-6, 1e-6),
    "two alike to 1e-9": (1e-6, 1e-6 * (1 + 1e-9)),
    "two alike to 1e-5": (1e-6, 1e-6 * (1 + 1e-5)),
    "three alike": (1e-6, 1e-6, 1e-6),
    "three alike to 1e-4": (1e-6, 1.0001e-6, 0.9999e-6),
    "three apart": (1e-4, 1e-6, 1e-9),
    "seven decades apart": (1e-2, 1e-5, 1e-9),
    "a resonance": (1e-7 + 1e-6j, 1e-7 - 1e-6j),
    "a sharp resonance": (1e-10 + 1e-6j, 1e-10 - 1e-6j, 1e-8),
    "a resonance far below a pole": (1e-6 + 1e-4j, 1e-6 - 1e-4j, 1e-9),
    "a pair at 45 degrees": (1e-6 + 1e-6j, 1e-6 - 1e-6j),
    "a slow pole before a resonance": (1e-3, 1e-8 + 1e-7j, 1e-8 - 1e-7j),
}
LOW_PASSES: dict[str, Callable[[Sequence[complex]], float]] = {
    "none": lambda _: 0.0,
    "slow": lambda poles: 20.0 * abs(poles[0]),
    "on a pole": lambda poles: abs(poles[-1]),
    "near a pole": lambda poles: abs(poles[-1]) * (1 + 3e-7),
}


@pytest.mark.parametrize("lag", LOW_PASSES)
@pytest.mark.parametrize("name", POLES)
def test_white_integrals_are_those_of_quadrature(name: str, lag: str) -> None:
    tau = LOW_PASSES[lag](POLES[name])
    loop = loop_of(POLES[name])
    band = white_band(times_pole((loop.e1, loop.e2, loop.e3), np.array([tau])))
    poles = [*POLES[name], tau]
    expected = [by_quadrature(poles, 0.0, rising=rising, flicker=False) for rising in (False, True)]
    assert both(band) == pytest.approx(expected, rel=1e-8)


@pytest.mark.parametrize("start", [1e-3, 0.1, 1e3])
@pytest.mark.parametrize("lag", LOW_PASSES)
@pytest.mark.parametrize("name", POLES)
def test_flicker_integrals_are_those_of_quadrature(name: str, lag: str, start: float) -> None:
    """Every pair of loop and low-pass, coincident poles among them, at every start."""
    tau = LOW_PASSES[lag](POLES[name])
    band = flicker_band(loop_of(POLES[name]), np.array([tau]), start)
    poles = [*POLES[name], tau]
    expected = [by_quadrature(poles, start, rising=rising, flicker=True) for rising in (False, True)]
    assert both(band) == pytest.approx(expected, rel=1e-8)


CLOSE = (1e-2, 1e-3, 3e-4, 1e-4, 1e-5, 1e-6, 1e-7, 1e-8, 0.0)


@pytest.mark.parametrize("gap", CLOSE)
def test_flicker_of_two_poles_at_any_distance(gap: float) -> None:
    """Residues of nearly equal poles lose digits as 1/gap^2; the model promises 1e-9."""
    poles = (1e-6, 1e-6 * (1 + gap))
    band = flicker_band(loop_of(poles), ZERO, 0.1)
    expected = [by_quadrature(poles, 0.1, rising=rising, flicker=True) for rising in (False, True)]
    assert both(band) == pytest.approx(expected, rel=2e-9)


@pytest.mark.parametrize("gap", CLOSE)
@pytest.mark.parametrize("third", [1e-7, 1e-5])
def test_flicker_of_a_low_pass_on_the_real_pole_of_a_resonant_loop(third: float, gap: float) -> None:
    """In a loop with |Im| > |Re| the low-pass may sit on the real pole."""
    pair = (1e-6 + 2e-6j, 1e-6 - 2e-6j, third)
    tau = third * (1 + gap)
    band = flicker_band(loop_of(pair), np.array([tau]), 0.1)
    expected = [by_quadrature((*pair, tau), 0.1, rising=rising, flicker=True) for rising in (False, True)]
    assert both(band) == pytest.approx(expected, rel=2e-9)


def test_one_pole_of_white_noise_is_the_noise_bandwidth() -> None:
    """Quarter over the time constant: pi/2 times the -3 dB frequency (a standard result)."""
    band = white_band((np.array([1e-6]), np.array([1e-30]), ZERO))
    assert float(band.flat[0]) == pytest.approx(0.25e6, rel=1e-9)


def test_absent_poles_are_the_limit_of_fast_ones() -> None:
    with_fast = white_band((np.array([2e-6]), np.array([1e-12]), np.array([1e-30])))
    without = white_band((np.array([2e-6]), np.array([1e-12])))
    assert both(with_fast) == pytest.approx(both(without), rel=1e-9)


def test_bands_broadcast_and_keep_their_shape() -> None:
    one = np.ones((2, 1))
    loop = Loop(one, one, 2e-6 * one, 1e-12 * one, 0.0 * one, one, one)
    band = flicker_band(loop, np.array([0.0, 1e-5, 1e-3]), 0.1)
    assert band.flat.shape == band.rising.shape == (2, 3)
    assert (np.diff(band.flat, axis=1) < 0).all()
    alone = flicker_band(loop_of((1e-6, 1e-6)), np.array([1e-5]), 0.1)
    assert band.flat[1, 1] == pytest.approx(float(alone.flat[0]), rel=1e-12)


def test_the_same_loop_gives_the_same_integral_in_any_company() -> None:
    """A loop that is done by quadrature beside one that is not, and both alone."""
    poles = [(1e-6, 1e-6), (1e-4, 1e-7)]
    loops = [loop_of(p) for p in poles]
    e1, e2, e3 = (np.concatenate([getattr(p, e) for p in loops]) for e in ("e1", "e2", "e3"))
    together = Loop(np.ones(2), np.ones(2), e1, e2, e3, np.zeros(2), np.zeros(2))
    band = flicker_band(together, np.zeros(2), 0.1)
    for k, loop in enumerate(loops):
        alone = flicker_band(loop, ZERO, 0.1)
        assert (band.flat[k], band.rising[k]) == (alone.flat[0], alone.rising[0])


def test_nan_in_nan_out_without_a_warning() -> None:
    """Unknown values stay unknown, without a warning."""
    bad = np.array([np.nan, 2e-6])
    one = np.ones(2)
    loop = Loop(one, one, bad, 1e-12 * one, 0.0 * one, one, one)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        white = white_band((loop.e1, loop.e2, loop.e3))
        flicker = flicker_band(loop, np.zeros(2), 0.1)
    for values in (white.flat, white.rising, flicker.flat, flicker.rising):
        assert np.isnan(values[0])
        assert np.isfinite(values[1])
