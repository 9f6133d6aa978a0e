"""The request file: every key, its default, its errors and where they are said to stand."""

from __future__ import annotations

import json
import math
import tomllib
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError, Problem
from optimizer.request import read_request
from optimizer.request_force import in_force
from optimizer.request_lines import key_lines
from optimizer.request_schema import KEYS
from optimizer.request_types import (
    Ambient,
    Converter,
    Divider,
    Light,
    Ranking,
    Request,
    Space,
    Supply,
    Targets,
)

MINIMAL = """\
[light]
wavelength = "850 nm"
weakest = "30 nW"
strongest = "3 uW"
[supply]
high = "5 V"
"""

FULL = """\
name = "bench, receive channel"
quantity = 200
currency = "EUR"

[light]
wavelength = "850 nm"
weakest = "30 nW"
strongest = "3 uW"
background = "5 nW"
active_area = { from = "1 mm2", to = "10 mm2" }

[supply]
high = "5 V"
low = "-1 V"
tolerance = "5 %"
guard = "50 mV"
load = "10 kohm"
load_to = "reference"

[ambient]
coldest = "-20 C"
hottest = "60 C"

[targets]
bandwidth = "20 kHz"
snr = "46 dB"
dynamic_range = "80 dB"
phase_margin = "55 deg"
peaking = "1 dB"
offset = "30 mV"
slew = 1.5
supply_current = "3 mA"
cost = 4.50

[space]
wirings = ["rising-biased", "falling-biased"]
references = ["divider"]
divider = { series = "E24", from = "4k7", to = "47 kohm", bypass = "1 uF" }
resistance = { from = "10 kohm", to = "1 Mohm" }
capacitance = { from = "1 pF", to = "1 nF", none = false }
low_pass = ["none", "100 kHz"]
stray = "2 pF"
dark_on_rail = true
noise_from = "1 Hz"
status = ["active", "last-time-buy"]
require = ["MA 100"]
exclude = ["MA 200", "Maker B/MA 300"]
makers = ["Maker A"]
packages = ["flat-8"]

[converter]
bits = 12
low = "0.5 V"
high = "4.5 V"

[catalogs]
opamps = ["a.csv", "b.csv"]
photodiodes = ["c.csv"]

[ranking]
by = "margin"
show = 3
comfort = "40 %"

[assume.opamps]
output_low = "50 mV"
second_pole = "none"
open_loop_gain = "100 dB"
temp_max = "85 C"

[assume.photodiodes]
rise_time = "2 us"
capacitance = "50 pF"
price = 1.25
"""

Reads = Callable[[str | bytes], Request]
Fails = Callable[[str | bytes], tuple[Problem, ...]]


@pytest.fixture
def read(tmp_path: Path) -> Reads:
    def run(text: str | bytes) -> Request:
        path = tmp_path / "bench.toml"
        path.write_bytes(text.encode() if isinstance(text, str) else text)
        return read_request(path)

    return run


@pytest.fixture
def fail(read: Reads) -> Fails:
    def run(text: str | bytes) -> tuple[Problem, ...]:
        with pytest.raises(InputError) as caught:
            read(text)
        return caught.value.problems

    return run


def as_toml(tables: dict[str, Any]) -> str:
    """Write nested tables as TOML, sub-tables inline, keys always quoted."""
    lines = [_pair(key, value) for key, value in tables.items() if not isinstance(value, dict)]
    for name, table in tables.items():
        if isinstance(table, dict):
            lines += [f"[{_text(name)}]", *(_pair(key, value) for key, value in table.items())]
    return "\n".join(lines) + "\n"


def _pair(key: str, value: Any) -> str:
    return f"{_text(key)} = {_value(value)}"


