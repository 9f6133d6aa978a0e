"""The closed loop where something is absent, extreme, unknown or just at an edge."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.physics import loop as loops
from optimizer.physics.loop import Loop, Network

ONE = np.ones(1)
ZERO = np.zeros(1)
INF = np.full(1, np.inf)


def closed(e1: float, e2: float, e3: float = 0.0) -> Loop:
    """A loop given by its denominator alone."""
    return Loop(ONE, ONE, e1 * ONE, e2 * ONE, e3 * ONE, ZERO, ZERO)


def receiver(
    gbw: float, second: float, cf: float, shunt: float = 0.0, a0: float = 1e5
) -> tuple[loops.Amplifier, Loop]:
    amp = loops.amplifier(a0 * ONE, gbw * ONE, second * ONE)
    return amp, loops.close(amp, Network(100e3 * ONE, cf * ONE, shunt * ONE, 20e-12 * ONE))


def test_no_second_pole_is_the_limit_of_a_far_one() -> None:
    amp, without = receiver(10e6, np.inf, 1e-12)
    far_amp, far = receiver(10e6, 1e15, 1e-12)
    assert amp.second[0] == without.e3[0] == 0.0
    for name in ("e1", "e2", "gain"):
        assert getattr(far, name)[0] == pytest.approx(getattr(without, name)[0], rel=1e-6)
    assert loops.phase_margin(far_amp, far)[0] == pytest.approx(loops.phase_margin(amp, without)[0], abs=1e-6)
    assert loops.peaking(far)[0] == pytest.approx(loops.peaking(without)[0], abs=1e-6)


def test_two_equal_poles_have_the_textbook_bandwidth() -> None:
    """Two equal poles: f = (sqrt 2 - 1)^(1/2) / (2 pi t) (common practice, no source)."""
    t = 1e-6
    found = loops.bandwidth(closed(2 * t, t * t), diode=ZERO, low_pass=ZERO)
    assert found[0] == pytest.approx(np.sqrt(np.sqrt(2.0) - 1.0) / (2 * np.pi * t), rel=1e-13)


@pytest.mark.parametrize("count", [1, 2])
def test_diode_and_low_pass_narrow_alike(count: int) -> None:
    """One or two equal poles far below the loop: f = (2^(1/n) - 1)^(1/2) / (2 pi t)."""
    slow = np.array([1e-3])
    others = slow if count == 2 else ZERO
    found = loops.bandwidth(closed(2e-12, 1e-24), diode=slow, low_pass=others)
    swapped = loops.bandwidth(closed(2e-12, 1e-24), diode=others, low_pass=slow)
    assert found[0] == pytest.approx(np.sqrt(2.0 ** (1.0 / count) - 1.0) / (2 * np.pi * 1e-3), rel=1e-9)
    assert found[0] == pytest.approx(swapped[0], rel=1e-15)


@pytest.mark.parametrize(("order", "e"), [(2, (np.sqrt(2.0), 1.0, 0.0)), (3, (2.0, 2.0, 1.0))])
def test_maximally_flat_responses_do_not_peak_and_end_at_one(
    order: int, e: tuple[float, float, float]
) -> None:
    """Butterworth polynomials of order 2 and 3 (standard filter tables): flat, 3 dB down at w = 1."""
    loop = closed(*e)
    assert loops.peaking(loop)[0] == pytest.approx(0.0, abs=1e-12)
    assert loops.bandwidth(loop, diode=ZERO, low_pass=ZERO)[0] * 2 * np.pi == pytest.approx(1.0, rel=1e-9)


@given(st.floats(0.01, 0.7))
@settings(max_examples=100, deadline=None, derandomize=True)
def test_second_order_peak_is_the_textbook_one(damping: float) -> None:
    """1 / (2 zeta sqrt(1 - zeta^2)) (standard second-order system)."""
    expected = -20.0 * np.log10(2.0 * damping * np.sqrt(1.0 - damping**2))
    assert loops.peaking(closed(2.0 * damping, 1.0))[0] == pytest.approx(expected, abs=1e-9)


def test_peaking_of_a_third_order_loop_is_the_top_of_a_fine_grid() -> None:
    rng = np.random.default_rng(4)
    w = np.logspace(-3, 3, 600_001)
    for _ in range(10):
        e1, e2 = 10.0 ** rng.uniform(-0.5, 0.5, 2)
        e3 = e1 * e2 * rng.uniform(0.05, 0.98)
        size = 1.0 / np.abs(1 - e2 * w**2 + 1j * (e1 * w - e3 * w**3))
        expected = max(20 * np.log10(size.max()), 0.0)
        assert loops.peaking(closed(e1, e2, e3))[0] == pytest.approx(expected, abs=1e-4)


def test_a_heavily_damped_loop_peaks_by_exactly_nothing() -> None:
    assert loops.peaking(closed(10.0, 1.0, 0.1))[0] == 0.0
    assert not np.signbit(loops.peaking(closed(10.0, 1.0, 0.1))[0])


def test_without_gain_there_is_no_crossover_and_no_margin() -> None:
    """A0 at, below and above 1 + Rf/Rsh."""
    for a0, exists in [(10.0, False), (11.0, False), (11.1, True)]:
        amp, loop = receiver(1e6, np.inf, 1e-12, shunt=1e-4, a0=a0)
        assert np.isfinite(loops.phase_margin(amp, loop)[0]) == exists
        assert np.isfinite(loops.crossover(amp, loop)[0]) == exists


def test_crossover_makes_the_loop_gain_one() -> None:
    rng = np.random.default_rng(5)
    for _ in range(50):
        second = rng.choice([np.inf, 3e6, 3e7])
        amp, loop = receiver(
            10.0 ** rng.uniform(5, 9), second, rng.choice([0.0, 1e-13, 1e-9]), rng.choice([0, 1e-6])
        )
        s = 1j * loops.crossover(amp, loop)
        gain = amp.dc_gain / ((1 + s * amp.dominant) * (1 + s * amp.second))
        noise_gain = (loop.dc_noise_gain + s * loop.total) / (1 + s * loop.feedback)
        assert abs((gain / noise_gain)[0]) == pytest.approx(1.0, rel=1e-10)
        lag = np.degrees(np.angle((gain / noise_gain)[0]))
        found = loops.phase_margin(amp, loop)[0]
        assert (found - 180.0 - lag + 180.0) % 360.0 - 180.0 == pytest.approx(0.0, abs=1e-8)


def test_stability_is_the_sign_of_the_phase_margin() -> None:
    """Routh: e1 e2 > e3 exactly where the margin is positive (standard criterion)."""
    rng = np.random.default_rng(6)
    stable = 0
    for _ in range(300):
        amp, loop = receiver(1e7, 10.0 ** rng.uniform(4, 8), 10.0 ** rng.uniform(-15, -11))
        margin = loops.phase_margin(amp, loop)[0]
        if abs(margin) < 1e-6:
            continue
        stable += margin > 0
        assert (margin > 0) == (loop.e1[0] * loop.e2[0] > loop.e3[0])
    assert 50 < stable < 250


def test_a_follower_of_one_pole_has_90_degrees_and_with_a_second_pole_at_gbw_less_than_60() -> None:
    amp = loops.amplifier(1e5 * np.ones(3), 1e6 * np.ones(3), np.array([np.inf, 1e6, 1e3]))
    found = loops.follower_phase_margin(amp)
    assert found[0] == pytest.approx(90.0, abs=1e-3)
    # |A| = 1 where w^2 (1 + w^2) = 1: w = 0.786, 90 - atan 0.786 deg
    assert found[1] == pytest.approx(
        90.0 - np.degrees(np.arctan(np.sqrt((np.sqrt(5.0) - 1.0) / 2.0))), abs=1e-2
    )
    assert 0.0 < found[2] < 3.0


def test_everything_broadcasts() -> None:
    amp = loops.amplifier(np.full((3, 1), 1e5), np.array([[1e6], [1e7], [1e8]]), INF)
    net = Network(np.array([1e4, 1e5]), np.array(1e-12), np.array(0.0), np.array(20e-12))
    loop = loops.close(amp, net)
    for values in (
        loops.phase_margin(amp, loop),
        loops.peaking(loop),
        loops.bandwidth(loop, diode=np.zeros((3, 2)), low_pass=np.array(0.0)),
    ):
        assert values.shape == (3, 2)
    alone = loops.close(
        loops.amplifier(1e5 * ONE, 1e7 * ONE, INF), Network(1e5 * ONE, 1e-12 * ONE, ZERO, 20e-12 * ONE)
    )
    assert loops.peaking(loop)[1, 1] == loops.peaking(alone)[0]


@pytest.mark.parametrize("unknown", range(6))
def test_nan_in_nan_out_without_a_warning(unknown: int) -> None:
    """Unknown values stay unknown, without a warning."""
    values = [np.array([v, v]) for v in (1e5, 1e7, 1e8, 1e5, 1e-12, 20e-12)]
    values[unknown] = values[unknown] * np.array([np.nan, 1.0])
    a0, gbw, second, rf, cf, cin = values
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        amp = loops.amplifier(a0, gbw, second)
        loop = loops.close(amp, Network(rf, cf, np.zeros(2), cin))
        found = [
            loops.phase_margin(amp, loop),
            loops.peaking(loop),
            loops.bandwidth(loop, diode=np.zeros(2), low_pass=np.zeros(2)),
        ]
    for row in found:
        assert np.isnan(row[0])
        assert np.isfinite(row[1])


def test_an_unknown_diode_pole_leaves_the_bandwidth_unknown() -> None:
    loop = closed(2e-6, 1e-12)
    found = loops.bandwidth(loop, diode=np.array([np.nan, 0.0]), low_pass=np.array(0.0))
    assert np.isnan(found[0])
    assert np.isfinite(found[1])
