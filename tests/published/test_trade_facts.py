"""What every engineer of the trade takes for granted. Common practice, no source."""

from __future__ import annotations

import copy

import numpy as np
import pytest

from optimizer.physics import reference
from tests.independent.adapter import engine_figures
from tests.independent.cases import stable_case
from tests.independent.direct import Case
from tests.published.rows import rows

pytestmark = pytest.mark.published


def mid_supply(wiring: str) -> Case:
    case = stable_case(np.random.default_rng(31), wiring=wiring, kind="divider")
    case["supply"] |= {"low": 0.0, "high": 5.0, "tolerance": 0.0, "guard": 0.0}
    case["reference"] |= {"top": 10e3, "bottom": 10e3}
    case["opamp"] |= {"output_low": 0.1, "output_high": 0.1}
    case["feedback"]["resistance"] = 10e3
    return case | {"converter": None}


def with_less_room(case: Case, side: str) -> float:
    tight = copy.deepcopy(case)
    tight["opamp"][side] = 1.3
    return engine_figures(tight)["full_scale"]


@pytest.mark.parametrize("wiring", ["falling-unbiased", "falling-biased"])
def test_output_falls_below_mid_supply_as_light_rises_when_current_flows_into_the_node(wiring):
    """Common practice, no source: so it is the lower limit that light runs into."""
    case = mid_supply(wiring)
    free = engine_figures(case)["full_scale"]
    assert with_less_room(case, "output_low") == pytest.approx(free / 2, rel=0.02)
    assert with_less_room(case, "output_high") == free


@pytest.mark.parametrize("wiring", ["rising-unbiased", "rising-biased"])
def test_output_rises_above_mid_supply_when_current_flows_out_of_the_node(wiring):
    """Common practice, no source."""
    case = mid_supply(wiring)
    free = engine_figures(case)["full_scale"]
    assert with_less_room(case, "output_high") == pytest.approx(free / 2, rel=0.02)
    assert with_less_room(case, "output_low") == free


def test_half_of_a_usb_rail_is_near_2_4_volts_because_a_divider_follows_the_supply():
    """Common practice, no source: a USB-fed 5 V rail is often near 4.8 V."""
    assert float(reference.divided(5.0, 0.0, 10e3, 10e3)) == pytest.approx(2.5)
    assert float(reference.divided(4.8, 0.0, 10e3, 10e3)) == pytest.approx(2.4)


def test_full_scale_of_a_5_volt_request_counts_with_the_rail_at_4_8_volts():
    """Common practice, no source: with 4 % of tolerance both the rail and the reference come down."""
    sagging, low = mid_supply("rising-unbiased"), mid_supply("rising-unbiased")
    sagging["supply"]["tolerance"] = 0.04
    low["supply"]["high"] = 4.8
    assert engine_figures(sagging)["full_scale"] == pytest.approx(engine_figures(low)["full_scale"], rel=1e-8)


@pytest.mark.parametrize(("mains", "lamp"), [(50.0, 100.0), (60.0, 120.0)])
def test_lamps_on_the_mains_flicker_at_twice_its_frequency(mains, lamp):
    """Common practice, no source; also row FLK-01. A lamp's power goes with the square of its voltage."""
    time = np.arange(6000) / 6000
    power = np.sin(2 * np.pi * mains * time) ** 2
    strongest = int(np.argmax(np.abs(np.fft.rfft(power - power.mean()))))
    assert strongest == lamp
    assert lamp in rows()["FLK-01"].expected
