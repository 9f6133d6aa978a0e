"""What is wrong with a file as a whole: encoding, header, rows, duplicates, currencies."""

from __future__ import annotations

import pytest

from optimizer.catalog import ReadOptions, read_catalogs
from tests.catalog.made import GOOD, Folder, named, says, table

OPAMPS = table([GOOD["opamps"]])
LATIN = OPAMPS.replace("500 uV", "500 µV")


def test_utf16_is_named_with_the_remedy(folder: Folder) -> None:
    folder.write("opamps.csv", OPAMPS.encode("utf-16"))
    problem = folder.problem()
    assert (problem.file, problem.row) == ("opamps.csv", 1)
    says(problem, "UTF-16", "expected UTF-8", "save it again", 'encoding = "utf-16"')


def test_utf32_is_not_taken_for_utf16(folder: Folder) -> None:
    folder.write("opamps.csv", OPAMPS.encode("utf-32"))
    says(folder.problem(), "UTF-32")


def test_utf16_without_a_mark_shows_as_nul(folder: Folder) -> None:
    folder.write("opamps.csv", OPAMPS.encode("utf-16-le"))
    problem = folder.problem()
    assert problem.row == 1
    says(problem, "NUL", "utf-16-le")


@pytest.mark.parametrize("line_end", ["\n", "\r\n", "\r"])
def test_stray_byte_is_named_with_its_line(folder: Folder, line_end: str) -> None:
    folder.write("opamps.csv", LATIN.replace("\n", line_end).encode("cp1252"))
    problem = folder.problem()
    assert (problem.row, problem.cell) == (2, "0xB5")
    says(problem, "not UTF-8", 'encoding = "cp1252"', "'µ'")


def test_utf8_mark_under_another_stated_encoding(folder: Folder) -> None:
    folder.write("source.toml", 'encoding = "cp1252"\n')
    folder.write("opamps.csv", LATIN.encode("utf-8-sig"))
    says(folder.problem(), "the file is in UTF-8", "expected CP1252")


def test_stated_encoding_that_the_bytes_are_not(folder: Folder) -> None:
    folder.write("source.toml", 'encoding = "ascii"\n')
    folder.write("opamps.csv", LATIN)
    problem = folder.problem()
    assert (problem.row, problem.cell) == (2, "0xC2")
    says(problem, "not ASCII")


def test_spreadsheet_under_a_csv_name(folder: Folder) -> None:
    folder.write("opamps.csv", b"PK\x03\x04\x14\x00\x06\x00")
    says(folder.problem(), "looks like a spreadsheet", ".xlsx")


@pytest.mark.parametrize("content", ["", "\n\n", " \n", "\ufeff", ",,,\n"])
def test_empty_file(folder: Folder, content: str) -> None:
    folder.write("opamps.csv", content)
    problem = folder.problem()
    assert problem.file == "opamps.csv"
    says(problem, "empty", "expected a header line")


@pytest.mark.parametrize("tail", ["", "\n\n", ",,,,,,,,,\n"])
def test_no_rows(folder: Folder, tail: str) -> None:
    folder.write("opamps.csv", OPAMPS.splitlines()[0] + "\n" + tail)
    says(folder.problem(), "no row of data")


def test_missing_file_names_its_neighbour(folder: Folder) -> None:
    problem = folder.problem(files={"opamps": ["opams.csv"]})
    assert problem.file == "opams.csv"
    says(problem, "no such file", "did you mean 'opamps.csv'")


@pytest.mark.parametrize("name", ["nowhere/opamps.csv", "", "opamps\x00.csv", "x" * 5000, "."])
def test_paths_that_are_no_file(folder: Folder, name: str) -> None:
    assert folder.problem(files={"opamps": [name]}).file == name


def test_role_without_a_file(folder: Folder) -> None:
    problem = folder.problem(files={"opamps": []})
    assert problem.column == "catalogs.opamps"
    says(problem, "no catalog file")


def test_role_that_is_not_given_at_all(folder: Folder) -> None:
    with pytest.raises(Exception, match="no catalog file"):
        read_catalogs({}, ReadOptions(folder=folder.path))


def test_file_listed_twice(folder: Folder) -> None:
    says(folder.problem(files={"opamps": ["opamps.csv", "opamps.csv"]}), "listed twice")


