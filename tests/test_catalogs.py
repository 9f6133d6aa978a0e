"""The sample catalogs, and the synthetic ones of the benchmarks: invented, and correlated as real parts are.

Cells are read by the package's own quantity reader, rows by the standard library. That the signs
tested below hold for real parts is common practice, no source, save where one is named.
"""

from __future__ import annotations

import csv
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from scipy.constants import c, e, h
from scipy.stats import spearmanr

from optimizer.quantities import read_price, read_quantity
from optimizer.vocabulary import COLUMNS, ROLES
from tests.benchmarks.synthetic import write_catalogs

SHIPPED = Path(__file__).parents[1] / "catalogs"
UNKNOWN = frozenset({"", "-", "N/A", "n/a"})


@dataclass(frozen=True)
class Part:
    """One row of a catalog: the cells as written, and how to read them."""

    role: str
    cells: Mapping[str, str]

    def known(self, column: str) -> bool:
        return self.cells[column] not in UNKNOWN | {"none"}

    def number(self, column: str) -> float:
        return read_quantity(self.cells[column], COLUMNS[self.role][column].kind)

    def pairs(self, column: str) -> list[tuple[float, float]]:
        """The pairs of a cell; a lone value stands at 0."""
        _, x_kind, y_kind = COLUMNS[self.role][column].kind.split(":")
        texts = [pair.strip() for pair in self.cells[column].split(";")]
        split = [pair.split(":") if ":" in pair else ("0", pair) for pair in texts]
        return [(read_quantity(x, x_kind), read_quantity(y, y_kind)) for x, y in split]

    def at_zero_bias(self) -> float:
        return self.pairs("capacitance")[0][1]


Catalogs = Mapping[str, list[Part]]
Quantity = Callable[[Part], float]


def _read(folder: Path) -> Catalogs:
    catalogs = {}
    for role in ROLES:
        with (folder / f"{role}.csv").open(encoding="utf-8", newline="") as file:
            catalogs[role] = [Part(role, row) for row in csv.DictReader(file)]
    return catalogs


@pytest.fixture(scope="module")
def shipped() -> Catalogs:
    return _read(SHIPPED)


@pytest.fixture(scope="module")
def synthetic(tmp_path_factory) -> Catalogs:
    folder = tmp_path_factory.mktemp("synthetic")
    write_catalogs(folder, opamps=600, photodiodes=300, seed=7)
    return _read(folder)


@pytest.fixture(params=["shipped", "synthetic"])
def catalogs(request) -> Catalogs:
    return request.getfixturevalue(request.param)


def _technologies(opamps: list[Part]) -> dict[str, list[Part]]:
    """By what a datasheet shows: a chopper has no corner, a bipolar input a flat bias current."""
    chopped = {part.cells["family"] for part in opamps if part.cells["noise_corner"] == "none"}
    flat = {part.cells["family"] for part in opamps if part.cells["bias_doubling"] == "none"}
    sorted_out: dict[str, list[Part]] = {"chopper": [], "bipolar": [], "fet": []}
    for part in opamps:
        if part.cells["family"] in chopped:
            sorted_out["chopper"].append(part)
        elif part.cells["family"] in flat:
            sorted_out["bipolar"].append(part)
        elif part.known("bias_doubling"):
            sorted_out["fet"].append(part)
    return sorted_out


def _rank_correlation(parts: list[Part], first: Quantity, second: Quantity) -> float:
    assert len(parts) >= 10
    return float(spearmanr([first(part) for part in parts], [second(part) for part in parts]).statistic)


def _column(name: str) -> Quantity:
    return lambda part: part.number(name)


@pytest.mark.parametrize(
    ("role", "least"), [("opamps", 130), ("photodiodes", 90), ("resistors", 6), ("capacitors", 4)]
)
def test_there_are_enough_parts(shipped, role, least):
    assert len(shipped[role]) >= least


@pytest.mark.parametrize("role", ROLES)
def test_columns_are_the_contract_s_in_its_order(shipped, role):
    assert list(shipped[role][0].cells) == list(COLUMNS[role])


@pytest.mark.parametrize("role", ROLES)
def test_no_part_stands_twice(catalogs, role):
    names = [part.cells.get("part", part.cells.get("family", "")) for part in catalogs[role]]
    assert len(set(names)) == len(names)


