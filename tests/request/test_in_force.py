"""The values in force, as the record writes them."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any

import pytest

from optimizer.request.in_force import in_force
from optimizer.request.schema import KEYS
from optimizer.request.types import SPREADS
from tests.request.made import FULL, MINIMAL, Reads, as_toml


@pytest.mark.parametrize(
    "text",
    [
        FULL,
        MINIMAL,
        MINIMAL.replace("30 nW", "0.4 uW/cm2").replace("3 uW", "1.1 mW/cm2"),
        MINIMAL + '[converter]\nhigh = "supply"\n[light.active_area]\nto = "3 mm2"\n',
        MINIMAL + "[tolerance]\n",
        MINIMAL + "[assume.photodiodes]\nrise_time = \"none\"\nshunt_resistance = 'none'\ndark_current = 0\n",
    ],
)
def test_values_in_force_read_back_to_the_same_request(read: Reads, text: str) -> None:
    request = read(text)
    tables = in_force(request)
    assert json.loads(json.dumps(tables, allow_nan=False)) == tables
    assert read(as_toml(tables)) == request


def test_values_in_force_fill_in_every_default(read: Reads) -> None:
    tables = in_force(read(MINIMAL))
    optional = {key for key, entry in KEYS.items() if entry.default is None and not entry.example}
    unstated = optional | {key for key in KEYS if key[0] in ("ambient", "converter", "tolerance")}
    for key in KEYS.keys() - unstated:
        table: Any = tables
        for name in key:
            assert name in table, key
            table = table[name]
    assert "converter" not in tables
    assert "ambient" not in tables
    assert "tolerance" not in tables
    assert tables["resilience"] == {"opamp_sources": 1}


def test_values_in_force_fill_in_a_table_of_tolerances_that_is_stated(read: Reads) -> None:
    tables = in_force(read(MINIMAL + "[tolerance]\n"))
    assert tables["tolerance"] == {
        "method": "nominal",
        "distribution": "uniform",
        "draws": 10_000,
        "seed": 1,
        **dict.fromkeys(SPREADS, 0.0),
    }
    stated = in_force(read(MINIMAL + '[tolerance]\nyield = "99 %"\ngbw = "30 %"\n'))["tolerance"]
    assert (stated["yield"], stated["gbw"]) == (0.99, 0.3)


def test_values_in_force_are_si_numbers_but_irradiance_is_text(read: Reads) -> None:
    tables = in_force(read(MINIMAL.replace("30 nW", "0.4 uW/cm2").replace("3 uW", "2 W/m2")))
    assert tables["light"]["weakest"] == "0.004 W/m2"
    assert tables["light"]["background"] == "0.0 W/m2"
    assert tables["light"]["wavelength"] == 850e-9
    assert tables["supply"]["high"] == 5.0


@pytest.mark.parametrize("gain", ["100 dB", "120.5 dB", "100 V/mV", "3 V/V"])
def test_an_assumed_gain_is_written_in_decibels(read: Reads, gain: str) -> None:
    request = read(MINIMAL + f'[assume.opamps]\nopen_loop_gain = "{gain}"\n')
    back = read(as_toml(in_force(request)))
    key = ("opamps", "open_loop_gain")
    assert back.assume[key] == pytest.approx(request.assume[key], rel=1e-14)
    assert replace(back, assume={}) == replace(request, assume={})
