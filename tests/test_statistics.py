"""Deviations of random parts and intervals of counted shares, held to another library and to moments.

Published tables of the normal distribution and published intervals are held in tests/published.
"""

from __future__ import annotations

from math import sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from optimizer import statistics

RUN = settings(max_examples=200, deadline=None, derandomize=True)
SHARES = (np.arange(200_000) + 0.5) / 200_000  # evenly over (0, 1): moments by the midpoint rule

distributions = pytest.mark.parametrize("deviate", [statistics.uniform, statistics.normal])


@pytest.mark.independent
@pytest.mark.parametrize("spread", [1e-3, 0.05, 0.3, 0.9])
def test_uniform_quantiles_are_those_of_another_library(spread: float) -> None:
    expected = stats.uniform(-spread, 2 * spread).ppf(SHARES[::997])
    assert statistics.uniform(spread, SHARES[::997]) == pytest.approx(expected, abs=1e-13)


@pytest.mark.independent
@pytest.mark.parametrize("spread", [1e-3, 0.05, 0.3, 0.9, 3.0])
def test_normal_quantiles_are_those_of_another_library_cut_at_minus_1(spread: float) -> None:
    sigma = spread / 3
    expected = stats.truncnorm(-1 / sigma, np.inf, scale=sigma).ppf(SHARES[::997])
    assert statistics.normal(spread, SHARES[::997]) == pytest.approx(expected, rel=1e-9, abs=1e-13)


def test_a_uniform_spread_of_more_than_the_value_itself_is_cut_at_zero() -> None:
    found = statistics.uniform(1.5, SHARES)
    assert found.min() == pytest.approx(-1.0, abs=1e-4)
    assert found.max() == pytest.approx(1.5, abs=1e-4)
    assert np.diff(found) == pytest.approx(2.5 / SHARES.size, rel=1e-6)


@pytest.mark.parametrize("spread", [0.01, 0.3])
def test_moments_are_those_of_the_two_distributions(spread: float) -> None:
    """Standard deviations: a/sqrt 3 over +-a, and a/3 where a is 3 sigma. Kurtosis: 9/5 and 3."""
    for deviate, sigma, kurtosis in (
        (statistics.uniform, spread / sqrt(3), 1.8),
        (statistics.normal, spread / 3, 3.0),
    ):
        found = deviate(spread, SHARES)
        assert found.mean() == pytest.approx(0.0, abs=1e-9)
        assert found.std() == pytest.approx(sigma, rel=1e-4)
        assert stats.kurtosis(found, fisher=False) == pytest.approx(kurtosis, rel=1e-3)


def test_a_spread_is_three_sigma_of_a_normal_distribution() -> None:
    """99.73 % of the parts lie inside it; common knowledge, no source."""
    inside = np.abs(statistics.normal(0.05, SHARES)) <= 0.05
    assert inside.mean() == pytest.approx(0.9973, abs=5e-5)


@distributions
def test_without_a_spread_nothing_deviates(deviate) -> None:
    assert np.all(deviate(0.0, np.r_[0.0, SHARES]) == 0.0)


@distributions
@RUN
@given(
    spread=st.floats(0.0, 5.0), shares=st.lists(st.floats(0.0, 1.0, exclude_max=True), min_size=2, max_size=5)
)
def test_deviations_rise_with_the_share_and_are_finite_and_never_below_minus_1(
    deviate, spread: float, shares: list[float]
) -> None:
    found = deviate(spread, np.sort(shares))
    assert np.all(np.isfinite(found))
    assert np.all(np.diff(found) >= 0.0)
    assert np.all(found >= -1.0)


@distributions
def test_spreads_and_shares_broadcast(deviate) -> None:
    table = deviate(np.array([[0.1], [0.2]]), np.array([0.1, 0.5, 0.9]))
    assert table.shape == (2, 3)
    assert table[1] == pytest.approx(2 * table[0])


# Wilson's interval


@pytest.mark.independent
@RUN
@given(st.integers(1, 10**6).flatmap(lambda n: st.tuples(st.integers(0, n), st.just(n))))
def test_the_ends_are_where_the_score_test_just_rejects(counted: tuple[int, int]) -> None:
    """The definition: |share - p| = z sqrt(p (1 - p)/n) at both ends, z of 95 % from the library."""
    passed, n = counted
    share, z = passed / n, stats.norm.ppf(0.975)
    low, high = statistics.wilson(passed, n)
    assert (low == 0.0) if passed == 0 else (0.0 < low < share)
    assert (high == 1.0) if passed == n else (share < high < 1.0)
    for end in (low, high):
        assert abs(share - end) == pytest.approx(z * np.sqrt(end * (1 - end) / n), rel=1e-7, abs=1e-15)


def test_an_interval_reaches_the_end_where_all_or_none_passed() -> None:
    assert statistics.wilson(0, 20)[0] == 0.0
    assert statistics.wilson(20, 20)[1] == 1.0
    assert statistics.wilson(20, 20)[0] == pytest.approx(1 - statistics.wilson(0, 20)[1])


def test_more_confidence_or_fewer_draws_widen_the_interval() -> None:
    low, high = statistics.wilson(90, 100)
    for other in (statistics.wilson(90, 100, 0.99), statistics.wilson(45, 50)):
        assert other[0] < low < high < other[1]


def test_ends_are_plain_numbers() -> None:
    assert [type(end) for end in statistics.wilson(3, 4)] == [float, float]


@pytest.mark.parametrize(("passed", "draws"), [(5, 4), (-1, 4), (0, 0)])
def test_impossible_counts_are_refused(passed: int, draws: int) -> None:
    with pytest.raises(ValueError, match=r"."):
        statistics.wilson(passed, draws)


@pytest.mark.independent
@pytest.mark.parametrize("share", [0.5, 0.9, 0.99])
def test_intervals_hold_the_true_share_about_as_often_as_they_say(share: float) -> None:
    """Exact coverage over the binomial distribution, near 95 % for 500 draws."""
    n = 500
    counts = np.arange(n + 1)
    ends = np.array([statistics.wilson(int(k), n) for k in counts])
    holds = (ends[:, 0] <= share) & (share <= ends[:, 1])
    assert stats.binom(n, share).pmf(counts[holds]).sum() == pytest.approx(0.95, abs=0.02)
