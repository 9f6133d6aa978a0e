"""The loop's roots held to numpy.roots (companion matrices) and to their own polynomials."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from optimizer.physics.roots import cubic_roots, first_crossing, single_positive_root

Floats = NDArray[np.float64]

derandomized = settings(max_examples=300, deadline=None, derandomize=True)


def first_real_root(ascending: list[float]) -> float:
    """The smallest positive real root by the companion matrix, refined; NaN without one."""
    roots = np.roots(ascending[::-1])
    real = np.sort(roots[np.abs(roots.imag) < 1e-9 * np.abs(roots)].real)
    positive = real[real > 0.0]
    return float(positive[0]) if positive.size else float("nan")


def grazes(ascending: list[float]) -> bool:
    """Whether two roots so nearly meet on the positive axis that rounding decides which exist."""
    roots = np.roots(ascending[::-1])
    near = roots[(roots.real > 0.0) & (np.abs(roots.imag) < 1e-3 * np.abs(roots))]
    gaps = np.abs(near[:, None] - near[None, :])[~np.eye(near.size, dtype=bool)]
    lonely = near[np.abs(near.imag) > 1e-9 * np.abs(near)]
    return bool(lonely.size or (gaps < 1e-3 * np.abs(near).max(initial=0.0)).any())


@derandomized
@given(
    st.lists(st.floats(-5.0, 5.0).filter(lambda c: abs(c) > 1e-3), min_size=4, max_size=4),
    st.floats(0.01, 5.0),
)
def test_first_crossing_of_random_quintics_is_that_of_numpy(lower: list[float], last: float) -> None:
    ascending = [-1.0, *lower, last]
    if grazes(ascending):
        return
    found = first_crossing([np.array([c]) for c in ascending[1:]], 1.0)
    assert found[0] == pytest.approx(first_real_root(ascending), rel=1e-9, nan_ok=True)


@derandomized
@given(st.lists(st.floats(-5.0, -1e-3), min_size=5, max_size=5))
def test_a_polynomial_that_never_rises_has_no_crossing(coefficients: list[float]) -> None:
    assert np.isnan(first_crossing([np.array([c]) for c in coefficients], 1.0))


def test_a_polynomial_that_rises_too_little_has_no_crossing() -> None:
    """0.5 x - 0.1 x^2 is at most 0.625; times 1.7 it passes 1 before its top at 2.5."""
    rise, fall = np.array([0.5, 0.85]), np.array([-0.1, -0.17])
    found = first_crossing([rise, fall], 1.0)
    assert np.isnan(found[0])
    assert found[1] == pytest.approx((0.85 - np.sqrt(0.85**2 - 0.68)) / 0.34, rel=1e-14)


def test_the_crossing_before_a_dip_is_taken_and_not_the_one_after() -> None:
    """(x - 1)(x - 2)(x - 3) + 6 rises through 6 at 1 first."""
    found = first_crossing([np.array([11.0]), np.array([-6.0]), np.array([1.0])], 6.0)
    assert found[0] == pytest.approx(1.0, rel=1e-12)


def test_a_double_root_is_found_to_the_root_of_the_rounding() -> None:
    """(x - 1)^2 (x + 1) + const: the level is only grazed at 1, and crossed nowhere before."""
    found = first_crossing([np.array([1.0]), np.array([1.0]), np.array([-1.0])], 1.0)
    assert np.isnan(found[0]) or found[0] == pytest.approx(1.0, abs=1e-6)


@pytest.mark.parametrize("scale", [1e-18, 1e-9, 1e9, 1e18])
def test_first_crossing_does_not_depend_on_the_unit(scale: float) -> None:
    coefficients = [0.3, -0.2, 0.05, 0.01, 0.002]
    plain = first_crossing([np.array([c]) for c in coefficients], 1.0)
    scaled = [np.array([c * scale**-power]) for power, c in enumerate(coefficients, start=1)]
    assert first_crossing(scaled, 1.0)[0] == pytest.approx(plain[0] * scale, rel=1e-12)


def test_first_crossing_broadcasts_and_keeps_nan() -> None:
    column, row = np.array([[1.0], [2.0], [np.nan]]), np.array([0.0, 1.0])
    found = first_crossing([column, row, np.array(0.0)], 1.0)
    assert found.shape == (3, 2)
    golden = (np.sqrt(5.0) - 1.0) / 2.0
    np.testing.assert_allclose(found[:2], [[1.0, golden], [0.5, np.sqrt(2.0) - 1.0]], rtol=1e-14)
    assert np.isnan(found[2]).all()


def test_first_crossing_of_nothing_is_nothing() -> None:
    assert first_crossing([np.zeros(0), np.zeros(0)], 1.0).shape == (0,)


magnitudes = st.floats(-12.0, 12.0)


@derandomized
@given(magnitudes, magnitudes, magnitudes, magnitudes, st.booleans())
def test_single_positive_root_changes_the_sign_in_rational_arithmetic(
    k0: float, k1: float, k2: float, k3: float, down: bool
) -> None:
    powers = 10.0 ** np.array([k0, k1, k2, k3])
    powers[1] *= -1.0 if down else 1.0
    found = single_positive_root(*(np.array([p]) for p in powers))[0]
    assert exact(powers, found * (1.0 - 1e-13)) < 0 < exact(powers, found * (1.0 + 1e-13))


@derandomized
@given(st.floats(0.01, 10.0), st.floats(-10.0, 10.0), st.floats(0.01, 10.0), st.floats(0.01, 10.0))
def test_single_positive_root_is_that_of_numpy(k0: float, k1: float, k2: float, k3: float) -> None:
    found = single_positive_root(*(np.array([p]) for p in (k0, k1, k2, k3)))[0]
    assert found == pytest.approx(first_real_root([-k0, k1, k2, k3]), rel=1e-9)


def exact(powers: Floats, x: float) -> Fraction:
    """k3 x^3 + k2 x^2 + k1 x - k0 in rational arithmetic; rising, so its sign brackets the only root."""
    k0, k1, k2, k3 = (Fraction(float(p)) for p in powers)
    at = Fraction(float(x))
    return ((k3 * at + k2) * at + k1) * at - k0


@derandomized
@given(magnitudes, magnitudes, magnitudes, st.booleans())
def test_single_positive_root_without_a_cubic_term(k0: float, k1: float, k2: float, down: bool) -> None:
    a, b, c = 10.0**k0, 10.0**k1 * (-1.0 if down else 1.0), 10.0**k2
    found = single_positive_root(np.array([a]), np.array([b]), np.array([c]), np.zeros(1))[0]
    root = np.hypot(b, 2.0 * np.sqrt(a * c))
    expected = 2.0 * a / (b + root) if b > 0 else (root - b) / (2.0 * c)
    assert found == pytest.approx(expected, rel=1e-13)


def test_single_positive_root_of_a_line_and_of_nothing() -> None:
    k0, zero = np.array([3.0, 0.0, -1.0, np.nan]), np.zeros(4)
    found = single_positive_root(k0, np.full(4, 2.0), zero, zero)
    assert found[0] == 1.5
    assert np.isnan(found[1:]).all()


def test_single_positive_root_broadcasts() -> None:
    found = single_positive_root(
        np.array([[1.0], [8.0]]), np.array([0.0, 0.0, 0.0]), np.array(0.0), np.array(1.0)
    )
    np.testing.assert_allclose(found, np.repeat([[1.0], [2.0]], 3, axis=1), rtol=1e-14)


def polynomial_of(real: float, pair: tuple[float, float]) -> tuple[float, float, float]:
    """e1, e2, e3 of (t + r1)(t + r2)(t + r3): one real root and a pair by (-re, im^2 signed)."""
    half, spread = pair
    e1 = real + 2.0 * half
    square = half**2 + spread
    return e1, square + 2.0 * half * real, real * square


def relative_residual(root: NDArray[np.complex128], e1: Floats, e2: Floats, e3: Floats) -> Floats:
    """|t^3 + e1 t^2 + e2 t + e3| over the sum of its terms' sizes."""
    terms = [root**3, e1 * root**2, e2 * root, e3 + 0.0 * root]
    return np.asarray(np.abs(np.sum(terms, axis=0)) / np.sum(np.abs(terms), axis=0))


