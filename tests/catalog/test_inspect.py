"""What `luxsift inspect` is told about one file."""

from __future__ import annotations

from pathlib import Path

import pytest

from optimizer.catalog import Inspection, inspect_file
from optimizer.errors import InputError
from tests.catalog.made import GOOD, ROLES, Folder, named, table

NEEDED = {
    "noise_corner": "10 Hz",
    "input_low": "0 V",
    "input_high": "1 V",
    "output_low": "20 mV",
    "output_high": "20 mV",
    "input_capacitance_common": "3 pF",
    "input_capacitance_differential": "1 pF",
}


def _inspect(folder: Folder, name: str = "opamps.csv") -> Inspection:
    return inspect_file(folder.path / name)


@pytest.mark.parametrize("role", ROLES)
@pytest.mark.parametrize("name", ["{}.csv", "my-{}-2.csv"])
def test_role_is_guessed(folder: Folder, role: str, name: str) -> None:
    file = name.format(role)
    folder.write(file, table([GOOD[role]]))
    seen = _inspect(folder, file)
    assert (seen.role, seen.rows, seen.parts, seen.problems) == (role, 1, 1, ())


@pytest.mark.parametrize("role", ROLES)
def test_role_is_guessed_from_what_the_file_holds(folder: Folder, role: str) -> None:
    folder.write("export.csv", table([GOOD[role]]))
    assert _inspect(folder, "export.csv").role == role


def test_name_of_the_file_decides_where_few_headers_are_known(folder: Folder) -> None:
    folder.write("my-op-amps.csv", "part,maker,price\nZQ1,Maker A,1\n")
    assert _inspect(folder, "my-op-amps.csv").role == "opamps"


def test_role_is_guessed_through_the_map(folder: Folder) -> None:
    folder.write("export.csv", "Typ;Hersteller\nPD1;Maker B\n")
    lines = ['part = { header = "Typ" }', 'maker = { header = "Hersteller" }', "price = { value = 1 }"]
    lines += ['responsivity = { value = "850 nm:0.6" }', 'capacitance = { value = "10 pF" }']
    folder.write("source.toml", '[file."export.csv".columns]\n' + "\n".join(lines))
    seen = _inspect(folder, "export.csv")
    assert (seen.role, seen.problems) == ("photodiodes", ())


def test_counts_of_known_unknown_and_admitted(folder: Folder) -> None:
    whole = GOOD["opamps"] | NEEDED
    rows = [
        whole | {"part": "complete"},
        whole | {"part": "one blank", "output_low": ""},
        whole | {"part": "another", "output_low": "-", "slew_rate": "5 V/us"},
        whole | {"part": "two blanks", "output_low": "", "gbw": ""},
    ]
    folder.rows("opamps", *rows)
    columns = {count.column: count for count in _inspect(folder).columns}
    assert (columns["output_low"].known, columns["output_low"].unknown, columns["output_low"].admits) == (
        1,
        3,
        2,
    )
    assert (columns["gbw"].known, columns["gbw"].unknown, columns["gbw"].admits) == (3, 1, 0)
    assert (columns["slew_rate"].unknown, columns["slew_rate"].admits) == (3, 1)
    assert (columns["open_loop_gain"].unknown, columns["open_loop_gain"].admits) == (4, None)
    assert columns["open_loop_gain"].default == "100 dB"
    assert columns["package"].admits is None


def test_admitted_is_what_an_assume_line_does(folder: Folder) -> None:
    """The count is held to reading with the assumption: the rows that then know all they need."""
    whole = GOOD["opamps"] | NEEDED
    rows = [
        whole | {"part": f"P{place}"} | dict.fromkeys(blanks, "")
        for place, blanks in enumerate(
            [(), ("input_low",), ("input_low", "price"), ("price",), ("input_low",)]
        )
    ]
    folder.rows("opamps", *rows)
    columns = {count.column: count for count in _inspect(folder).columns}

    def complete(**assume: float) -> int:
        parts = folder.read(assume={("opamps", name): value for name, value in assume.items()}).opamps
        known = [parts.number[name] == parts.number[name] for name in NEEDED]
        return sum(
            all(flags) and bool(price) for *flags, price in zip(*known, parts.points["price"], strict=True)
        )

    assert columns["input_low"].admits == complete(input_low=0.0) - complete() == 2
    assert columns["price"].admits == complete(price=1.0) - complete() == 1