@pytest.mark.parametrize("role", ROLES)
def test_every_number_reads_and_is_usual(shipped, role):
    plain = {
        name: column.usual
        for name, column in COLUMNS[role].items()
        if column.usual and ":" not in column.kind and column.kind != "price"
    }
    strange = [
        (name, part.cells[name])
        for part in shipped[role]
        for name, (low, high) in plain.items()
        if part.known(name) and not low <= part.number(name) <= high
    ]
    assert len(plain) >= 2
    assert strange == []


@pytest.mark.parametrize("role", ROLES)
def test_unit_prices_fall_with_quantity(catalogs, role):
    priced = [part.cells["price"].split(";") for part in catalogs[role] if part.known("price")]
    for steps in priced:
        counts = [int(step.split(":")[0]) for step in steps]
        prices = [read_price(step.split(":")[1])[0] for step in steps]
        assert counts[0] == 1
        assert all(before < after for before, after in pairwise(counts)), steps
        assert all(before > after for before, after in pairwise(prices)), steps


def test_opamps_reach_from_micropower_to_decompensated_gigahertz(catalogs):
    speeds = [(part.number("gbw"), part.number("min_gain")) for part in catalogs["opamps"]]
    assert min(gbw for gbw, _ in speeds) < 200e3
    assert max(gbw for gbw, min_gain in speeds if min_gain > 1) > 1e9
    assert {part.cells["channels"] for part in catalogs["opamps"]} == {"1", "2", "4"}
    assert all(len(parts) >= 10 for parts in _technologies(catalogs["opamps"]).values())


@pytest.mark.parametrize("technology", ["fet", "bipolar", "chopper"])
def test_current_buys_lower_voltage_noise_and_bandwidth(catalogs, technology):
    parts = _technologies(catalogs["opamps"])[technology]
    current = _column("quiescent_current")
    assert _rank_correlation(parts, current, _column("voltage_noise")) < -0.7
    assert _rank_correlation(parts, current, lambda part: part.number("gbw") / part.number("min_gain")) > 0.5


def test_bias_current_and_corner_follow_the_technology(catalogs):
    technologies = _technologies(catalogs["opamps"])
    middle = {
        name: np.median([part.number("bias_current") for part in parts])
        for name, parts in technologies.items()
    }
    assert middle["fet"] < 50e-12 < middle["chopper"] < 500e-12 < middle["bipolar"]
    corner = {
        name: np.median([part.number("noise_corner") for part in parts if part.known("noise_corner")])
        for name, parts in technologies.items()
        if name != "chopper"
    }
    assert corner["bipolar"] < corner["fet"]


def test_stated_current_noise_is_not_below_the_shot_noise_of_the_bias_current(catalogs):
    stated = [part for part in catalogs["opamps"] if part.known("current_noise")]
    ratios = [part.number("current_noise") / (2 * e * part.number("bias_current")) ** 0.5 for part in stated]
    assert len(ratios) >= 30
    assert min(ratios) > 0.93  # two digits in a datasheet


def test_a_family_shares_one_circuit_and_a_pinout_belongs_to_its_channels(catalogs):
    families: dict[str, list[Part]] = {}
    for part in catalogs["opamps"]:
        families.setdefault(part.cells["family"], []).append(part)
        word = {"1": "single", "2": "dual", "4": "quad"}[part.cells["channels"]]
        assert part.cells["pinout"].startswith(word), part.cells
    for members in families.values():
        for column in ("maker", "gbw", "quiescent_current", "voltage_noise", "bias_current", "supply_max"):
            assert len({part.cells[column] for part in members}) == 1, members
    assert sum(len(members) > 1 for members in families.values()) >= 30


def test_a_follower_s_second_pole_leaves_it_stable(shipped):
    """Crossing of a two-pole loop at the least gain: common practice keeps 45 deg there."""
    for part in shipped["opamps"]:
        if part.known("second_pole"):
            ratio = part.number("gbw") / part.number("min_gain") / part.number("second_pole")
            crossing = ((1 + 4 * ratio**2) ** 0.5 - 1) ** 0.5 / 2**0.5  # in units of the second pole
            assert 90 - np.degrees(np.arctan(crossing)) > 45, part.cells