def test_ragged_row(folder: Folder) -> None:
    lines = table([named("opamps", 1), named("opamps", 2), named("opamps", 3)]).splitlines()
    lines[2] += ",surplus"
    lines[3] = lines[3].rsplit(",", 1)[0]
    folder.write("opamps.csv", "\n".join(lines))
    longer, shorter = folder.problems()
    assert (longer.row, shorter.row) == (3, 4)
    says(longer, "11 cells, the header has 10", "comma", "quotes")
    says(shorter, "9 cells, the header has 10")


def test_quote_that_is_never_closed(folder: Folder) -> None:
    rows = table([named("opamps", 1), named("opamps", 2), named("opamps", 3)])
    folder.write("opamps.csv", rows.replace("ZQ1002", '"ZQ1002'))
    problem = folder.problem()
    assert problem.row == 3
    says(problem, "never closed", "line 4", "close the quote")


def test_quote_closed_by_a_later_row_is_refused_whole_even_where_bad_rows_are_left_out(
    folder: Folder,
) -> None:
    """The open quote eats the rows up to the next quote: nobody can tell how many rows that were."""
    rows = table([named("opamps", number) | {"package": "SOIC-8"} for number in range(5)])
    folder.write("source.toml", '[file."opamps.csv"]\nbad_rows = "leave out"\n')
    folder.write("opamps.csv", rows.replace("ZQ1001,", '"ZQ1001,').replace("ZQ1004,", '"ZQ1004",'))
    problem = folder.problem()
    assert problem.row == 3
    says(problem, "closing quote", "runs on to line 6")


def test_text_behind_a_closing_quote(folder: Folder) -> None:
    folder.write("opamps.csv", OPAMPS.replace("ZQ100", '"ZQ"100'))
    problem = folder.problem()
    assert problem.row == 2
    says(problem, "closing quote", "twice")


def test_lines_are_counted_through_quoted_newlines_and_blank_lines(folder: Folder) -> None:
    rows = [
        named("opamps", 1) | {"package": "SOIC\nnarrow\r\nbody"},
        named("opamps", 2) | {"package": "x"},
        named("opamps", 3) | {"package": "y\nz", "gbw": "bad"},
    ]
    text = table(rows).replace("ZQ1002", "\n\nZQ1002")
    folder.write("opamps.csv", text)
    problem = folder.problem()
    lines = text.replace("\r\n", "\n").split("\n")
    assert lines[problem.row - 1].startswith("ZQ1003")
    assert (problem.row, problem.column, problem.cell) == (8, "gbw", "bad")


def test_header_twice(folder: Folder) -> None:
    header, row = OPAMPS.splitlines()
    folder.write("opamps.csv", f"{header},price\n{row},1.85\n")
    problem = folder.problem()
    assert (problem.row, problem.column) == (1, "price")
    says(problem, "stands 2 times")


def test_same_column_twice_under_two_spellings(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"gbw (MHz)": "10"})
    problem = folder.problem()
    assert (problem.row, problem.column) == (1, "gbw (MHz)")
    says(problem, "second column for gbw")


def test_unknown_header_twice_is_refused_unless_ignored(folder: Folder) -> None:
    header, row = OPAMPS.splitlines()
    folder.write("opamps.csv", f"{header},Image,Image\n{row},a,b\n")
    says(folder.problem(), "stands 2 times")
    folder.write("source.toml", '[file."opamps.csv"]\nignore = ["Image"]\n')
    assert folder.read().opamps.size == 1


@pytest.mark.parametrize(
    ("header", "near"),
    [
        ("Price", "price"),
        ("GBW", "gbw"),
        ("gwb", "gbw"),
        ("slew rate", "slew_rate"),
        ("noise_cornr", "noise_corner"),
        ("Temp Min (°C)", "temp_min"),
        ("ouput_low", "output_low"),
    ],
)
def test_header_that_nearly_spells_a_column(folder: Folder, header: str, near: str) -> None:
    folder.rows("opamps", GOOD["opamps"] | {header: "1"})
    problem = folder.problem()
    assert (problem.row, problem.column) == (1, header)
    says(problem, f"nearly '{near}'", "ignore")
    folder.write("source.toml", f'[file."opamps.csv"]\nignore = ["{header}"]\n')
    assert folder.read().opamps.size == 1


@pytest.mark.parametrize("column", list(GOOD["opamps"]))
def test_required_column_must_exist(folder: Folder, column: str) -> None:
    folder.rows("opamps", {name: cell for name, cell in GOOD["opamps"].items() if name != column})
    problem = folder.problem()
    assert (problem.row, problem.column) == (1, column)
    says(problem, f"required column '{column}' is missing", "source.toml")