def _text(value: str) -> str:
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _value(value: Any) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(_pair(key, item) for key, item in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(map(_value, value)) + "]"
    if isinstance(value, str):
        return _text(value)
    return str(value).lower()  # true, false, nan, inf and numbers alike


# What is read


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
    assert request.catalogs == {
        role: (f"../catalogs/{role}.csv",) for role in ("opamps", "photodiodes", "resistors", "capacitors")
    }
    assert request.assume == {}


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


# What is refused: the text of one line that is wrong, the key, and words of the message

WRONG = [
    ("[light]", "wavelength = 850", "light.wavelength", "850 nm"),
    ("[light]", 'wavelength = "2 mm"', "light.wavelength", "at most 1 mm"),
    ("[light]", 'weakest = "0 W"', "light.weakest", "more than 0 W"),
    ("[light]", "weakest = 0", "light.weakest", "more than 0 W"),
    ("[light]", 'weakest = "-1 uW/cm2"', "light.weakest", "more than 0 W/m2"),
    ("[light]", 'weakest = "30 nV"', "light.weakest", "expected a power such as '30 nW' or an irradiance"),
    ("[light]", 'weakest = "4 uW"', "light.weakest", "not above light.strongest, which is 3 uW"),
    ("[light]", 'strongest = "1 uW/cm2"', "light.strongest", "one kind of light"),
    ("[light]", 'background = "1 uW/cm2"', "light.background", "one kind of light"),
    ("[light]", 'background = "-1 nW"', "light.background", "at least 0 W"),
    ("[light]", "strongest = true", "light.strongest", "found 'true', expected a power"),
    ("[light]", "strongest = inf", "light.strongest", "found 'inf', expected a power"),
    ("[light]", 'active_area = {from = "2 mm2", to = "1 mm2"}', "light.active_area.from", "not above"),
    ("[light]", "active_area = {to = 0}", "light.active_area.to", "more than 0 mm2"),
    ("[light]", 'active_area = "2 mm2"', "light.active_area", "expected a table"),
    ("[supply]", 'high = "5 A"', "supply.high", "'A' is a unit of current"),
    ("[supply]", 'low = "5 V"', "supply.low", "below supply.high, which is 5 V"),
    ("[supply]", 'high = "-1 V"', "supply.high", "above supply.low, which is 0 V when left out"),
    ("[supply]", "tolerance = 1", "supply.tolerance", "less than 100 %"),
    ("[supply]", "tolerance = 5", "supply.tolerance", "write '5 %'"),
    ("[supply]", 'tolerance = "-1 %"', "supply.tolerance", "at least 0"),
    ("[supply]", 'guard = "-1 mV"', "supply.guard", "at least 0 V"),
    ("[supply]", "load = 0", "supply.load", "more than 0 ohm"),
    (
        "[supply]",
        'load_to = "ground"',
        "supply.load_to",
        "expected a voltage such as '50 mV', or 'reference'",
    ),
    ("[ambient]", 'coldest = "-274 C"', "ambient.coldest", "at least -273.15 °C"),
    (
        "[ambient]",
        'coldest = "30 C"',
        "ambient.coldest",
        "not above ambient.hottest, which is 25 °C when left out",
    ),
    (
        "[ambient]",
        "hottest = 20",
        "ambient.hottest",
        "not below ambient.coldest, which is 25 °C when left out",
    ),
    ("[targets]", "bandwidth = 0", "targets.bandwidth", "more than 0 Hz"),
    ("[targets]", "snr = nan", "targets.snr", "found 'nan', expected a level in decibels"),
    ("[targets]", "snr = true", "targets.snr", "found 'true', expected a level in decibels"),
    ("[targets]", 'phase_margin = "-1 deg"', "targets.phase_margin", "at least 0 deg"),
    ("[targets]", 'phase_margin = "550 deg"', "targets.phase_margin", "less than 180 deg"),
    ("[targets]", "peaking = 0", "targets.peaking", "more than 0 dB"),
    ("[targets]", "offset = 0", "targets.offset", "more than 0 V"),
    ("[targets]", "slew = 1", "targets.slew", "needs a bandwidth target"),
    ("[targets]", "supply_current = 0", "targets.supply_current", "more than 0 A"),
    ("[targets]", "cost = 0", "targets.cost", "more than 0"),
    ("[targets]", 'cost = "4,50"', "targets.cost", "write '4.50'"),
    ("[targets]", 'cost = "4.50 EUR"', "targets.cost", 'state currency = "EUR"'),
    ("[targets]", 'full_scale = "3 uW"', "targets.full_scale", "its limit is light.strongest"),
    ("[targets]", "bandwith = 1e3", "targets.bandwith", "did you mean 'bandwidth'?"),
    ("[space]", "wirings = []", "space.wirings", "at least one item"),
    ("[space]", 'wirings = ["rising-unbaised"]', "space.wirings", "did you mean 'rising-unbiased'?"),
    ("[space]", 'references = ["rail"]', "space.references", "expected 'ground' or 'divider'"),
    (
        "[space]",
        'divider = {from = "200k"}',
        "space.divider.from",
        "space.divider.to, which is 100 kohm when left",
    ),
    ("[space]", 'divider = {series = "E13"}', "space.divider.series", "'E12'"),
    ("[space]", "divider.bypass = 0", "space.divider.bypass", "more than 0 F"),
    ("[space]", 'resistance = {from = "1M", to = "1k"}', "space.resistance.from", "not above"),
    ("[space]", "resistance = {from = 0}", "space.resistance.from", "more than 0 ohm"),
    ("[space]", 'capacitance = {to = "0.1 pF"}', "space.capacitance.to", "not below space.capacitance.from"),
    ("[space]", 'capacitance = {none = "yes"}', "space.capacitance.none", "true or false"),
    ("[space]", 'low_pass = "none"', "space.low_pass", 'write ["none"]'),
    (
        "[space]",
        'low_pass = ["none", "1 kohm"]',
        "space.low_pass",
        "expected a frequency such as '10 MHz', or 'none'",
    ),
    ("[space]", "stray = -1e-12", "space.stray", "at least 0 F"),
    ("[space]", "dark_on_rail = 1", "space.dark_on_rail", "true or false"),
    ("[space]", "noise_from = 0", "space.noise_from", "more than 0 Hz"),
    ("[space]", 'status = ["activ"]', "space.status", "did you mean 'active'?"),
    ("[space]", "makers = [3]", "space.makers", "one line of text"),
    ("[converter]", "bits = 0", "converter.bits", "at least 1"),
    ("[converter]", "bits = 65", "converter.bits", "at most 64"),
    ("[converter]", "bits = 8.5", "converter.bits", "whole number"),
    ("[converter]", "bits = true", "converter.bits", "whole number"),
    ("[converter]", "low = 5", "converter.low", "below converter.high, which is 4.096 V when left out"),
    ("[converter]", 'high = "rail"', "converter.high", "expected a voltage such as '50 mV', or 'supply'"),
    ("[catalogs]", 'opamps = "a.csv"', "catalogs.opamps", 'write ["a.csv"]'),
    ("[catalogs]", "opamps = []", "catalogs.opamps", "at least one item"),
    (
        "[catalogs]",
        'resistors = ["../catalogs/opamps.csv"]',
        "catalogs.resistors",
        "under catalogs.opamps already",
    ),
    ("[catalogs]", 'opamp = ["a.csv"]', "catalogs.opamp", "did you mean 'opamps'?"),
    ("[ranking]", 'by = "price"', "ranking.by", "expected 'cost', 'margin', 'snr' or 'supply_current'"),
    ("[ranking]", "show = 0", "ranking.show", "at least 1"),
    ("[ranking]", "comfort = 0", "ranking.comfort", "more than 0"),
    ("[ranking]", "comfort = 1.5", "ranking.comfort", "at most 1"),
    ("[ranking]", "quantity = 3", "ranking.quantity", "stands at the top"),
    ("[ranking]", "bits = 3", "ranking.bits", "stands in [converter]"),
    ("[assume.opamp]", "output_low = 1", "assume.opamp", "did you mean 'opamps'?"),
    ("[assume.opamps]", "output_lo = 1", "assume.opamps.output_lo", "did you mean 'output_low'?"),
    (
        "[assume.opamps]",
        'maker = "me"',
        "assume.opamps.maker",
        "a single value cannot fill this column (those that can: board_area,",
    ),
    ("[assume.photodiodes]", "responsivity = 0.5", "assume.photodiodes.responsivity", "cannot fill"),
    ("[assume.photodiodes]", "capacitance = 0", "assume.photodiodes.capacitance", "zero or negative"),
    ("[assume.opamps]", 'output_low = "50 mA"', "assume.opamps.output_low", "expected a voltage"),
    ("[assume.opamps]", "gbw = 0", "assume.opamps.gbw", "zero or negative"),
    ("[assume.opamps]", 'gbw = "none"', "assume.opamps.gbw", "expected a frequency"),
    ("[assume.opamps]", "bias_current = -1e-12", "assume.opamps.bias_current", "cannot be negative"),
    ("[assume.opamps]", "temp_min = -300", "assume.opamps.temp_min", "below -273.15 C"),
    ("[assume]", "opamps = 3", "assume.opamps", "expected a table"),
    ("[foo]", "bar = 3", "foo", "there is no such table"),
    ("", "quantity = 0", "quantity", "at least 1"),
    ("", "quantity = -3", "quantity", "at least 1"),
    ("", "quantity = 1.5", "quantity", "whole number"),
    ("", "quantity = true", "quantity", "whole number"),
    ("", "quantiy = 3", "quantiy", "did you mean 'quantity'?"),
    ("", 'currency = "eur"', "currency", "write 'EUR'"),
    ("", 'currency = "€"', "currency", "write 'EUR'"),
    ("", 'currency = "money"', "currency", "ISO 4217"),
    ("", "name = 3", "name", "one line of text"),
    ("", 'name = "a\\nb"', "name", "one line of text"),
    ("", "converter = 3", "converter", "expected a table"),
]


def with_line(table: str, line: str) -> str:
    """Return the minimal request with one more or one other line in the table."""
    lines = MINIMAL.splitlines()
    if not table:
        return "\n".join([line, *lines])
    if table not in lines:
        return "\n".join([*lines, table, line])
    key = line.partition("=")[0]
    lines = [old for old in lines if not old.startswith(key)]
    lines.insert(lines.index(table) + 1, line)
    return "\n".join(lines)


@pytest.mark.parametrize(
    ("table", "line", "key", "words"), WRONG, ids=[f"{row[0]} {row[1]}" for row in WRONG]
)
def test_one_wrong_line_is_one_problem_at_its_line(
    fail: Fails, table: str, line: str, key: str, words: str
) -> None:
    text = with_line(table, line)
    (problem,) = fail(text)
    assert problem.column == key
    assert words in str(problem)
    assert Path(problem.file).name == "bench.toml"
    at_table = key in ("foo", "assume.opamp")  # the heading itself is what is wrong
    assert text.splitlines()[(problem.row or 0) - 1] == (table if at_table else line)


def test_every_problem_is_found_at_once_in_the_order_of_the_lines(fail: Fails) -> None:
    problems = fail(
        "quantiy = 3\n[supply]\nhigh = 5\nlow = 6\n[light]\nweakest = true\n[targets]\nslew = 1\n"
    )
    assert [(problem.row, problem.column) for problem in problems] == [
        (1, "quantiy"),
        (4, "supply.low"),
        (5, "light.wavelength"),
        (5, "light.strongest"),
        (6, "light.weakest"),
        (8, "targets.slew"),
    ]


def test_a_missing_table_is_told_with_what_to_write(fail: Fails) -> None:
    light, supply = fail('name = "x"')
    assert light.remedy == 'state [light] with wavelength = "850 nm", weakest = "30 nW", strongest = "3 uW"'
    assert (light.column, light.row) == ("light", None)
    assert (supply.column, supply.row) == ("supply", None)


def test_a_misspelt_key_is_not_called_missing_as_well(fail: Fails) -> None:
    assert [problem.column for problem in fail(MINIMAL.replace("wavelength", "wavelenght"))] == [
        "light.wavelenght"
    ]
    assert [problem.column for problem in fail(MINIMAL.replace("[supply]", "[suply]"))] == ["suply"]
    assert [problem.column for problem in fail(MINIMAL.replace("[supply]\n", ""))] == ["supply", "light.high"]
    moved = MINIMAL.replace('weakest = "30 nW"\n', "") + 'weakest = "30 nW"\n'
    assert [problem.column for problem in fail(moved)] == ["supply.weakest"]


def test_a_wrong_bandwidth_is_not_called_missing_by_slew(fail: Fails) -> None:
    assert [p.column for p in fail(MINIMAL + "[targets]\nslew = 2\nbandwidth = -1")] == ["targets.bandwidth"]


def test_converter_up_to_the_supply_starts_below_it(fail: Fails) -> None:
    (problem,) = fail(MINIMAL + '[converter]\nlow = 5\nhigh = "supply"')
    assert (problem.column, problem.row) == ("converter.low", 8)
    assert "below supply.high" in problem.rule


def test_a_cost_in_another_currency_is_refused(fail: Fails, read: Reads) -> None:
    text = 'currency = "EUR"\n' + MINIMAL + '[targets]\ncost = "4.50 {}"\n'
    assert read(text.format("EUR")).targets.cost == 4.5
    (problem,) = fail(text.format("USD"))
    assert "in USD, the request in EUR" in problem.rule


def test_each_wrong_item_of_a_list_has_its_own_line(fail: Fails) -> None:
    first, second = fail(MINIMAL + '[space]\nlow_pass = [\n  "none",\n  "1 kohm",  # no\n\n  -3,\n]\n')
    assert (first.row, first.cell) == (10, "1 kohm")
    assert (second.row, second.cell) == (12, "-3")


# Files that are no request at all


@pytest.mark.parametrize(
    ("data", "row", "words"),
    [
        (MINIMAL.encode("utf-16"), 1, "UTF-16"),
        (MINIMAL.encode("utf-16-le"), 1, "save it again as UTF-8"),
        (MINIMAL.encode("utf-32"), 1, "UTF-32"),
        (b'[light]\nname = "5 \xb5W"', 2, "byte 0xB5 in column 11 is not UTF-8"),
        (b"[light]\nwavelength = 850 nm\n", 2, 'put the value in quotes: wavelength = "850 nm"'),
        (b"a = 1\nb = True\n", 2, "write b = true"),
        (b"a = 1\nb : 2\n", 2, "write b = 2"),
        (b'a = "x\n', 1, "put the missing quote"),
        (b"a = [1\n", 2, "a list is not closed"),
        (b"a = [1,\n", 2, "a bracket left open?"),
        (b"a = 1\na = 2\n", 2, "this key stands above already"),
        (b"[a]\n[b]\n[a]\n", 3, "this table stands above already"),
        (b"a = " + b"[" * 5000, None, "nested too deep"),
        (b"quantity = " + b"9" * 5000, None, "too many digits"),
        (b"\x00\x01", 1, "UTF-8"),
        (b"a = 1\n\x01", 2, "not valid TOML"),
    ],
)
def test_a_file_that_is_no_toml_is_named_with_the_place(
    fail: Fails, data: bytes, row: int | None, words: str
) -> None:
    (problem,) = fail(data)
    assert problem.row == row
    assert words in str(problem)


def test_a_number_too_large_for_any_quantity_is_refused(fail: Fails) -> None:
    problems = fail("quantity = 0x" + "f" * 5000 + "\n" + MINIMAL.replace('"5 V"', "1" + "0" * 400))
    assert [problem.column for problem in problems] == ["quantity", "supply.high"]


def test_a_missing_file_names_the_near_one(tmp_path: Path) -> None:
    (tmp_path / "bench.toml").write_text(MINIMAL)
    with pytest.raises(InputError, match=r"there is no such file \(did you mean 'bench.toml'"):
        read_request(tmp_path / "bensh.toml")
    with pytest.raises(InputError, match="this is a folder"):
        read_request(tmp_path)
    with pytest.raises(InputError, match="luxsift start"):
        read_request(tmp_path / "no" / "such.toml")
    with pytest.raises(InputError, match="cannot be read"):
        read_request("nul\x00byte")


def test_control_characters_of_keys_and_values_do_not_reach_the_message(fail: Fails) -> None:
    message = str(InputError(fail(MINIMAL + '"a\\u001b[31m" = "\\u001b[0m"\n[ranking]\nby = "\\u001b[0m"')))
    assert "\x1b" not in message
    assert "\\u001b[31m" in message


# Lines

LINES = r"""
# comment = 1
top = $$$
inside = 2
\$$$ "" \"$$$
dotted . "quo.ted" . 'x' = 1   # after
[table]  # [no]
list = [ # a ] b
  1, { deep = [
    "]", 'it # is'
]}
]
[ table . sub ]
date = 1979-05-27 07:32:00Z
raw = '''
[fake]
'''
inline = { a = 1, b.c = "}" }
[[many]]
x = 1
[[many]]
x = 2
""".replace("$", '"')


def test_lines_of_keys() -> None:
    assert tomllib.loads(LINES)["top"] == 'inside = 2\n""" "" "'
    lines = key_lines(LINES)
    assert lines[("top",)] == 3
    assert lines[("dotted",)] == lines[("dotted", "quo.ted", "x")] == 6
    assert lines[("table",)] == 7
    assert lines[("table", "list", 0)] == 9
    assert lines[("table", "list", 1, "deep", 1)] == 10
    assert lines[("table", "sub", "date")] == 14
    assert lines[("table", "sub", "raw")] == 15
    assert lines[("table", "sub", "inline", "b", "c")] == 18
    assert lines[("many", "x")] == 20
    assert ("fake",) not in lines
    assert ("inside",) not in lines


def test_lines_of_a_text_that_the_scanner_does_not_follow_are_left_out() -> None:
    assert key_lines("a = 1\n= 2\nb = 3\n") == {("a",): 1}


# The values in force


@pytest.mark.parametrize(
    "text",
    [
        FULL,
        MINIMAL,
        MINIMAL.replace("30 nW", "0.4 uW/cm2").replace("3 uW", "1.1 mW/cm2"),
        MINIMAL + '[converter]\nhigh = "supply"\n[light.active_area]\nto = "3 mm2"\n',
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
    unstated = optional | {key for key in KEYS if key[0] in ("ambient", "converter")}
    for key in KEYS.keys() - unstated:
        table: Any = tables
        for name in key:
            assert name in table, key
            table = table[name]
    assert "converter" not in tables
    assert "ambient" not in tables


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
