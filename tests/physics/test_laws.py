"""Photodiode, reference and output laws at their ends, in their shapes, with unknown values."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.physics import noise, output, photodiode, reference

POINTS = ((400e-9, 0.2), (900e-9, 0.6), (1100e-9, 0.1))


def test_responsivity_holds_at_both_ends_and_not_a_hair_outside() -> None:
    inside = photodiode.responsivity([400e-9, 650e-9, 900e-9, 1100e-9], POINTS)
    np.testing.assert_allclose(inside, [0.2, 0.4, 0.6, 0.1], rtol=1e-14)
    outside = [np.nextafter(400e-9, 0.0), np.nextafter(1100e-9, 1.0)]
    assert np.isnan(photodiode.responsivity(outside, POINTS)).all()


def test_responsivity_of_one_point_and_of_none() -> None:
    assert photodiode.responsivity(650e-9, ((650e-9, 0.4),)) == 0.4
    assert np.isnan(photodiode.responsivity(651e-9, ((650e-9, 0.4),)))
    assert np.isnan(photodiode.responsivity(np.zeros((2, 3)), ())).all()
    assert photodiode.responsivity(np.full((2, 3), 500e-9), POINTS).shape == (2, 3)


def test_capacitance_of_one_point_follows_the_law_in_both_directions() -> None:
    """(1 + Vr/0.6)^-0.5: at 1.8 V half of what it is at 0 V."""
    assert photodiode.junction_capacitance(1.8, ((0.0, 10e-12),)) == pytest.approx(5e-12, rel=1e-15)
    assert photodiode.junction_capacitance(0.0, ((1.8, 5e-12),)) == pytest.approx(10e-12, rel=1e-15)


def test_capacitance_between_below_and_above_its_points() -> None:
    points = ((1.8, 8e-12), (9.0, 4e-12))
    found = photodiode.junction_capacitance([0.0, 1.8, 4.2, 9.0, 100.0], points)
    # 1 + V/0.6 is 1, 4, 8, 16: the law below doubles; half-way in the logarithm above is sqrt(8 x 4)
    np.testing.assert_allclose(found, [16e-12, 8e-12, np.sqrt(32.0) * 1e-12, 4e-12, 4e-12], rtol=1e-13)


@given(st.lists(st.floats(0.0, 30.0), min_size=2, max_size=5, unique=True), st.floats(0.2, 1.0))
@settings(max_examples=100, deadline=None, derandomize=True)
def test_capacitance_never_rises_with_bias(biases: list[float], fall: float) -> None:
    points = tuple((v, 50e-12 * fall**k) for k, v in enumerate(sorted(biases)))
    curve = photodiode.junction_capacitance(np.linspace(0.0, 40.0, 400), points)
    assert (np.diff(curve) <= 1e-24).all()


def test_capacitance_of_no_points_is_unknown_in_its_shape() -> None:
    found = photodiode.junction_capacitance(np.zeros((3, 2)), ())
    assert found.shape == (3, 2)
    assert np.isnan(found).all()


def test_doubling_halves_in_the_cold_and_is_flat_where_none() -> None:
    np.testing.assert_allclose(
        photodiode.doubled(1e-9, [15.0, 25.0, 45.0], 10.0), [0.5e-9, 1e-9, 4e-9], rtol=1e-15
    )
    assert photodiode.doubled(1e-9, 125.0, np.inf) == 1e-9


def test_shunt_conductance_of_none_is_nothing_at_any_temperature() -> None:
    assert photodiode.shunt_conductance(np.inf, 85.0, 10.0) == 0.0
    assert photodiode.shunt_conductance(1e9, 45.0, 10.0) == pytest.approx(4e-9, rel=1e-15)


def test_own_pole_of_a_rise_time() -> None:
    """10 % to 90 % of one pole takes ln 9 time constants (exact: solve 1 - exp(-t) = 0.1 and 0.9)."""
    ends = -np.log1p([-0.1, -0.9])
    assert photodiode.own_pole(1.0) == pytest.approx(1.0 / (ends[1] - ends[0]), rel=1e-14)
    assert photodiode.own_pole(0.0) == 0.0


def test_divider_between_split_rails() -> None:
    assert reference.divided(5.0, -5.0, 1e3, 3e3) == 2.5
    assert reference.divided(5.0, -5.0, 3e3, 1e3) == -2.5
    assert reference.parallel(3e3, 6e3) == pytest.approx(2e3, rel=1e-15)
    assert reference.current(5.0, -5.0, 3e3, 1e3) == 2.5e-3
    assert reference.divided(5.0, 0.0, np.ones((2, 1)), np.ones(3)).shape == (2, 3)


def test_equal_resistors_give_exactly_half_whatever_their_value() -> None:
    values = np.array([1e3, 4.7e3, 33e3, 8.2e4])
    np.testing.assert_array_equal(reference.divided(5.0, 0.0, values, values), 2.5)


def test_offset_error_room_and_full_scale() -> None:
    assert output.offset_voltage(1e-3, 5e-6, 40.0) == pytest.approx(1.2e-3, rel=1e-15)
    one = np.ones(1)
    # 1 mV (1 + 1e6/1e6) + 1 nA 1 Mohm = 3 mV
    assert output.dc_error(1e-3 * one, 1e-9 * one, 1e6 * one, 1e-6 * one) == pytest.approx([3e-3], rel=1e-14)
    np.testing.assert_array_equal(
        output.room(np.array([5.0, 0.1]), np.array([1.0, 1.0]), np.array([1.0, -1.0])), [4.0, 0.9]
    )
    light = output.full_scale(4.0 * one, one, 1e6 * one, 0.5 * one)
    assert light == pytest.approx([6e-6], rel=1e-15)
    assert output.full_scale(0.5 * one, one, 1e6 * one, 0.5 * one)[0] < 0.0


def test_slew_ratio_of_a_sine() -> None:
    """A sine of 1 V peak to peak at 1 MHz has slope pi V/us at most (derivative of the sine)."""
    assert output.slew_ratio(np.array([np.pi * 1e6]), 1e6, np.array([1.0])) == pytest.approx([1.0], rel=1e-15)


def test_densities() -> None:
    """4 k T R of 1 kohm at 290 K: (4.00 nV)^2; 2 q I of 1 mA: (17.9 pA)^2 (handbook values)."""
    assert np.sqrt(noise.thermal_voltage(1e3, 290.0)) == pytest.approx(4.002e-9, rel=1e-3)
    assert np.sqrt(noise.shot_current(1e-3)) == pytest.approx(17.9e-12, rel=1e-3)
    assert noise.thermal_conductance_current(1e-3, 290.0) == pytest.approx(
        float(noise.thermal_current(1e3, 290.0))
    )
    assert noise.quantisation(4.096, 12) == pytest.approx((1e-3) ** 2 / 12.0, rel=1e-15)


def test_nan_in_nan_out_without_a_warning() -> None:
    unknown = np.array([np.nan, 1.0])
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = [
            photodiode.doubled(unknown, 60.0, 10.0),
            photodiode.doubled(1.0, 60.0, unknown),
            photodiode.own_pole(unknown),
            photodiode.junction_capacitance(unknown, ((0.0, 1e-12), (5.0, 0.5e-12))),
            photodiode.responsivity(unknown * 500e-9, POINTS),
            output.offset_voltage(unknown, 1e-6, 40.0),
            output.slew_ratio(unknown, 1e6, np.ones(2)),
            noise.shot_current(unknown),
        ]
    for row in found:
        assert np.isnan(row).tolist() == [True, False] or np.isnan(row).all()
        assert np.isnan(row[0])
