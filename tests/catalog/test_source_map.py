"""source.toml: a supplier's own export read as it says, and everything that can be wrong in it."""

from __future__ import annotations

import math

import pytest

from optimizer.errors import Problem
from tests.catalog.made import GOOD, Folder, named, says, table

EXPORT = """\
Image;Mfr Part #;Supplier;Price (EUR);Voltage Range;Operating Temperature;Current - Supply;Gain Bandwidth;\
Noise;Bias;Vos (mV);Lifecycle
a.png;ZQ1;Maker A;1,85;1.8 V ~ 5.5 V;-40 to 125 °C;0,9 mA;10;8,5;2;0,5;In Production
b.png;ZQ2;Maker A;2,10 €;2,7V - 36V;-40°C ~ 85°C (TA);1 mA;1,5;8;2 nA;0,25;Last Buy
"""
EXPORT_MAP = """\
currency = "EUR"
[file."opamps.csv"]
ignore = ["Image"]
status = { "In Production" = "active", "Last Buy" = "last-time-buy" }
[file."opamps.csv".columns]
part = { header = "Mfr Part #" }
maker = { value = "Maker Q" }
price = { header = "Price (EUR)" }
supply_min = { header = "Voltage Range", part = "low" }
supply_max = { header = "Voltage Range", part = "high" }
temp_min = { header = "Operating Temperature", part = "low" }
temp_max = { header = "Operating Temperature", part = "high" }
quiescent_current = { header = "Current - Supply" }
gbw = { header = "Gain Bandwidth", unit = "MHz" }
voltage_noise = { header = "Noise", unit = "nV/rtHz" }
bias_current = { header = "Bias", unit = "pA" }
offset_voltage = { header = "Vos (mV)" }
status = { header = "Lifecycle" }
input_low = { value = 0.1, unit = "V" }
output_low = { value = "50 mV" }
"""


def test_supplier_export_is_read_as_the_map_says(folder: Folder) -> None:
    folder.write("opamps.csv", EXPORT)
    folder.write("source.toml", EXPORT_MAP)
    catalogs = folder.read()
    parts = catalogs.opamps
    assert parts.text["part"].tolist() == ["ZQ1", "ZQ2"]
    assert parts.text["maker"].tolist() == ["Maker Q", "Maker Q"]
    assert parts.text["status"].tolist() == ["active", "last-time-buy"]
    assert parts.points["price"] == (((1.0, 1.85),), ((1.0, 2.10),))
    expected = {
        "supply_min": [1.8, 2.7],
        "supply_max": [5.5, 36.0],
        "temp_min": [-40.0, -40.0],
        "temp_max": [125.0, 85.0],
        "quiescent_current": [0.9e-3, 1e-3],
        "gbw": [10e6, 1.5e6],
        "voltage_noise": [8.5e-9, 8e-9],
        "bias_current": [2e-12, 2e-9],
        "offset_voltage": [0.5e-3, 0.25e-3],
        "input_low": [0.1, 0.1],
        "output_low": [0.05, 0.05],
    }
    for name, values in expected.items():
        assert parts.number[name].tolist() == values, name
    assert catalogs.currency == "EUR"
    assert [(source.file, source.rows) for source in catalogs.sources][-1] == ("source.toml", 0)


def test_unit_is_for_bare_numbers_and_the_second_of_pairs(folder: Folder) -> None:
    row = GOOD["photodiodes"] | {
        "capacitance": "0:40; 5 V:22; 10:0.015 nF",
        "responsivity": "500 nm:300; 900 nm:0.6 A/W",
    }
    folder.rows("photodiodes", row)
    lines = [
        '[file."photodiodes.csv".columns]',
        'capacitance = { unit = "pF" }',
        'responsivity = { unit = "mA/W" }',
    ]
    folder.write("source.toml", "\n".join(lines))
    parts = folder.read().photodiodes
    assert parts.points["capacitance"] == (((0.0, 40e-12), (5.0, 22e-12), (10.0, 15e-12)),)
    assert parts.points["responsivity"] == (((500e-9, 0.3), (900e-9, 0.6)),)


@pytest.mark.parametrize("encoding", ["cp1252", "latin-1", "utf-16", "utf-16-le", "UTF-8", "shift_jis"])
def test_stated_encoding(folder: Folder, encoding: str) -> None:
    folder.write("source.toml", f'encoding = "{encoding}"\n')
    for role, row in GOOD.items():
        folder.write(f"{role}.csv", table([row]).encode(encoding))
    micro = GOOD["opamps"] | {"offset_voltage": "500 uV" if encoding == "shift_jis" else "500 µV"}
    folder.write("opamps.csv", table([micro]).encode(encoding))
    assert folder.read().opamps.number["offset_voltage"].tolist() == [0.5e-3]