spread_out = st.floats(-9.0, 9.0)


@derandomized
@given(spread_out, spread_out, spread_out, st.sampled_from([1.0, 0.0, -0.5, -0.999999]))
def test_cubic_roots_leave_no_residual(real: float, half: float, tilt: float, kind: float) -> None:
    """All roots left of the axis: a complex pair (kind 1), a double one (0), or three real ones."""
    r, h = 10.0 ** (real / 3.0), 10.0 ** (half / 3.0)
    spread = kind * h**2 * (10.0 ** min(tilt / 3.0, 0.0) if kind < 0.0 else 10.0 ** (tilt / 3.0))
    e1, e2, e3 = (np.array([e]) for e in polynomial_of(r, (h, spread)))
    roots = cubic_roots(e1, e2, e3)
    for root in roots:
        assert relative_residual(root.astype(complex), e1, e2, e3)[0] < 1e-14
    total = np.sum([root.astype(complex) for root in roots])
    assert total == pytest.approx(-e1[0], rel=1e-9)
    assert np.prod([root.astype(complex) for root in roots]) == pytest.approx(-e3[0], rel=1e-9)


def test_cubic_roots_of_a_triple_root_and_of_a_quadratic() -> None:
    e1, e2, e3 = np.array([3.0, 3.0, 2.0]), np.array([3.0, 2.0, 5.0]), np.array([1.0, 0.0, 0.0])
    real, first, second = cubic_roots(e1, e2, e3)
    np.testing.assert_allclose([real[0], first[0], second[0]], -1.0, atol=2e-5)
    assert real[1] == 0.0
    assert sorted([first[1].real, second[1].real]) == pytest.approx([-2.0, -1.0], rel=1e-14)
    assert real[2] == 0.0
    assert {first[2], second[2]} == {complex(-1.0, 2.0), complex(-1.0, -2.0)}


def test_cubic_roots_keep_nan_to_themselves() -> None:
    """An unknown coefficient gives unknown roots, without a warning."""
    real, first, second = cubic_roots(np.array([2.0, np.nan]), np.array([2.0, 1.0]), np.array([1.0, 0.1]))
    assert real[0] == pytest.approx(-1.0, rel=1e-14)
    assert np.isfinite([first[0], second[0]]).all()
    assert np.isnan(real[1])