def test_cells_without_a_header(folder: Folder) -> None:
    header, row = OPAMPS.splitlines()
    folder.write("opamps.csv", f"{header},\n{row},\n{row.replace('ZQ', 'ZR')},left over\n")
    problem = folder.problem()
    assert (problem.row, problem.cell) == (3, "left over")
    says(problem, "column 11 has cells and no header")


def test_unit_in_the_header_that_does_not_fit(folder: Folder) -> None:
    row = dict(GOOD["opamps"])
    row["gbw (mV)"] = row.pop("gbw")
    folder.rows("opamps", row)
    problem = folder.problem()
    assert (problem.row, problem.column) == (1, "gbw (mV)")
    says(problem, "'mV' does not fit", "10 MHz")


def test_duplicates_are_an_error(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"], named("opamps", 1), GOOD["opamps"] | {"price": "1.60"})
    problem = folder.problem()
    assert (problem.row, problem.column, problem.cell) == (4, "part", "ZQ100")
    says(problem, "opamps.csv, line 2", 'duplicates = "cheapest"')


def test_duplicates_across_files(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"])
    folder.write("more.csv", table([named("opamps", 1), GOOD["opamps"]]))
    problem = folder.problem(files={"opamps": ["opamps.csv", "more.csv"]})
    assert (problem.file, problem.row) == ("more.csv", 3)
    says(problem, "opamps.csv, line 2")


def test_duplicate_families(folder: Folder) -> None:
    folder.rows("resistors", GOOD["resistors"], GOOD["resistors"] | {"to": "1 Mohm"})
    problem = folder.problem()
    assert (problem.row, problem.column) == (3, "family")
    says(problem, "names that differ")


def test_same_part_of_two_makers_is_no_duplicate(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"], GOOD["opamps"] | {"maker": "Maker Z"})
    assert folder.read().opamps.size == 2


@pytest.mark.parametrize("price", ["2.10 USD", "USD 2.10", "$2.10", "£2.10", "1:2.10 USD; 100:1.90"])
def test_price_in_another_currency_than_stated(folder: Folder, price: str) -> None:
    folder.write("source.toml", 'currency = "EUR"\n')
    folder.rows("opamps", named("opamps", 1) | {"price": "2.40 €"}, named("opamps", 2) | {"price": price})
    problem = folder.problem()
    assert (problem.file, problem.row, problem.column) == ("opamps.csv", 3, "price")
    says(problem, "two currencies in one run", "EUR")


def test_two_currencies_without_any_stated(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"] | {"price": "2.10 EUR"})
    folder.rows("photodiodes", GOOD["photodiodes"] | {"price": "2.10 CHF"})
    problem = folder.problem()
    assert (problem.file, problem.row, problem.column) == ("photodiodes.csv", 2, "price")
    says(problem, "opamps.csv, line 2 has EUR")


def test_two_folders_with_two_currencies(folder: Folder) -> None:
    (folder.path / "other").mkdir()
    folder.write("source.toml", 'currency = "EUR"\n')
    folder.write("other/source.toml", 'currency = "SEK"\n')
    folder.write("other/opamps.csv", OPAMPS)
    problem = folder.problem(files={"opamps": ["other/opamps.csv"]})
    assert {problem.file, problem.cell} in ({"source.toml", "EUR"}, {"other/source.toml", "SEK"})
    says(problem, "two currencies in one run")


def test_currency_of_the_request_disagrees(folder: Folder) -> None:
    folder.write("source.toml", 'currency = "EUR"\n')
    problem = folder.problem(currency="USD")
    assert (problem.file, problem.column, problem.cell) == ("source.toml", "currency", "EUR")
    says(problem, "the request has USD")


def test_thousand_prices_in_the_wrong_currency_are_one_problem(folder: Folder) -> None:
    folder.write("source.toml", 'currency = "EUR"\n')
    folder.rows("opamps", *(named("opamps", number) | {"price": f"{number + 1} $"} for number in range(1000)))
    assert folder.problem().row == 2


@pytest.mark.parametrize(
    ("key", "value", "words"),
    [
        (("opamps", "status"), 1.0, "cannot fill"),
        (("photodiodes", "responsivity"), 1.0, "cannot fill"),
        (("opamps", "gbv"), 1.0, "no such column"),
    ],
)
def test_assumption_that_cannot_be(folder: Folder, key: tuple[str, str], value: float, words: str) -> None:
    problem = folder.problem(assume={key: value})
    assert problem.column == f"assume.{key[0]}.{key[1]}"
    says(problem, words)