@pytest.mark.parametrize(
    ("quantity", "part_of_price"),
    [(1, "1.10"), (99, "1.10"), (100, "1:1.85; 100:0.90"), (5000, "1:1.85; 100:0.90")],
)
def test_cheapest_of_duplicates_at_the_build_quantity(
    folder: Folder, quantity: int, part_of_price: str
) -> None:
    prices = ["1:1.85; 100:0.90", "1.10", "", "3.00"]
    rows = [GOOD["opamps"] | {"price": price, "pinout": f"pin-{place}"} for place, price in enumerate(prices)]
    folder.rows("opamps", named("opamps", 1), *rows)
    folder.write("source.toml", '[file."opamps.csv"]\nduplicates = "cheapest"\n')
    catalogs = folder.read(quantity=quantity)
    assert catalogs.opamps.size == 2
    assert catalogs.opamps.text["pinout"].tolist() == ["", f"pin-{prices.index(part_of_price)}"]
    line = prices.index(part_of_price) + 3
    assert sorted(left.row for left in catalogs.left_out) == [row for row in (3, 4, 5, 6) if row != line]
    assert all(f"opamps.csv, line {line}" in left.reason for left in catalogs.left_out)


def test_equal_duplicates_do_not_depend_on_the_order_of_rows(folder: Folder) -> None:
    rows = [GOOD["opamps"] | {"pinout": pinout} for pinout in ("b", "a", "c")]
    folder.write("source.toml", '[file."opamps.csv"]\nduplicates = "cheapest"\n')
    kept = []
    for order in (rows, rows[::-1]):
        folder.rows("opamps", *order)
        kept.append(folder.read().opamps.text["pinout"].tolist())
    assert kept == [["a"], ["a"]]


def test_cheapest_needs_the_word_of_both_files(folder: Folder) -> None:
    folder.write("more.csv", table([GOOD["opamps"] | {"price": "1"}]))
    folder.write("source.toml", '[file."opamps.csv"]\nduplicates = "cheapest"\n')
    files = {"opamps": ["opamps.csv", "more.csv"]}
    assert folder.problem(files=files).file == "more.csv"
    folder.write(
        "source.toml",
        '[file."opamps.csv"]\nduplicates = "cheapest"\n[file."more.csv"]\nduplicates="cheapest"\n',
    )
    catalogs = folder.read(files=files)
    assert [(left.file, left.row) for left in catalogs.left_out] == [("opamps.csv", 2)]
    assert catalogs.opamps.points["price"] == (((1.0, 1.0),),)


def test_bad_rows_are_left_out_counted_and_listed(folder: Folder) -> None:
    rows = [named("opamps", number) for number in range(6)]
    rows[1]["gbw"] = "quick"
    rows[1]["price"] = "0"
    rows[3]["supply_min"] = "9 V"
    text = table(rows).splitlines()
    text[6] += ",surplus"
    folder.write("opamps.csv", "\n".join(text))
    folder.write("source.toml", '[file."opamps.csv"]\nbad_rows = "leave out"\n')
    catalogs = folder.read()
    assert catalogs.opamps.text["part"].tolist() == ["ZQ1000", "ZQ1002", "ZQ1004"]
    assert [(left.file, left.row) for left in catalogs.left_out] == [("opamps.csv", row) for row in (3, 5, 7)]
    assert "gbw: found 'quick'" in catalogs.left_out[0].reason
    assert "price: found '0'" in catalogs.left_out[0].reason
    assert "above supply_max" in catalogs.left_out[1].reason
    assert "11 cells" in catalogs.left_out[2].reason
    assert catalogs.sources[0].rows == 6


def test_every_row_left_out_is_an_error(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"gbw": "x"})
    folder.write("source.toml", '[file."opamps.csv"]\nbad_rows = "leave out"\n')
    says(folder.problem(), "every row is bad", "gbw: found 'x'")


