"""The vocabulary against the names of the project's own contract, typed here a second time on purpose."""

from __future__ import annotations

import math

import pytest

from optimizer.quantities import read_quantity
from optimizer.quantities.kinds import KINDS
from optimizer.request.types import ROLES, Targets
from optimizer.vocabulary import COLUMNS, TARGETS, VOCABULARY, Column, figure_kind

FIGURES = """bandwidth snr dynamic_range phase_margin peaking offset full_scale slew supply_current cost
    error output_noise_dark output_noise_weak noise_equivalent_light transresistance
    input_capacitance reverse_bias"""
RECORD_ORDER = "bandwidth snr dynamic_range full_scale phase_margin peaking slew offset supply_current cost"
ALL_COLUMNS = {
    "opamps": """part maker family package pinout board_area channels status stock lead_weeks price supply_min
        supply_max quiescent_current gbw open_loop_gain second_pole min_gain slew_rate voltage_noise
        noise_corner current_noise bias_current bias_doubling offset_voltage offset_drift input_low input_high
        output_low output_high input_capacitance_common input_capacitance_differential
        output_current temp_min temp_max""",
    "photodiodes": """part maker package pinout board_area status stock lead_weeks price responsivity
        capacitance dark_current dark_doubling shunt_resistance reverse_max rise_time active_area
        temp_min temp_max""",
    "resistors": """family maker package board_area series from to values tolerance tempco
        parasitic_capacitance price""",
    "capacitors": "family maker package board_area series from to values tolerance dielectric price",
}
REQUIRED = {
    "opamps": """part maker price supply_min supply_max quiescent_current gbw voltage_noise bias_current
        offset_voltage""",
    "photodiodes": "part maker price responsivity capacitance",
    "resistors": "family series price",
    "capacitors": "family series price",
}
DEFAULTS = {
    ("opamps", "family"): "the part itself",
    ("opamps", "channels"): "1",
    ("opamps", "open_loop_gain"): "100 dB",
    ("opamps", "second_pole"): "none",
    ("opamps", "min_gain"): "1",
    ("opamps", "current_noise"): "sqrt(2 q Ib25)",
    ("photodiodes", "dark_doubling"): "10 K",
    ("resistors", "parasitic_capacitance"): "0",
    ("opamps", "status"): "active",
    ("photodiodes", "status"): "active",
}
NONE_ALLOWED = {
    "second_pole",
    "bias_doubling",
    "noise_corner",
    "shunt_resistance",
    "rise_time",
    "offset_drift",
} | {"dark_current"}

EVERY = [(role, column) for role in COLUMNS for column in COLUMNS[role].values()]


def kind_of_cell(column: Column) -> str:
    return column.kind.rsplit(":", maxsplit=1)[-1]


def test_every_figure_is_named() -> None:
    assert set(VOCABULARY) == set(FIGURES.split())
    assert all(name == figure.name for name, figure in VOCABULARY.items())


def test_targets_stand_in_the_order_of_the_record() -> None:
    assert " ".join(TARGETS) == RECORD_ORDER
    assert set(TARGETS) - {"full_scale"} == set(Targets.__slots__)


def test_better_is_the_side_on_which_a_target_must_be() -> None:
    at_most = {name for name in TARGETS if VOCABULARY[name].better == "lower"}
    assert at_most == {"peaking", "offset", "supply_current", "cost"}
    assert all(VOCABULARY[name].better == "higher" for name in set(TARGETS) - at_most)


@pytest.mark.parametrize("name", FIGURES.split())
def test_every_figure_has_a_kind_a_heading_and_one_sentence(name: str) -> None:
    figure = VOCABULARY[name]
    assert figure.kind in KINDS
    assert figure.heading
    assert figure.meaning.endswith(".")
    assert ". " not in figure.meaning


def test_figures_of_light_follow_the_light() -> None:
    assert {name for name in VOCABULARY if figure_kind(name, "irradiance") == "irradiance"} == {
        "full_scale",
        "noise_equivalent_light",
    }
    assert figure_kind("full_scale", "power") == "power"


@pytest.mark.parametrize("role", ROLES)
def test_columns_are_the_contract_s_in_its_order(role: str) -> None:
    assert list(COLUMNS[role]) == ALL_COLUMNS[role].split()
    assert {name for name, column in COLUMNS[role].items() if column.required} == set(REQUIRED[role].split())


def test_defaults_and_none_are_the_contract_s() -> None:
    assert {
        (role, column.name): column.default_text for role, column in EVERY if column.default_text
    } == DEFAULTS
    assert {column.name for _, column in EVERY if column.none_allowed} == NONE_ALLOWED


@pytest.mark.parametrize(("role", "column"), EVERY, ids=lambda value: getattr(value, "name", value))
def test_every_column_can_be_read_and_judged(role: str, column: Column) -> None:
    if column.kind in ("text", "status", "series"):
        assert column.usual is None
        return
    kind = KINDS[kind_of_cell(column)]
    assert column.usual is not None
    low, high = column.usual
    assert -math.inf < low < high < math.inf
    assert all(part in KINDS for part in column.kind.split(":")[1:])
    if column.default_text and column.default_text != "none" and "q" not in column.default_text:
        assert low <= read_quantity(column.default_text, kind.name) <= high


# Common practice, no source: what parts of the trade have, and the slips of a unit that must stand out.
BELIEVABLE = [
    ("opamps", "gbw", "10 MHz", "10 Hz"),
    ("opamps", "voltage_noise", "8 nV/rtHz", "8 V/rtHz"),
    ("opamps", "bias_current", "1 pA", "1 A"),
    ("opamps", "offset_voltage", "0.5 mV", "0.5 V"),
    ("opamps", "slew_rate", "5 V/us", "5 V/s"),
    ("opamps", "quiescent_current", "1 mA", "1 A"),
    ("opamps", "open_loop_gain", "120 dB", "120 V/V"),
    ("opamps", "input_capacitance_common", "4 pF", "4 nF"),
    ("photodiodes", "capacitance", "70 pF", "10 F"),
    ("photodiodes", "responsivity", "0.6 A/W", "6 A/W"),
    ("photodiodes", "dark_current", "2 nA", "2 mA"),
    ("photodiodes", "active_area", "7.5 mm2", "7.5 m2"),
    ("photodiodes", "rise_time", "10 ns", "10 s"),
    ("photodiodes", "shunt_resistance", "1 Gohm", "1 ohm"),
    ("resistors", "tolerance", "1 %", "60 %"),
    ("resistors", "tempco", "100 ppm/C", "100 1/K"),
    ("capacitors", "from", "1 pF", "1 F"),
]


@pytest.mark.parametrize(("role", "name", "usual", "slip"), BELIEVABLE)
def test_usual_ranges_admit_the_believable_and_show_the_slip(
    role: str, name: str, usual: str, slip: str
) -> None:
    column = COLUMNS[role][name]
    assert column.usual is not None
    low, high = column.usual
    assert low <= read_quantity(usual, kind_of_cell(column)) <= high
    assert not low <= read_quantity(slip, kind_of_cell(column)) <= high
