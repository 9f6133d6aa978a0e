"""Moved limits: what a step of a target means, free limits, and the next limit that a value misses."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.figures import rounded
from optimizer.search.weigh import steps

TARGETS = st.sampled_from(margins.TARGETS)
FINEST = {"snr": 1e-8, "dynamic_range": 1e-8, "phase_margin": 1e-7}
"""Values closer than this count as one."""


def limit_of(name: str, size: float) -> float:
    """A limit of a usual size; `size` from 0 to 1."""
    if name in (*margins.DECIBELS, "phase_margin"):
        return 10.0 + 100.0 * size
    return float(10.0 ** (12.0 * size - 8.0))


@settings(max_examples=300, deadline=None, derandomize=True)
@given(name=TARGETS, size=st.floats(0.0, 1.0), step=st.floats(-0.9, 3.0))
def test_the_margin_of_a_moved_limit_is_the_step(name: str, size: float, step: float) -> None:
    if name == "peaking" and step > 0.9:
        return  # no peaking has more than its whole limit to spare
    limit = limit_of(name, size)
    there = steps.moved(name, limit, step)
    # the moved limit has 9 digits: a value of it is met exactly
    assert margins.raw_margin(name, np.array(there), limit) == pytest.approx(step, abs=4e-7)
    assert margins.margin(name, np.array(there), there) == 0.0


def test_steps_as_a_user_would_work_them_out() -> None:
    """By hand from the definitions of the margins."""
    assert steps.moved("bandwidth", 20e3, -0.1) == 18e3
    assert steps.moved("offset", 20e-3, -0.5) == 40e-3
    assert steps.moved("cost", 6.0, 0.2) == 5.0
    assert steps.moved("phase_margin", 55.0, 0.1) == 58.0
    assert steps.moved("peaking", 1.0, -0.2) == 1.2
    assert steps.moved("snr", 46.0, -0.5) == 39.9794001  # 20 log10(2) = 6.0206 dB less
    assert steps.STEPS == (None, -0.5, -0.2, -0.1, -0.05, 0.05, 0.1, 0.2, 0.5)


@pytest.mark.parametrize("name", margins.TARGETS)
def test_nothing_misses_a_free_limit(name: str) -> None:
    values = np.array([np.nan, 0.0, 1e-12, 3.0, 1e9])
    assert np.all(steps.graded(name, values, np.full(5, steps.free(name))) == margins.LARGEST)
    limit = np.full(5, 2.0)
    assert np.array_equal(steps.graded(name, values, limit), margins.margin(name, values, 2.0))


def neighbour(value: float, way: float) -> float:
    """The next number of 9 digits above (`way` 1) or below (-1)."""
    step = 10.0 ** (np.floor(np.log10(abs(value))) - 8.0)
    near = [float(rounded(np.array(value + way * step * f))) for f in (0.1, 1.0)]
    return near[0] if near[0] != value else near[1]


@settings(max_examples=400, deadline=None, derandomize=True)
@given(name=TARGETS, digits=st.integers(100_000_000, 999_999_999), power=st.integers(-12, 6))
def test_the_stricter_limit_is_missed_by_the_value_and_met_by_the_next(
    name: str, digits: int, power: int
) -> None:
    value = float(f"{digits}e{power - 8}")
    if name in FINEST:
        value = float(f"{digits}e-7")
    way = 1.0 if name in ("bandwidth", "snr", "dynamic_range", "full_scale", "phase_margin", "slew") else -1.0
    limit = steps.stricter(name, value)
    assert limit is not None
    assert margins.margin(name, np.array(value), limit) < 0.0
    assert margins.margin(name, np.array(neighbour(value, way)), limit) >= 0.0


@pytest.mark.parametrize("value", [-3.97031349, -0.5, 1e-9, 0.3, 1.0, 9.99999999])
@pytest.mark.parametrize("name", list(FINEST))
def test_small_levels_and_angles_are_told_apart_no_finer_than_margins_can(name: str, value: float) -> None:
    limit = steps.stricter(name, value)
    assert limit is not None
    assert margins.margin(name, np.array(value), limit) < 0.0
    assert margins.margin(name, np.array(value + 2.0 * FINEST[name]), limit) >= 0.0


def test_at_the_power_of_ten_the_finer_step_counts() -> None:
    assert steps.stricter("offset", 1e-3) == 9.99999999e-4
    assert steps.stricter("bandwidth", 9.99999999e4) == 1e5
    assert steps.stricter("peaking", 0.0) is None
    smallest = steps.stricter("full_scale", 0.0)
    assert smallest is not None
    assert margins.margin("full_scale", np.array(1e-15), smallest) > 0.0


@settings(max_examples=200, deadline=None, derandomize=True)
@given(name=TARGETS, size=st.floats(0.0, 1.0))
def test_far_limits_are_met_by_what_misses_the_stated_one_by_far(name: str, size: float) -> None:
    limit = limit_of(name, size)
    far = steps.far_below(name, limit)
    bad = steps.moved(name, limit, -0.99) if name != "peaking" else 100.0 * limit
    if name == "phase_margin":
        bad = 0.1
    margin = margins.margin(name, np.array(bad), far)
    assert 0.0 < margin < margins.LARGEST
    assert margins.margin(name, np.array(bad), steps.loosest(name)) > 0.0