FILE = '[file."opamps.csv"]\n'
COLUMNS = '[file."opamps.csv".columns]\n'
WRONG = [
    # (source.toml, line, dotted key, cell, words)
    ('curency = "EUR"', 1, "curency", None, ["unknown key", "did you mean 'currency'"]),
    ('currency = "EURO"', 1, "currency", "EURO", ["ISO 4217", "did you mean 'EUR'"]),
    ('currency = "€"', 1, "currency", "€", ["ISO 4217"]),
    ("currency = 4", 1, "currency", "4", ["text in quotes"]),
    ('encoding = "utf-9"', 1, "encoding", "utf-9", ["text encoding", "cp1252"]),
    ('encoding = "zlib"', 1, "encoding", "zlib", ["text encoding"]),
    ('file = "opamps.csv"', 1, "file", "opamps.csv", ["expected a table"]),
    ('\n[file."opams.csv"]\n', 2, 'file."opams.csv"', None, ["no such file stands beside", "'opamps.csv'"]),
    (FILE + 'bad_row = "leave out"', 2, 'file."opamps.csv".bad_row', None, ["unknown key", "'bad_rows'"]),
    (FILE + 'bad_rows = "skip"', 2, 'file."opamps.csv".bad_rows', "skip", ["'error' or 'leave out'"]),
    (
        FILE + 'duplicates = "cheepest"',
        2,
        'file."opamps.csv".duplicates',
        "cheepest",
        ["did you mean 'cheapest'"],
    ),
    (FILE + "duplicates = true", 2, 'file."opamps.csv".duplicates', "True", ["'error' or 'cheapest'"]),
    (FILE + 'ignore = "Image"', 2, 'file."opamps.csv".ignore', "Image", ["a list of headers"]),
    (FILE + "ignore = [1]", 2, 'file."opamps.csv".ignore', "1", ["text in quotes"]),
    (
        FILE + 'status = { New = "activ" }',
        2,
        'file."opamps.csv".status.New',
        "activ",
        ["did you mean 'active'"],
    ),
    (FILE + 'status = "active"', 2, 'file."opamps.csv".status', "active", ["expected a table"]),
    (
        COLUMNS + 'gwb = { unit = "MHz" }',
        2,
        'file."opamps.csv".columns.gwb',
        None,
        ["unknown column", "'gbw'"],
    ),
    (COLUMNS + 'gbw = "GBW"', 2, 'file."opamps.csv".columns.gbw', "GBW", ["expected a table"]),
    (
        COLUMNS + 'gbw = { units = "MHz" }',
        2,
        'file."opamps.csv".columns.gbw.units',
        None,
        ["unknown key", "'unit'"],
    ),
    (
        COLUMNS + "gbw = {}",
        2,
        'file."opamps.csv".columns.gbw',
        None,
        ["expected header, unit, value or part"],
    ),
    (
        COLUMNS + 'gbw = { part = "middle", header = "gbw" }',
        2,
        'file."opamps.csv".columns.gbw.part',
        "middle",
        ["'low' or 'high'"],
    ),
    (
        COLUMNS + 'gbw = { value = "1 MHz", header = "gbw" }',
        2,
        'file."opamps.csv".columns.gbw',
        None,
        ["constant value has no header"],
    ),
    (
        COLUMNS + "package = { value = true }",
        2,
        'file."opamps.csv".columns.package.value',
        "True",
        ["text in quotes"],
    ),
]


@pytest.mark.parametrize("case", WRONG)
def test_what_source_toml_alone_shows_to_be_wrong(
    folder: Folder, case: tuple[str, int, str, str | None, list[str]]
) -> None:
    text, line, key, cell, words = case
    folder.write("source.toml", text)
    problem = _in_source(folder)
    assert (problem.row, problem.column, problem.cell) == (line, key, cell)
    says(problem, *words)


WRONG_FOR_THE_FILE = [
    ('gbw = { unit = "mV" }', "gbw.unit", "mV", ["frequency", "10 MHz"]),
    ('package = { header = "gbw", unit = "mV" }', "package.unit", "mV", ["has no unit"]),
    ('slew_rate = { unit = "V/us" }', "slew_rate", None, ["no such header in opamps.csv"]),
    ('price = { unit = "mV" }', "price.unit", "mV", ["ISO 4217"]),
    ('package = { header = "gbw", part = "low" }', "package.part", "low", ["single quantities"]),
    ('gbw = { header = "Gain" }', "gbw.header", "Gain", ["no such header in opamps.csv"]),
    ('slew_rate = { value = "5 V" }', "slew_rate.value", "5 V", ["a slew rate such as"]),
    ("slew_rate = { value = -5 }", "slew_rate.value", "-5", ["zero or negative"]),
    ('responsivity = { unit = "A/W" }', "responsivity", None, ["opamps have no such column"]),
]


