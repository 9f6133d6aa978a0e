"""Every kind of cell that cannot be: named with line, column, cell, what was expected and a remedy."""

import pytest

from tests.catalog.made import Folder, named, says

# (role, column, cell, words of rule and remedy); the cell stands on line 3
CELLS = [
    # what is no quantity, or has another unit
    ("opamps", "gbw", "fast", ["a frequency such as '10 MHz'"]),
    ("opamps", "gbw", "10 V", ["a frequency", "unit of voltage"]),
    ("opamps", "gbw", "10 MHZz", ["a frequency", "did you mean"]),
    ("opamps", "gbw", "1,5 MHz", ["decimal comma", "semicolon", "1.5 MHz"]),
    ("opamps", "gbw", "1,500", ["thousands or decimals"]),
    ("opamps", "gbw", "nan", ["a frequency", "blank"]),
    ("opamps", "gbw", "inf", ["a frequency"]),
    ("opamps", "gbw", "-inf", ["a frequency"]),
    ("opamps", "gbw", "1e999", ["a frequency", "out of range"]),
    ("opamps", "gbw", "NA", ["a frequency", "leave the cell blank"]),
    ("opamps", "gbw", "?", ["a frequency", "leave the cell blank"]),
    ("opamps", "gbw", "none", ["a frequency", "leave the cell blank"]),
    ("opamps", "gbw", "TRUE", ["a frequency"]),
    ("opamps", "gbw", "=10*1e6", ["a frequency"]),
    ("opamps", "second_pole", "None", ["a frequency", "'none', in small letters"]),
    ("opamps", "voltage_noise", "8 nV", ["voltage noise density"]),
    ("opamps", "temp_max", "-300 C", ["below -273.15 C"]),
    # what cannot be
    ("opamps", "gbw", "0", ["zero or negative"]),
    ("opamps", "gbw", "-10 MHz", ["zero or negative"]),
    ("opamps", "price", "0", ["zero or negative"]),
    ("opamps", "price", "-1.85", ["zero or negative"]),
    ("opamps", "input_capacitance_common", "0 pF", ["zero or negative"]),
    ("opamps", "channels", "1.5", ["whole number"]),
    ("opamps", "channels", "0", ["zero or negative"]),
    ("opamps", "stock", "-4", ["negative"]),
    ("opamps", "bias_current", "-20 nA", ["negative", "magnitude"]),
    ("opamps", "output_low", "-20 mV", ["negative"]),
    ("photodiodes", "capacitance", "0", ["zero or negative"]),
    ("photodiodes", "capacitance", "-4 pF", ["zero or negative"]),
    ("photodiodes", "shunt_resistance", "0 ohm", ["zero or negative"]),
    ("photodiodes", "rise_time", "0 ns", ["zero or negative"]),
    ("photodiodes", "active_area", "0 mm2", ["zero or negative"]),
    ("resistors", "from", "0 ohm", ["zero or negative"]),
    ("resistors", "parasitic_capacitance", "-0.1 pF", ["negative"]),
    ("resistors", "tolerance", "5", ["fraction", "5 %"]),
    ("capacitors", "from", "-1 pF", ["zero or negative"]),
    # pairs, lists and price breaks
    ("photodiodes", "responsivity", "0.6 A/W", ["pairs written 'x:y; x:y'"]),
    ("photodiodes", "responsivity", "900 nm:0.6; 500 nm:0.3", ["must rise"]),
    ("photodiodes", "responsivity", "500 nm:0.3; 500 nm:0.4", ["must rise"]),
    ("photodiodes", "responsivity", "500:0.3", ["metres", "500 nm"]),
    ("photodiodes", "responsivity", "500 nm:-0.3", ["negative"]),
    ("photodiodes", "responsivity", "0 nm:0.3", ["wavelength"]),
    ("photodiodes", "responsivity", "500 nm:0.3:0.2", ["pairs"]),
    ("photodiodes", "responsivity", "500 nm:none", ["responsivity"]),
    ("photodiodes", "capacitance", "0 V:10 pF; 5 V:12 pF", ["cannot rise"]),
    ("photodiodes", "capacitance", "5 V:10 pF; 0 V:12 pF", ["must rise"]),
    ("photodiodes", "capacitance", "-5 V:10 pF; 0 V:8 pF", ["not negative"]),
    ("photodiodes", "capacitance", "10 pF; 8 pF", ["pairs"]),
    ("resistors", "values", "1 kohm; 2 kohm", ["series 'list'"]),
    ("opamps", "price", "1:2; 1:1.5", ["must rise"]),
    ("opamps", "price", "100:1.2; 1:1.85", ["must rise"]),
    ("opamps", "price", "1.85; 1.21", ["breaks such as"]),
    ("opamps", "price", "0:1.85", ["1 piece"]),
    ("opamps", "price", "1.5:1.85", ["whole number"]),
    ("opamps", "price", "on request", ["a price"]),
    ("opamps", "price", "1:1.85 EUR; 100:1.2 USD", ["two currencies"]),
    ("opamps", "price", "EUR 1.85 USD", ["one currency"]),
    # words
    ("opamps", "status", "activ", ["active, not-for-new-designs", "did you mean 'active'"]),
    ("opamps", "status", "Discontinued", ["status", "source.toml"]),
    ("resistors", "series", "E23", ["E24", "did you mean"]),
    ("resistors", "series", "E7", ["one of E3"]),
]


