"""What a good catalog is read as."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Mapping

import numpy as np
import pytest
from scipy.constants import elementary_charge

from optimizer.catalog import unit_price
from optimizer.vocabulary import COLUMNS
from tests.catalog.made import GOOD, ROLES, Folder, named, table

OPAMPS = table([GOOD["opamps"]])


def test_every_column_of_the_contract_is_there(folder: Folder) -> None:
    catalogs = folder.read()
    for role in ROLES:
        parts = getattr(catalogs, role)
        assert {*parts.text, *parts.number, *parts.points} == set(COLUMNS[role])
        assert set(parts.assumed) == {*parts.number, *parts.points}
        assert parts.size == 1


def test_sources_hold_the_hash_of_the_bytes_and_the_rows_as_read(folder: Folder) -> None:
    folder.rows("opamps", named("opamps", 1), named("opamps", 2))
    catalogs = folder.read()
    data = (folder.path / "opamps.csv").read_bytes()
    first = catalogs.sources[0]
    assert (first.file, first.sha256, first.rows) == ("opamps.csv", hashlib.sha256(data).hexdigest(), 2)
    assert [source.file for source in catalogs.sources] == [f"{role}.csv" for role in ROLES]


@pytest.mark.parametrize("delimiter", [",", ";", "\t"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig"])
@pytest.mark.parametrize("line_end", ["\n", "\r\n", "\r"])
def test_delimiters_marks_and_line_ends(folder: Folder, delimiter: str, encoding: str, line_end: str) -> None:
    rows = [named("photodiodes", 1), named("photodiodes", 2)]
    text = table(rows, delimiter).replace("\n", line_end)
    folder.write("photodiodes.csv", text.encode(encoding))
    parts = folder.read().photodiodes
    assert parts.text["part"].tolist() == ["PD1001", "PD1002"]
    assert parts.points["responsivity"][1] == ((500e-9, 0.3), (900e-9, 0.6))


def test_decimal_commas_of_a_semicolon_file(folder: Folder) -> None:
    rows = [
        GOOD["photodiodes"]
        | {
            "price": "1:1,85; 100:1,21 €",
            "responsivity": "500 nm:0,3; 0,9 um:0,6 A/W",
            "capacitance": "40,5 pF",
            "rise_time": "2,5 ns",
        }
    ]
    folder.rows("photodiodes", *rows, delimiter=";")
    catalogs = folder.read()
    assert catalogs.currency == "EUR"
    assert catalogs.photodiodes.points["price"] == (((1.0, 1.85), (100.0, 1.21)),)
    assert catalogs.photodiodes.points["responsivity"] == (((500e-9, 0.3), (900e-9, 0.6)),)
    assert catalogs.photodiodes.points["capacitance"] == (((0.0, 40.5e-12),),)
    assert catalogs.photodiodes.number["rise_time"].tolist() == [2.5e-9]


def test_decimal_points_of_a_semicolon_file(folder: Folder) -> None:
    """Without a comma between digits anywhere a point is a point, three digits behind it or not."""
    row = GOOD["opamps"] | {"price": "1.250", "supply_min": "1.024 V", "maker": "Maker, A"}
    folder.rows("opamps", row, delimiter=";")
    opamps = folder.read().opamps
    assert opamps.number["supply_min"].tolist() == [1.024]
    assert opamps.points["price"] == (((1.0, 1.25),),)


def test_a_semicolon_file_of_both_styles_is_refused_at_the_ambiguous_cells_only(folder: Folder) -> None:
    rows = [
        named("opamps", 1) | {"supply_min": "1.024 V"},
        named("opamps", 2) | {"supply_min": "1,024 V", "gbw": "1.5 MHz"},
        named("opamps", 3) | {"supply_min": "2.7 V", "offset_voltage": ",5 mV"},
    ]
    folder.rows("opamps", *rows, delimiter=";")
    problem = folder.problem()
    assert (problem.row, problem.column, problem.cell) == (2, "supply_min", "1.024 V")
    assert problem.remedy == "write '1024' or '1,024'"
    folder.rows("opamps", *rows[1:], delimiter=";")
    opamps = folder.read().opamps
    assert opamps.number["supply_min"].tolist() == [1.024, 2.7]
    assert opamps.number["gbw"].tolist() == [1.5e6, 10e6]
    assert opamps.number["offset_voltage"].tolist() == [500e-6, 0.5e-3]


def test_a_lone_leading_comma_is_a_decimal_comma_too(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"offset_voltage": ",5 mV"}, delimiter=";")
    assert folder.read().opamps.number["offset_voltage"].tolist() == [0.5e-3]


def test_stray_spaces_of_every_kind(folder: Folder) -> None:
    text = OPAMPS.replace("Maker A", "\u00a0 Maker\u202f A \t").replace("10 MHz", "\u200b10\u00a0MHz ")
    text = text.replace("part,maker", " part ,\u00a0maker").replace("ZQ100", ' "ZQ100"')
    folder.write("opamps.csv", text)
    parts = folder.read().opamps
    assert parts.text["part"].tolist() == ["ZQ100"]
    assert parts.text["maker"].tolist() == ["Maker A"]
    assert parts.number["gbw"].tolist() == [10e6]


def test_quoted_newlines_and_quotes(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"package": 'SOIC\n"narrow"', "pinout": 'a "b'})
    parts = folder.read().opamps
    assert parts.text["package"].tolist() == ['SOIC "narrow"']
    assert parts.text["pinout"].tolist() == ['a "b']


@pytest.mark.parametrize("micro", ["u", "\u00b5", "\u03bc"])
def test_every_micro(folder: Folder, micro: str) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"offset_voltage": f"500 {micro}V"})
    assert folder.read().opamps.number["offset_voltage"].tolist() == [500e-6]


@pytest.mark.parametrize(
    ("header", "cell", "value"),
    [
        ("gbw (MHz)", "10", 10e6),
        ("gbw [MHz]", "10.5", 10.5e6),
        ("gbw(kHz)", "10", 10e3),
        ("gbw (MHz)", "10 kHz", 10e3),
        ("slew_rate [V/us]", "5", 5e6),
        ("temp_max (°C)", "85", 85.0),
        ("open_loop_gain (V/mV)", "100", 1e5),
        ("voltage_noise [nV/√Hz]", "8", 8e-9),
        ("board_area (mm2)", "9", 9e-6),
    ],
)
def test_units_in_headers(folder: Folder, header: str, cell: str, value: float) -> None:
    name = header.replace("[", "(").split("(")[0].strip()
    folder.rows("opamps", {key: text for key, text in GOOD["opamps"].items() if key != name} | {header: cell})
    assert folder.read().opamps.number[name].tolist() == [value]


def test_currency_in_the_header_of_the_price(folder: Folder) -> None:
    row = dict(GOOD["opamps"])
    row["price (EUR)"] = row.pop("price")
    folder.rows("opamps", row)
    assert folder.read().currency == "EUR"


@pytest.mark.parametrize("blank", ["", "-", "N/A", "n/a", "  ", "\u00a0"])
def test_unknown_is_unknown(folder: Folder, blank: str) -> None:
    """A required column must exist, but any of its cells may be blank: never zero, never a default."""
    row = dict.fromkeys(COLUMNS["opamps"], blank) | {"part": "ZQ1"}
    folder.rows("opamps", row, named("opamps", 1))
    parts = folder.read().opamps
    for name in ("gbw", "supply_min", "voltage_noise", "bias_current", "output_low", "noise_corner", "stock"):
        assert math.isnan(parts.number[name][0]), name
    assert parts.points["price"][0] == ()
    assert parts.text["maker"][0] == ""
    assert math.isnan(parts.number["current_noise"][0]), "no bias current to work it out of"
    assert not parts.assumed["current_noise"][0]


def test_defaults_of_the_contract(folder: Folder) -> None:
    parts = folder.read().opamps
    expected = {"channels": 1.0, "open_loop_gain": 1e5, "second_pole": math.inf, "min_gain": 1.0}
    for name, value in expected.items():
        assert parts.number[name].tolist() == [value], name
    # physics.md: sqrt(2 q Ib25), with the 2 pA of the row
    assert parts.number["current_noise"][0] == pytest.approx(
        math.sqrt(2 * elementary_charge * 2e-12), rel=1e-15
    )
    assert parts.text["family"].tolist() == ["ZQ100"]
    assert parts.text["status"].tolist() == ["active"]
    assert sorted(name for name, flags in parts.assumed.items() if flags.any()) == [
        "current_noise",
        "open_loop_gain",
        "second_pole",
    ]
    catalogs = folder.read()
    assert catalogs.photodiodes.number["dark_doubling"].tolist() == [10.0]
    assert catalogs.resistors.number["parasitic_capacitance"].tolist() == [0.0]
    assert not any(flags.any() for flags in catalogs.photodiodes.assumed.values())


def test_stated_values_are_not_marked_as_assumed(folder: Folder) -> None:
    stated = {"open_loop_gain": "120 dB", "second_pole": "none", "current_noise": "1 fA/rtHz"}
    folder.rows("opamps", GOOD["opamps"] | stated, named("opamps", 1))
    parts = folder.read().opamps
    assert parts.number["open_loop_gain"].tolist() == [pytest.approx(1e6), 1e5]
    assert parts.number["current_noise"][0] == 1e-15
    for name in stated:
        assert parts.assumed[name].tolist() == [False, True], name


@pytest.mark.parametrize(
    ("role", "column", "value"),
    [
        ("opamps", "second_pole", math.inf),
        ("opamps", "bias_doubling", math.inf),
        ("opamps", "noise_corner", 0.0),
        ("opamps", "offset_drift", 0.0),
        ("photodiodes", "shunt_resistance", math.inf),
        ("photodiodes", "dark_current", 0.0),
        ("photodiodes", "rise_time", 0.0),
    ],
)
def test_none_is_no_effect(folder: Folder, role: str, column: str, value: float) -> None:
    folder.rows(role, GOOD[role] | {column: "none"})
    assert getattr(folder.read(), role).number[column].tolist() == [value]


def test_none_is_an_error_in_every_other_column(folder: Folder) -> None:
    for role, columns in COLUMNS.items():
        for name, column in columns.items():
            if column.none_allowed or column.kind == "text":
                continue
            folder.rows(role, GOOD[role] | {name: "none"})
            assert folder.problem().column == name
        folder.rows(role, GOOD[role])


def test_assumptions_fill_blanks_only_and_before_the_defaults(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"output_low": "5 mV"}, named("opamps", 1), named("opamps", 2))
    assume = {
        ("opamps", "output_low"): 0.05,
        ("opamps", "open_loop_gain"): 1e6,
        ("photodiodes", "rise_time"): 1e-9,
    }
    catalogs = folder.read(assume=assume)
    assert catalogs.opamps.number["output_low"].tolist() == [0.005, 0.05, 0.05]
    assert catalogs.opamps.assumed["output_low"].tolist() == [False, True, True]
    assert catalogs.opamps.number["open_loop_gain"].tolist() == [1e6] * 3
    assert catalogs.photodiodes.number["rise_time"].tolist() == [1e-9]


def test_assumed_bias_current_gives_the_current_noise(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"bias_current": "-"})
    parts = folder.read(assume={("opamps", "bias_current"): 1e-9}).opamps
    assert parts.number["current_noise"][0] == pytest.approx(
        math.sqrt(2 * elementary_charge * 1e-9), rel=1e-15
    )
    assert parts.assumed["current_noise"].tolist() == [True]


def test_assumed_none_is_no_effect(folder: Folder) -> None:
    """The request hands over 0 s for a rise time of none, which no cell may hold."""
    parts = folder.read(assume={("photodiodes", "rise_time"): 0.0}).photodiodes
    assert parts.number["rise_time"].tolist() == [0.0]
    assert parts.assumed["rise_time"].tolist() == [True]


def test_assumed_price_and_capacitance(folder: Folder) -> None:
    folder.rows(
        "photodiodes", GOOD["photodiodes"], named("photodiodes", 1) | {"price": "", "capacitance": "-"}
    )
    assume = {("photodiodes", "price"): 4.0, ("photodiodes", "capacitance"): 1e-11}
    parts = folder.read(assume=assume).photodiodes
    assert parts.points["price"] == (((1.0, 3.20),), ((1.0, 4.0),))
    assert parts.points["capacitance"] == (((0.0, 40e-12),), ((0.0, 1e-11),))
    assert parts.assumed["price"].tolist() == parts.assumed["capacitance"].tolist() == [False, True]


def test_files_of_one_role_are_one_catalog(folder: Folder) -> None:
    folder.write("more.csv", table([named("opamps", 1) | {"slew_rate": "5 V/us"}, named("opamps", 2)], ";"))
    catalogs = folder.read(files={"opamps": ["opamps.csv", "more.csv"]})
    assert catalogs.opamps.text["part"].tolist() == ["ZQ100", "ZQ1001", "ZQ1002"]
    assert catalogs.opamps.number["slew_rate"] == pytest.approx([np.nan, 5e6, np.nan], nan_ok=True)
    assert [(source.file, source.rows) for source in catalogs.sources[:2]] == [
        ("opamps.csv", 1),
        ("more.csv", 2),
    ]


@pytest.mark.parametrize(
    ("cell", "status"),
    [
        ("active", "active"),
        ("Active", "active"),
        ("Not for new designs", "not-for-new-designs"),
        ("LAST-TIME-BUY", "last-time-buy"),
        ("obsolete", "obsolete"),
        ("-", "active"),
    ],
)
def test_statuses(folder: Folder, cell: str, status: str) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"status": cell})
    assert folder.read().opamps.text["status"].tolist() == [status]


@pytest.mark.parametrize(("cell", "series"), [("E24", "E24"), ("e192", "E192"), ("E 96", "E96"), ("-", "")])
def test_series(folder: Folder, cell: str, series: str) -> None:
    folder.rows("resistors", GOOD["resistors"] | {"series": cell})
    assert folder.read().resistors.text["series"].tolist() == [series]


def test_list_of_values(folder: Folder) -> None:
    row = {"family": "RL", "series": "list", "values": "1 Mohm; 470k; 2M2; 1000 kohm", "price": "1"}
    folder.rows("resistors", row, GOOD["resistors"])
    parts = folder.read().resistors
    assert parts.points["values"] == (((470e3, 0.0), (1e6, 0.0), (2.2e6, 0.0)), ())
    assert parts.number["from"] == pytest.approx([np.nan, 10.0], nan_ok=True)


@pytest.mark.parametrize(
    ("cells", "stated", "wanted", "currency"),
    [
        ({}, None, None, None),
        ({}, "EUR", None, "EUR"),
        ({}, None, "SEK", "SEK"),
        ({"opamps": "€1.85"}, None, None, "EUR"),
        ({"opamps": "1.85 usd"}, None, None, "USD"),
        ({"opamps": "$1.85"}, None, None, "USD"),
        ({"opamps": "$1.85"}, "CAD", None, "CAD"),
        ({"opamps": "$1.85", "resistors": "0.02 AUD"}, None, None, "AUD"),
        ({"opamps": "$1.85"}, None, "NZD", "NZD"),
        ({"opamps": "1:1.85 €; 100:1.21 €", "photodiodes": "EUR 3"}, "EUR", "EUR", "EUR"),
    ],
)
def test_one_currency(
    folder: Folder, cells: Mapping[str, str], stated: str | None, wanted: str | None, currency: str | None
) -> None:
    for role, price in cells.items():
        folder.rows(role, GOOD[role] | {"price": price})
    if stated:
        folder.write("source.toml", f'currency = "{stated}"\n')
    assert folder.read(currency=wanted).currency == currency


@pytest.mark.parametrize(
    ("quantity", "price"), [(1, 1.85), (99, 1.85), (100, 1.21), (999, 1.21), (10**6, 0.92)]
)
def test_unit_price_from_each_break_up(quantity: int, price: float) -> None:
    breaks = ((1.0, 1.85), (100.0, 1.21), (1000.0, 0.92))
    assert unit_price([breaks, ((50.0, 7.0),)], quantity).tolist() == [price, 7.0]


def test_unknown_price_has_no_number() -> None:
    assert np.isnan(unit_price([()], 10)).tolist() == [True]


def test_unused_headers_are_no_error(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"Datasheet": "x", "RoHS": "yes", "Lead Finish": "matte"})
    assert folder.read().opamps.size == 1


def test_trailing_delimiters_and_blank_rows_of_a_spreadsheet_export(folder: Folder) -> None:
    text = "\n" + OPAMPS.replace("\n", ",,\n") + ",,,,,,,,,,,\n\n"
    folder.write("opamps.csv", text)
    catalogs = folder.read()
    assert catalogs.opamps.size == catalogs.sources[0].rows == 1