def test_quantum_efficiency_stays_below_one(catalogs):
    """R = eta q lambda/(h c) (published check PHY-01); eta above 1 would need gain inside the diode."""
    for part in catalogs["photodiodes"]:
        points = part.pairs("responsivity")
        assert all(before[0] < after[0] for before, after in pairwise(points)), part.cells
        efficiency = [response * h * c / (e * wavelength) for wavelength, response in points]
        assert 0 < min(efficiency) < max(efficiency) < 0.95, part.cells


def test_capacitance_falls_with_bias_and_not_faster_than_an_abrupt_junction(catalogs):
    curves = [part.pairs("capacitance") for part in catalogs["photodiodes"]]
    assert sum(len(curve) > 1 for curve in curves) >= 50
    for curve in curves:
        for (low, before), (high, after) in pairwise(curve):
            abrupt = ((1 + high / 0.6) / (1 + low / 0.6)) ** -0.5
            assert 0.9 * abrupt < after / before <= 1, curve  # 0.9: two digits in a datasheet


@pytest.mark.parametrize(
    ("figure", "sign"),
    [(_column("dark_current"), 1), (_column("shunt_resistance"), -1), (Part.at_zero_bias, 1)],
    ids=["dark current", "shunt", "capacitance"],
)
def test_area_brings_dark_current_and_capacitance_and_takes_shunt(catalogs, figure, sign):
    columns = ("active_area", "dark_current", "shunt_resistance")
    diodes = [part for part in catalogs["photodiodes"] if all(part.known(column) for column in columns)]
    silicon = [part for part in diodes if 350e-9 < part.pairs("responsivity")[0][0] < 800e-9]
    assert sign * _rank_correlation(silicon, _column("active_area"), figure) > 0.7


def test_photodiodes_cover_the_areas_and_wavelengths_asked_for(catalogs):
    areas = [part.number("active_area") for part in catalogs["photodiodes"] if part.known("active_area")]
    assert min(areas) < 0.1e-6
    assert max(areas) > 50e-6
    ranges = [np.array(part.pairs("responsivity"))[[0, -1], 0] for part in catalogs["photodiodes"]]
    for wavelength, least in ((254e-9, 10), (650e-9, 30), (905e-9, 30), (1550e-9, 10)):
        assert sum(low <= wavelength <= high for low, high in ranges) >= least


@pytest.mark.parametrize("role", ["opamps", "photodiodes"])
def test_catalogs_have_the_gaps_and_the_ends_of_life_of_real_ones(catalogs, role):
    statuses = {part.cells["status"] for part in catalogs[role]}
    assert {"active", "not-for-new-designs", "obsolete"} <= statuses
    blanks = {name for part in catalogs[role] for name, cell in part.cells.items() if cell in UNKNOWN}
    assert {"stock", "lead_weeks", "price"} <= blanks
    assert (
        {"second_pole", "output_current"} if role == "opamps" else {"rise_time", "dark_current"}
    ) <= blanks


def test_passives_cover_what_receivers_need(shipped):
    dielectrics = {part.cells["dielectric"] for part in shipped["capacitors"]}
    assert "C0G" in dielectrics
    assert any("film" in dielectric for dielectric in dielectrics)
    tops = [part.number("to") for part in shipped["resistors"] if part.known("to")]
    assert min(tops) < 1e6
    assert max(tops) >= 1e9
    bypass = [part for part in shipped["capacitors"] if part.known("from") and part.known("to")]
    assert any(part.number("from") <= 100e-9 <= part.number("to") for part in bypass)


def test_synthetic_catalogs_follow_from_their_seed(tmp_path):
    for name, seed in (("one", 3), ("again", 3), ("other", 4)):
        write_catalogs(tmp_path / name, opamps=50, photodiodes=20, seed=seed)
    written = {
        name: (tmp_path / name / "opamps.csv").read_bytes()
        + (tmp_path / name / "photodiodes.csv").read_bytes()
        for name in ("one", "again", "other")
    }
    assert written["one"] == written["again"]
    assert written["one"] != written["other"]


def test_synthetic_catalogs_have_the_counts_and_makers_asked_for(synthetic):
    assert len(synthetic["opamps"]) == 600
    assert len(synthetic["photodiodes"]) == 300
    assert 10 <= len({part.cells["maker"] for part in synthetic["opamps"]}) <= 50
