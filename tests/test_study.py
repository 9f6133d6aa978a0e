"""A request and its catalogs together: names checked across both, all problems at once, inputs listed."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from optimizer.errors import InputError
from optimizer.request import read_request
from optimizer.study import load
from tests.request.made import MINIMAL

CATALOGS = {
    "opamps": """\
part,maker,package,price,supply_min,supply_max,quiescent_current,gbw,voltage_noise,bias_current,offset_voltage,output_low
MA 100,Maker A,flat-8,1.20,2.7 V,5.5 V,1 mA,10 MHz,8 nV/rtHz,1 pA,1 mV,
MA 200,Maker B,flat-8,1.50,2.7 V,5.5 V,2 mA,20 MHz,7 nV/rtHz,2 pA,1 mV,20 mV
""",
    "photodiodes": """\
part,maker,package,price,responsivity,capacitance
MD 1,Maker C,can-2,2.00,800 nm:0.5 A/W; 900 nm:0.6 A/W,50 pF
""",
    "resistors": "family,maker,series,from,to,price\nthin film,Maker D,E24,10 ohm,1 Mohm,0.01\n",
    "capacitors": "family,maker,series,from,to,price\nclass 1,Maker D,E12,1 pF,1 nF,0.02\n",
}

REQUEST = f"""\
{MINIMAL}[catalogs]
opamps = ["parts/opamps.csv"]
photodiodes = ["parts/photodiodes.csv"]
resistors = ["parts/resistors.csv"]
capacitors = ["parts/capacitors.csv"]
"""

Writes = Callable[[str], Path]


@pytest.fixture
def write(tmp_path: Path) -> Writes:
    """Return a function that writes a request beside the catalogs, more of it behind the usual keys."""
    folder = tmp_path / "parts"
    folder.mkdir()
    for role, text in CATALOGS.items():
        (folder / f"{role}.csv").write_text(text)

    def run(more: str) -> Path:
        path = tmp_path / "bench.toml"
        path.write_text(REQUEST + more)
        return path

    return run


def failure(path: Path) -> InputError:
    with pytest.raises(InputError) as caught:
        load(path)
    return caught.value


def test_inputs_are_the_request_and_then_the_catalogs(write: Writes) -> None:
    path = write("")
    study = load(path)
    names = [(source.file, source.rows) for source in study.inputs]
    assert names[0] == ("bench.toml", 0)
    assert set(names[1:]) == {
        ("parts/opamps.csv", 2),
        ("parts/photodiodes.csv", 1),
        ("parts/resistors.csv", 1),
        ("parts/capacitors.csv", 1),
    }
    assert study.request_source.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()
    assert study.request == read_request(path)


def test_a_request_read_before_gives_the_same_study(write: Writes) -> None:
    path = write("[ranking]\nshow = 4\n")
    assert load(read_request(path)).inputs == load(str(path)).inputs


def test_a_request_changed_in_memory_does_not_carry_the_hash_of_its_file(write: Writes) -> None:
    path = write("")
    request = read_request(path)
    changed = load(replace(request, quantity=7))
    again = load(replace(request, quantity=7))
    assert changed.request.quantity == 7
    assert changed.request_source.sha256 == again.request_source.sha256
    assert changed.request_source.sha256 != load(path).request_source.sha256


def test_assumed_values_fill_blanks_of_their_column_only(write: Writes) -> None:
    parts = load(write('[assume.opamps]\noutput_low = "50 mV"\n')).catalogs.opamps
    assert parts.number["output_low"].tolist() == [0.05, 0.02]
    assert parts.assumed["output_low"].tolist() == [True, False]
    assert math.isnan(parts.number["output_high"][0])


@pytest.mark.parametrize(
    "names",
    [
        'require = ["MA 100", "MD 1"]',
        'require = ["Maker A/MA 100"]',
        'exclude = ["MA 200", "thin film", "Maker D/class 1"]',
        'makers = ["Maker A", "Maker C"]',
        'packages = ["flat-8", "can-2"]',
    ],
)
def test_names_that_a_catalog_holds_are_taken(write: Writes, names: str) -> None:
    assert load(write(f"[space]\n{names}\n")).request.space != load(write("")).request.space


@pytest.mark.parametrize(
    ("names", "column", "message"),
    [
        ('require = ["MA 1OO"]', "space.require", "no such part (did you mean 'MA 100'?)"),
        ('exclude = ["Maker A/MA 10"]', "space.exclude", "no such part (did you mean 'Maker A/MA 100'?)"),
        ('exclude = ["Maker B/MA 100"]', "space.exclude", "no such part"),
        ('makers = ["maker a"]', "space.makers", "no such maker (did you mean 'Maker A'?)"),
        ('makers = ["Maker D"]', "space.makers", "no such maker"),
        ('packages = ["flat8"]', "space.packages", "no such package (did you mean 'flat-8'?)"),
    ],
)
def test_a_name_that_no_catalog_holds_is_refused(
    write: Writes, names: str, column: str, message: str
) -> None:
    (problem,) = failure(write(f"[space]\n{names}\n")).problems
    assert (problem.column, problem.row) == (column, 13)
    assert message in str(problem)


def test_problems_of_request_and_catalogs_and_names_are_found_at_once(write: Writes) -> None:
    path = write('[space]\nrequire = ["MA 1OO",\n"MA 200"]\n[supplies]\nguard = 1\n')
    assert [(problem.column, problem.row) for problem in failure(path).problems] == [
        ("supplies", 15),
        ("space.require", 13),
    ]
    (path.parent / "parts" / "opamps.csv").write_text(CATALOGS["opamps"].replace("10 MHz", "10 mV"))
    assert [(problem.column, problem.row) for problem in failure(path).problems] == [
        ("supplies", 15),
        ("gbw", 2),
    ]


def test_catalogs_are_not_looked_for_where_the_request_does_not_say_which(write: Writes) -> None:
    path = write("")
    path.write_text(path.read_text().replace("[catalogs]", "[catalog]"))
    assert [problem.column for problem in failure(path).problems] == ["catalog"]


def test_a_catalog_in_another_currency_is_refused(write: Writes) -> None:
    path = write("")
    path.write_text('currency = "EUR"\n' + path.read_text())
    load(path)
    (path.parent / "parts" / "opamps.csv").write_text(CATALOGS["opamps"].replace("1.20", "1.20 GBP"))
    problem = failure(path).problems[0]
    assert (problem.file, problem.row, problem.column) == ("parts/opamps.csv", 2, "price")
    assert "two currencies" in problem.rule