@pytest.mark.parametrize(
    ("change", "shown", "words"),
    [
        (("opamps", "gbw", "10"), "10 Hz", "below the usual 1 kHz to 20 GHz; a unit slip?"),
        (("photodiodes", "capacitance", "10"), "10 F", "above the usual"),
        (("photodiodes", "responsivity", "850 nm:600"), "600 A/W", "a unit slip?"),
        (("opamps", "price", "1:1.2; 100:1.4"), "1:1.2; 100:1.4", "rises with the quantity"),
        (("resistors", "parasitic_capacitance", "0.2 nF"), "200 pF", "above the usual 0 F to 5 pF"),
    ],
)
def test_suspicions_refuse_nothing(
    folder: Folder, change: tuple[str, str, str], shown: str, words: str
) -> None:
    role, column, cell = change
    folder.rows(role, named(role, 1), named(role, 2) | {column: cell})
    seen = _inspect(folder, f"{role}.csv")
    assert seen.problems == ()
    assert seen.parts == 2
    (suspicion,) = seen.suspicions
    assert (suspicion.row, suspicion.column, suspicion.value) == (3, column, shown)
    assert words in suspicion.reason
    assert getattr(folder.read(), role).size == 2


def test_stated_none_is_not_suspicious(folder: Folder) -> None:
    none = dict.fromkeys(["second_pole", "noise_corner", "bias_doubling", "offset_drift"], "none")
    folder.rows("opamps", GOOD["opamps"] | none)
    assert _inspect(folder).suspicions == ()


def test_duplicates_are_listed_and_make_the_file_unusable(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"], named("opamps", 1), GOOD["opamps"])
    seen = _inspect(folder)
    assert [(same.name, same.maker, same.rows) for same in seen.duplicates] == [("ZQ100", "Maker A", (2, 4))]
    assert [problem.row for problem in seen.problems] == [4]


def test_duplicates_that_may_be_are_left_out(folder: Folder) -> None:
    folder.rows("opamps", GOOD["opamps"], named("opamps", 1), GOOD["opamps"])
    folder.write("source.toml", '[file."opamps.csv"]\nduplicates = "cheapest"\nbad_rows = "leave out"\n')
    seen = _inspect(folder)
    assert (seen.rows, seen.parts, seen.problems) == (3, 2, ())
    assert len(seen.left_out) == 1


def test_bad_rows_and_unused_headers_are_listed(folder: Folder) -> None:
    folder.rows("opamps", named("opamps", 1) | {"Datasheet": "x"}, named("opamps", 2) | {"gbw": "quick"})
    seen = _inspect(folder)
    assert seen.unused == ("Datasheet",)
    assert [(problem.row, problem.column) for problem in seen.problems] == [(3, "gbw")]
    folder.write("source.toml", '[file."opamps.csv"]\nbad_rows = "leave out"\n')
    seen = _inspect(folder)
    assert (seen.problems, seen.rows, seen.parts, [left.row for left in seen.left_out]) == ((), 2, 1, [3])


def test_currencies_that_clash_are_a_problem(folder: Folder) -> None:
    folder.rows("opamps", named("opamps", 1) | {"price": "1 EUR"}, named("opamps", 2) | {"price": "1 USD"})
    assert [problem.column for problem in _inspect(folder).problems] == ["price"]


@pytest.mark.parametrize("content", [b"", b"\xff\xfea\x00", b"\xff", b"one,two\n1,2\n"])
def test_what_is_no_catalog_raises(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "things.csv").write_bytes(content)
    with pytest.raises(InputError):
        inspect_file(tmp_path / "things.csv")


def test_missing_file_raises(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="no such file"):
        inspect_file(tmp_path / "opamps.csv")