@pytest.mark.parametrize(("role", "column", "cell", "words"), CELLS)
def test_cell_is_refused_in_its_place(
    folder: Folder, role: str, column: str, cell: str, words: list[str]
) -> None:
    folder.rows(role, named(role, 1), named(role, 2) | {column: cell})
    problem = folder.problem()
    assert (problem.file, problem.row, problem.column) == (f"{role}.csv", 3, column)
    assert problem.cell == cell
    says(problem, *words)


@pytest.mark.parametrize(
    ("role", "low", "high"),
    [
        ("opamps", ("supply_min", "6 V"), ("supply_max", "5.5 V")),
        ("opamps", ("temp_min", "90 C"), ("temp_max", "85 C")),
        ("photodiodes", ("temp_min", "90"), ("temp_max", "85")),
        ("resistors", ("from", "2M2"), ("to", "1 Mohm")),
        ("capacitors", ("from", "1 nF"), ("to", "100 pF")),
    ],
)
def test_min_above_max(folder: Folder, role: str, low: tuple[str, str], high: tuple[str, str]) -> None:
    folder.rows(role, named(role, 1), named(role, 2) | dict([low, high]))
    problem = folder.problem()
    assert (problem.row, problem.column, problem.cell) == (3, *low)
    says(problem, f"above {high[0]}", high[1])


@pytest.mark.parametrize(
    ("role", "name"), [("opamps", "part"), ("photodiodes", "part"), ("resistors", "family")]
)
@pytest.mark.parametrize("blank", ["", "-", "N/A"])
def test_row_without_a_name(folder: Folder, role: str, name: str, blank: str) -> None:
    folder.rows(role, named(role, 1), named(role, 2) | {name: blank})
    problem = folder.problem()
    assert (problem.row, problem.column) == (3, name)
    says(problem, f"needs the name of its {name}")


def test_one_bad_cell_among_five_thousand_rows(folder: Folder) -> None:
    rows = [named("opamps", number) for number in range(5000)]
    rows[3210]["voltage_noise"] = "8 nV/Hz"
    folder.rows("opamps", *rows)
    problem = folder.problem()
    assert (problem.row, problem.column, problem.cell) == (3212, "voltage_noise", "8 nV/Hz")


def test_all_problems_of_all_files_come_at_once_in_reading_order(folder: Folder) -> None:
    folder.rows("opamps", named("opamps", 1) | {"gbw": "x", "price": "y"}, named("opamps", 2) | {"gbw": "z"})
    folder.rows("photodiodes", named("photodiodes", 1) | {"capacitance": "0"})
    folder.write("capacitors.csv", "")
    places = [(problem.file, problem.row, problem.column) for problem in folder.problems()]
    assert places == [
        ("opamps.csv", 2, "price"),
        ("opamps.csv", 2, "gbw"),
        ("opamps.csv", 3, "gbw"),
        ("photodiodes.csv", 2, "capacitance"),
        ("capacitors.csv", None, None),
    ]


def test_every_row_with_the_same_bad_cell_is_named(folder: Folder) -> None:
    folder.rows("opamps", *(named("opamps", number) | {"gbw": "bad"} for number in range(3)))
    assert [problem.row for problem in folder.problems()] == [2, 3, 4]
