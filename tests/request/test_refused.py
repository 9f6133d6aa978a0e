"""The request file: every error, and where it is said to stand."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.request.made import MINIMAL, Fails, Reads

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
    ("[tolerance]", 'method = "corner"', "tolerance.method", "did you mean 'corners'?"),
    ("[tolerance]", 'distribution = "gauss"', "tolerance.distribution", "expected 'uniform' or 'normal'"),
    ("[tolerance]", "yield = 99", "tolerance.yield", "write '99 %'"),
    ("[tolerance]", 'yield = "100 %"', "tolerance.yield", "less than 100 %"),
    ("[tolerance]", "yield = 0", "tolerance.yield", "more than 0"),
    ("[tolerance]", "draws = 0", "tolerance.draws", "at least 1"),
    ("[tolerance]", "draws = 1_000_001", "tolerance.draws", "at most 1000000"),
    ("[tolerance]", "draws = 10.5", "tolerance.draws", "whole number"),
    ("[tolerance]", "seed = -1", "tolerance.seed", "at least 0"),
    ("[tolerance]", "gbw = 30", "tolerance.gbw", "write '30 %'"),
    ("[tolerance]", "stray = 1", "tolerance.stray", "less than 100 %"),
    ("[tolerance]", 'responsivity = "-10 %"', "tolerance.responsivity", "at least 0"),
    ("[tolerance]", "dark_current = true", "tolerance.dark_current", "a fraction"),
    ("[tolerance]", 'gbw = "3 MHz"', "tolerance.gbw", "'MHz' is a unit of frequency"),
    ("[tolerance]", 'voltage_nois = "1 %"', "tolerance.voltage_nois", "did you mean 'voltage_noise'?"),
    ("[tolerance]", "opamp_sources = 2", "tolerance.opamp_sources", "stands in [resilience]"),
    ("[resilience]", "opamp_sources = 0", "resilience.opamp_sources", "at least 1"),
    ("[resilience]", "opamp_sources = 1.5", "resilience.opamp_sources", "whole number"),
    ("[resilience]", "opamp_source = 2", "resilience.opamp_source", "did you mean 'opamp_sources'?"),
    ("", "tolerance = 3", "tolerance", "expected a table"),
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
    ("[channels]", "count = 2", "channels", "a file with channels is a board file"),
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
    at_table = key in ("foo", "channels", "assume.opamp")  # the heading itself is what is wrong
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