@pytest.mark.parametrize(("line", "key", "cell", "words"), WRONG_FOR_THE_FILE)
def test_what_does_not_fit_the_file(
    folder: Folder, line: str, key: str, cell: str | None, words: list[str]
) -> None:
    folder.write("source.toml", COLUMNS + line)
    problem = _in_source(folder)
    assert (problem.column or "").endswith(f"columns.{key}")
    assert (problem.row, problem.cell) == (2, cell)
    says(problem, *words)


def test_ignored_and_mapped(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"Slope": "5 V/us"})
    folder.write("source.toml", FILE + 'ignore = ["Slope"]\ncolumns = { slew_rate = { header = "Slope" } }\n')
    says(_in_source(folder), "ignored and mapped")


def test_syntax_error_names_the_line_and_is_said_once(folder: Folder) -> None:
    folder.write("source.toml", 'currency = "EUR"\nencoding = utf-8\n')
    problem = folder.problem()
    assert (problem.file, problem.row) == ("source.toml", 2)
    says(problem, "TOML")


def test_control_character_in_a_key(folder: Folder) -> None:
    folder.write("source.toml", '[file."\x00opamps.csv"]\n')
    problem = folder.problem()
    assert (problem.file, problem.row) == ("source.toml", 1)
    says(problem, "TOML")


def test_source_toml_that_is_no_utf8(folder: Folder) -> None:
    folder.write("source.toml", b'currency = "EUR" # \xff\n')
    assert folder.problem().file == "source.toml"


RANGES = [
    ("5 V", ["one range such as"]),
    ("±2 V ~ ±8 V", ["one range"]),
    ("1.8 V ~ 5.5 V, ±0.9 V ~ 2.75 V", ["one range"]),
    ("5.5 V ~ 1.8 V", ["low end of the range is above"]),
    ("1.8 A ~ 5.5 A", ["a voltage"]),
    ("low ~ high", ["one range"]),
    ("~ 5.5 V", ["one range"]),
]


@pytest.mark.parametrize(("cell", "words"), RANGES)
def test_what_is_no_range(folder: Folder, cell: str, words: list[str]) -> None:
    row = {name: text for name, text in GOOD["opamps"].items() if not name.startswith("supply")}
    folder.rows("opamps", row | {"Range": cell})
    ends = [
        f'supply_{end} = {{ header = "Range", part = "{part}" }}'
        for end, part in (("min", "low"), ("max", "high"))
    ]
    folder.write("source.toml", COLUMNS + "\n".join(ends))
    for problem in folder.problems():
        assert (problem.row, problem.column, problem.cell) == (2, "Range", cell)
        says(problem, *words)


READ_RANGES = [
    ("-40 to 125 °C", -40.0, 125.0),
    ("-40°C ~ 125°C (TA)", -40.0, 125.0),
    ("-40 °C ... +85 °C", -40.0, 85.0),
    ("-40…85", -40.0, 85.0),
    ("\u221240 \u2013 85 °C", -40.0, 85.0),
    ("-55 - -20 C", -55.0, -20.0),
    ("0-70 C", 0.0, 70.0),
    ("-", math.nan, math.nan),
    ("", math.nan, math.nan),
]


@pytest.mark.parametrize(("cell", "low", "high"), READ_RANGES)
def test_ranges_of_temperature(folder: Folder, cell: str, low: float, high: float) -> None:
    number = _temperatures(folder, cell)
    assert number == pytest.approx((low, high), nan_ok=True)


def test_junction_temperature_is_no_ambient(folder: Folder) -> None:
    with pytest.raises(Exception, match="says nothing about the ambient"):
        _temperatures(folder, "-40°C ~ 150°C (TJ)")


def _temperatures(folder: Folder, cell: str) -> tuple[float, float]:
    folder.rows("opamps", GOOD["opamps"] | {"Range": cell})
    ends = [
        f'temp_{end} = {{ header = "Range", part = "{part}" }}'
        for end, part in (("min", "low"), ("max", "high"))
    ]
    folder.write("source.toml", COLUMNS + "\n".join(ends))
    number = folder.read().opamps.number
    return float(number["temp_min"][0]), float(number["temp_max"][0])


def _in_source(folder: Folder) -> Problem:
    """The one problem in source.toml; what it causes in the catalogs may follow."""
    found = [problem for problem in folder.problems() if problem.file == "source.toml"]
    assert len(found) == 1, [str(problem) for problem in found]
    return found[0]
