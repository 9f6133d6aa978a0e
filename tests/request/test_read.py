"""The request file: every key, and what stands for it when it is left out."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from optimizer.request.types import (
    SPREADS,
    Ambient,
    Converter,
    Divider,
    Light,
    Ranking,
    Request,
    Resilience,
    Space,
    Supply,
    Targets,
    Tolerance,
)
from tests.request.made import FULL, MINIMAL, Reads

FULL_TOLERANCE = Tolerance(
    method="corners",
    yield_=0.99,
    distribution="normal",
    draws=5000,
    seed=0,
    gbw=0.3,
    voltage_noise=0.2,
    input_capacitance=0.15,
    diode_capacitance=0.1,
    responsivity=0.08,
    stray=0.5,
    dark_current=0.9,
    bias_current=0.8,
    open_loop_gain=1e-3,
    stated=True,
)


def test_every_key_is_read_in_si(read: Reads, tmp_path: Path) -> None:
    assert read(FULL) == Request(
        name="bench, receive channel",
        quantity=200,
        currency="EUR",
        light=Light(850e-9, "power", 30e-9, 3e-6, 5e-9, 1e-6, 10e-6),
        supply=Supply(5.0, -1.0, 0.05, 0.05, 10e3, None),
        ambient=Ambient(-20.0, 60.0, stated=True),
        targets=Targets(20e3, 46.0, 80.0, 55.0, 1.0, 1.5, 0.03, 3e-3, 4.5),
        space=Space(
            wirings=("rising-biased", "falling-biased"),
            references=("divider",),
            divider=Divider("E24", 4700.0, 47e3, 1e-6),
            resistance=(10e3, 1e6),
            capacitance=(1e-12, 1e-9),
            no_capacitor=False,
            low_pass=(None, 100e3),
            stray=2e-12,
            dark_on_rail=True,
            noise_from=1.0,
            status=("active", "last-time-buy"),
            require=("MA 100",),
            exclude=("MA 200", "Maker B/MA 300"),
            makers=("Maker A",),
            packages=("flat-8",),
        ),
        converter=Converter(12, 0.5, 4.5),
        ranking=Ranking("margin", 3, 0.4),
        tolerance=FULL_TOLERANCE,
        resilience=Resilience(2),
        catalogs={
            "opamps": ("a.csv", "b.csv"),
            "photodiodes": ("c.csv",),
            "resistors": ("../catalogs/resistors.csv",),
            "capacitors": ("../catalogs/capacitors.csv",),
        },
        path=tmp_path / "bench.toml",
        assume={
            ("opamps", "output_low"): 0.05,
            ("opamps", "second_pole"): math.inf,
            ("opamps", "open_loop_gain"): 1e5,
            ("opamps", "temp_max"): 85.0,
            ("photodiodes", "rise_time"): 2e-6,
            ("photodiodes", "capacitance"): 50e-12,
            ("photodiodes", "price"): 1.25,
        },
    )


def test_keys_left_out_take_the_values_that_the_contract_prints(read: Reads, tmp_path: Path) -> None:
    request = read(MINIMAL)
    assert request.name == "bench"
    assert (request.quantity, request.currency) == (1, "catalog currency")
    assert (request.light.background, request.light.area_from, request.light.area_to) == (0.0, None, None)
    assert request.supply == Supply(high=5.0, low=0.0, tolerance=0.0, guard=0.0, load=None, load_to=0.0)
    assert request.ambient == Ambient(25.0, 25.0, stated=False)
    assert request.targets == Targets()
    assert request.space == Space(
        wirings=("rising-unbiased", "rising-biased", "falling-unbiased", "falling-biased"),
        references=("ground", "divider"),
        divider=Divider("E12", 10e3, 100e3, 100e-9),
        resistance=(1e3, 100e6),
        capacitance=(0.5e-12, 10e-9),
        no_capacitor=True,
        low_pass=(None,),
        stray=1e-12,
        dark_on_rail=False,
        noise_from=0.1,
        status=("active",),
    )
    assert request.converter is None
    assert request.ranking == Ranking("cost", 10, 0.5)
    assert request.tolerance == Tolerance()
    assert request.tolerance.spreads == dict.fromkeys(SPREADS, 0.0)
    assert not request.tolerance.stated
    assert request.resilience == Resilience(opamp_sources=1)
    assert request.catalogs == {
        role: (f"../catalogs/{role}.csv",) for role in ("opamps", "photodiodes", "resistors", "capacitors")
    }
    assert request.assume == {}


def test_a_table_of_tolerances_is_stated_even_where_it_is_empty(read: Reads) -> None:
    assert read(MINIMAL + "[tolerance]").tolerance == Tolerance(
        method="nominal", yield_=None, distribution="uniform", draws=10_000, seed=1, stated=True
    )


def test_spreads_are_listed_in_the_order_in_which_they_are_documented(read: Reads) -> None:
    spreads = read(FULL).tolerance.spreads
    assert tuple(spreads) == SPREADS
    assert list(spreads.values()) == [0.3, 0.2, 0.15, 0.1, 0.08, 0.5, 0.9, 0.8, 1e-3]


def test_sub_keys_left_out_take_their_defaults(read: Reads) -> None:
    space = read(
        MINIMAL + '[space]\ndivider.to = "22k"\nresistance = {to = "1 Mohm"}\ncapacitance = {none = false}'
    ).space
    assert space.divider == Divider("E12", 10e3, 22e3, 100e-9)
    assert space.resistance == (1e3, 1e6)
    assert (space.capacitance, space.no_capacitor) == ((0.5e-12, 10e-9), False)


@pytest.mark.parametrize(
    ("text", "ambient"),
    [
        ('[ambient]\nhottest = "60 C"', Ambient(25.0, 60.0, stated=True)),
        ("[ambient]\ncoldest = -20", Ambient(-20.0, 25.0, stated=True)),
        ("[ambient]", Ambient(25.0, 25.0, stated=False)),
    ],
)
def test_one_end_of_the_ambient_leaves_the_other_at_25(read: Reads, text: str, ambient: Ambient) -> None:
    assert read(MINIMAL + text).ambient == ambient


@pytest.mark.parametrize(
    ("text", "converter"),
    [
        ("[converter]", Converter(16, 0.0, 4.096)),
        ('[converter]\nbits = 10\nhigh = "supply"', Converter(10, 0.0, 5.0, follows_supply=True)),
        ("[converter]\nhigh = 3", Converter(16, 0.0, 3.0)),
    ],
)
def test_converter(read: Reads, text: str, converter: Converter) -> None:
    assert read(MINIMAL + text).converter == converter


@pytest.mark.parametrize(
    ("levels", "light"),
    [
        ('weakest = "0.4 uW/cm2"\nstrongest = "1 W/m2"', ("irradiance", 0.004, 1.0, 0.0)),
        ('weakest = "4 W/m2"\nstrongest = "5 W/m2"\nbackground = 0', ("irradiance", 4.0, 5.0, 0.0)),
        ('weakest = 1e-9\nstrongest = "2"\nbackground = "1 nW"', ("power", 1e-9, 2.0, 1e-9)),
    ],
)
def test_light_is_power_or_irradiance(
    read: Reads, levels: str, light: tuple[str, float, float, float]
) -> None:
    found = read(f"[light]\nwavelength = 850e-9\n{levels}\n[supply]\nhigh = 5").light
    assert (found.kind, found.weakest, found.strongest, found.background) == light


def test_load_to_is_a_voltage_or_the_reference(read: Reads) -> None:
    assert read(MINIMAL + 'load = "1k"\nload_to = "2.5 V"').supply.load_to == 2.5
    assert read(MINIMAL + 'load = "1k"\nload_to = "reference"').supply.load_to is None


def test_whole_numbers_may_be_written_as_floats_and_voltages_as_integers(read: Reads) -> None:
    request = read("quantity = 10.0\n" + MINIMAL.replace('"5 V"', "5"))
    assert (request.quantity, request.supply.high) == (10, 5.0)
    assert type(request.quantity) is int
    assert type(request.supply.high) is float


def test_what_a_list_names_twice_counts_once(read: Reads) -> None:
    space = read(
        MINIMAL + '[space]\nlow_pass = ["1 kHz", 1000, "none"]\nreferences = ["ground", "ground"]'
    ).space
    assert (space.low_pass, space.references) == ((1000.0, None), ("ground",))


def test_byte_order_mark_and_dos_line_ends_change_nothing(read: Reads) -> None:
    assert read(b"\xef\xbb\xbf" + FULL.replace("\n", "\r\n").encode()) == read(FULL)
