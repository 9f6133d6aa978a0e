"""What a part fails by itself: each check of the model, their order, and what counts as unknown.

One op-amp and one photodiode that pass everything, spoilt one or two values at a time; the key is the
one under which the pair is counted as dropped.
"""

from __future__ import annotations

from itertools import combinations
from math import inf
from typing import Any

import pytest

from optimizer import search
from optimizer.request.types import Ambient
from tests.search.made import Row, catalogs, diode, opamp, request

AMBIENT = Ambient(-20.0, 60.0, stated=True)
ORDER = (
    "status", "excluded", "stock", "temperature", "wavelength", "supply", "missing", "reverse_bias",
    "input_range", "window", "dark_output", "load", "gain", "min_gain", "unstable",
)  # fmt: skip
"""The order of the model's table of eligibility."""


def key(
    amp: Row | None = None, sensor: Row | None = None, *, space: Any = None, targets: Any = None, **asked: Any
) -> str:
    """Why the only pair is not on the list; '' where it is."""
    made = catalogs([opamp(**(amp or {}))], [diode(**(sensor or {}))])
    outcome = search.shortlist(request(space=space, targets=targets, **asked), made)
    assert not outcome.impossible
    assert sum(outcome.dropped.values()) + len(outcome.candidates) + len(outcome.near_misses) == 1
    return next(iter(outcome.dropped), "")


def test_the_good_pair_is_good() -> None:
    assert key() == ""
    assert key(ambient=AMBIENT) == ""
    assert key(targets={"bandwidth": 1e3, "slew": 1.0, "supply_current": 0.1}, supply={"load": 10e3}) == ""


UNBIASED = {"wirings": ("rising-unbiased", "falling-unbiased")}
BIASED = {"wirings": ("rising-biased", "falling-biased")}
DIVIDER = {"references": ("divider",)}

OPAMP_SPOILT: dict[str, tuple[Row, Row]] = {
    "status": ({"status": "obsolete"}, {}),
    "excluded": ({}, {"space": {"exclude": ("YZA-1",)}}),
    "stock": ({"stock": 9.0}, {"quantity": 10}),
    "temperature": ({"temp_max": 59.0}, {"ambient": AMBIENT}),
    "supply": ({"supply_max": 4.9}, {}),
    "missing:noise_corner": ({"noise_corner": None}, {}),
    "input_range": ({"input_low": 6.0}, {}),
    "window": ({"output_low": 4.98}, {}),
    "dark_output": ({"output_low": 2.48, "output_high": 2.48}, {"supply": {"guard": 0.03}}),
    "load": ({"output_current": 1e-3}, {"supply": {"load": 4e3}}),
    "gain": ({"open_loop_gain": 1.0}, {}),
    "min_gain": ({"min_gain": 1e6}, {"space": {"no_capacitor": False}}),
    "unstable": (
        {"second_pole": 1e3},
        {"space": {"capacitance": (1e-12, 1e-12), "references": ("ground",)}, "supply": {"low": -5.0}},
    ),
}
DIODE_SPOILT: dict[str, tuple[Row, Row]] = {
    "status": ({"status": "last-time-buy"}, {}),
    "excluded": ({}, {"space": {"exclude": ("Maker B/YZD-1",)}}),
    "stock": ({"stock": 9.0}, {"quantity": 10}),
    "temperature": ({"temp_min": -19.0}, {"ambient": AMBIENT}),
    "wavelength": ({"responsivity": [(400e-9, 0.2), (849e-9, 0.5)]}, {}),
    "missing:capacitance": ({"capacitance": []}, {}),
    "reverse_bias": ({"reverse_max": 0.5}, {"space": BIASED}),
}


@pytest.mark.parametrize("name", OPAMP_SPOILT)
def test_an_opamp_fails_each_check(name: str) -> None:
    spoilt, asked = OPAMP_SPOILT[name]
    assert key(spoilt, **asked) == name


@pytest.mark.parametrize("name", DIODE_SPOILT)
def test_a_photodiode_fails_each_check(name: str) -> None:
    spoilt, asked = DIODE_SPOILT[name]
    assert key(None, spoilt, **asked) == name


def merged(*asked: Row) -> Row:
    """Changes of a request joined, tables within too."""
    result: Row = {}
    for one in asked:
        for name, value in one.items():
            both = isinstance(value, dict) and name in result
            result[name] = {**result[name], **value} if both else value
    return result


OWN = ORDER[: ORDER.index("window") + 1]
PAIRS = list(combinations([n for n in OPAMP_SPOILT if n.partition(":")[0] in OWN], 2))


@pytest.mark.parametrize(("first", "second"), PAIRS)
def test_an_opamp_that_fails_two_counts_under_the_earlier(first: str, second: str) -> None:
    (one, asked), (other, too) = OPAMP_SPOILT[first], OPAMP_SPOILT[second]
    earlier = min(first, second, key=lambda name: ORDER.index(name.partition(":")[0]))
    assert key(one | other, **merged(asked, too)) == earlier


@pytest.mark.parametrize("first", [n for n in OPAMP_SPOILT if n.partition(":")[0] in OWN])
@pytest.mark.parametrize("second", DIODE_SPOILT)
def test_a_pair_of_which_both_fail_counts_under_the_earlier(first: str, second: str) -> None:
    (one, asked), (other, too) = OPAMP_SPOILT[first], DIODE_SPOILT[second]
    if first == second == "excluded":
        too = {"space": {"exclude": ("YZA-1", "YZD-1")}}
    elif first == "excluded" or second == "excluded":
        too = merged(too, asked)
    place = {name: ORDER.index(name.partition(":")[0]) for name in (first, second)}
    # at the same key the op-amp's column comes first: its file is first in the contract's table
    earlier = first if place[first] <= place[second] else second
    assert key(one, other, **merged(asked, too)) == earlier


ALWAYS = {
    "opamp": (
        "price", "gbw", "voltage_noise", "bias_current", "offset_voltage", "supply_min", "supply_max",
        "input_low", "input_high", "output_low", "output_high", "input_capacitance_common",
        "input_capacitance_differential", "noise_corner",
    ),
    "photodiode": ("price", "responsivity", "capacitance"),
}  # fmt: skip


def unknown(column: str) -> Row:
    return {column: [] if column in ("price", "responsivity", "capacitance") else None}


@pytest.mark.parametrize("column", ALWAYS["opamp"])
def test_an_opamp_of_unknown_value_is_missing_it(column: str) -> None:
    assert key(unknown(column)) == f"missing:{column}"


@pytest.mark.parametrize("column", ALWAYS["photodiode"])
def test_a_photodiode_of_unknown_value_is_missing_it(column: str) -> None:
    assert key(None, unknown(column)) == f"missing:{column}"


CONDITIONAL: dict[str, tuple[str, Row]] = {
    "bias_doubling": ("opamp", {"ambient": AMBIENT}),
    "offset_drift": ("opamp", {"ambient": AMBIENT}),
    "temp_min": ("opamp", {"ambient": AMBIENT}),
    "temp_max": ("photodiode", {"ambient": AMBIENT}),
    "shunt_resistance": ("photodiode", {"space": UNBIASED}),
    "dark_current": ("photodiode", {"space": BIASED}),
    "reverse_max": ("photodiode", {"space": BIASED}),
    "rise_time": ("photodiode", {"targets": {"bandwidth": 1e3}}),
    "slew_rate": ("opamp", {"targets": {"bandwidth": 1e3, "slew": 1.0}}),
    "output_current": ("opamp", {"supply": {"load": 10e3}}),
    "active_area": ("photodiode", {"light": {"kind": "irradiance", "weakest": 0.01, "strongest": 0.3}}),
    "quiescent_current": ("opamp", {"targets": {"supply_current": 0.1}}),
}


@pytest.mark.parametrize("column", CONDITIONAL)
def test_a_value_is_missing_only_where_the_request_needs_it(column: str) -> None:
    role, asked = CONDITIONAL[column]
    spoilt = ({column: None}, None) if role == "opamp" else (None, {column: None})
    assert key(*spoilt, **asked) == f"missing:{column}"
    assert key(*spoilt) == ""


def test_an_ambient_of_25_degrees_that_is_stated_still_asks_for_its_values() -> None:
    assert key({"bias_doubling": None}, ambient=Ambient(25.0, 25.0, stated=True)) == "missing:bias_doubling"


COLUMNS = ("price", "supply_min", "gbw", "voltage_noise", "noise_corner", "bias_current", "input_low")


@pytest.mark.parametrize(("earlier", "later"), list(combinations(COLUMNS, 2)))
def test_two_blanks_count_under_the_earlier_column(earlier: str, later: str) -> None:
    assert key(unknown(later) | unknown(earlier)) == f"missing:{earlier}"


def test_two_blanks_of_two_parts_count_under_the_opamps() -> None:
    assert key({"output_high": None}, {"price": []}) == "missing:output_high"


def test_biased_and_unbiased_wirings_may_lack_different_values() -> None:
    both = {"dark_current": None, "shunt_resistance": None}
    assert key(None, both) == "missing:dark_current"
    assert key(None, {"dark_current": None}) == ""
    assert key(None, {"shunt_resistance": None}) == ""


def test_the_wiring_that_gets_furthest_gives_the_reason() -> None:
    """Biased wirings get as far as reverse_bias, unbiased ones only as far as a missing shunt."""
    assert key(None, {"shunt_resistance": None, "reverse_max": 0.1}) == "reverse_bias"


def test_a_furthest_setting_may_lack_a_value_while_others_lack_stock() -> None:
    """Unbiased dividers need two packages, of which there is one; biased ones lack the dark current."""
    found = key({"stock": 10.0}, {"dark_current": None}, space=DIVIDER, quantity=10)
    assert found == "missing:dark_current"


def test_none_stated_is_a_value() -> None:
    plain = {"noise_corner": 0.0, "bias_doubling": inf, "offset_drift": 0.0, "second_pole": inf}
    sensor = {"dark_current": 0.0, "shunt_resistance": inf, "rise_time": 0.0}
    assert key(plain, sensor, ambient=AMBIENT, targets={"bandwidth": 1e3}) == ""


@pytest.mark.parametrize("role", ["opamp", "photodiode"])
def test_stock_is_checked_where_known(role: str) -> None:
    for stock, expected in [(200.0, ""), (199.0, "stock"), (0.0, "stock"), (None, "")]:
        spoilt = {"stock": stock}
        found = key(*((spoilt, None) if role == "opamp" else (None, spoilt)), quantity=200)
        # enough for one package a receiver is enough where some context needs only one
        assert found == expected


@pytest.mark.parametrize(("channels", "least"), [(1.0, 400.0), (2.0, 200.0)])
def test_a_buffer_without_a_spare_amplifier_needs_two_packages_in_stock(
    channels: float, least: float
) -> None:
    asked: Row = {"space": {**DIVIDER, "wirings": ("rising-unbiased",)}, "quantity": 200}
    assert key({"channels": channels, "stock": least}, **asked) == ""
    assert key({"channels": channels, "stock": least - 1}, **asked) == "stock"


@pytest.mark.parametrize(
    ("limits", "expected"),
    [({"temp_min": -20.0, "temp_max": 60.0}, ""), ({"temp_min": -19.9}, "temperature"),
     ({"temp_max": 59.9}, "temperature")],
)  # fmt: skip
def test_temperature_covers_both_ends_of_the_ambient(limits: Row, expected: str) -> None:
    assert key(limits, ambient=AMBIENT) == expected
    assert key(None, limits, ambient=AMBIENT) == expected


@pytest.mark.parametrize(
    ("limits", "tolerance", "expected"),
    [({"supply_min": 4.75, "supply_max": 5.25}, 0.05, ""), ({"supply_min": 4.76}, 0.05, "supply"),
     ({"supply_max": 5.24}, 0.05, "supply"), ({"supply_min": 5.0, "supply_max": 5.0}, 0.0, "")],
)  # fmt: skip
def test_supply_is_held_at_both_ends(limits: Row, tolerance: float, expected: str) -> None:
    assert key(limits, supply={"tolerance": tolerance}) == expected


def test_supply_counts_from_rail_to_rail() -> None:
    assert key({"supply_max": 9.9}, supply={"low": -5.0}) == "supply"
    assert key({"supply_max": 10.0}, supply={"low": -5.0}) == ""


@pytest.mark.parametrize(("limit", "expected"), [(5.25, ""), (5.24, "reverse_bias")])
def test_reverse_bias_is_held_at_the_high_end(limit: float, expected: str) -> None:
    asked = {"space": {"wirings": ("falling-biased",), "references": ("ground",)}}
    split = {"high": 5.0, "low": -5.0, "tolerance": 0.05}
    assert key(None, {"reverse_max": limit}, supply=split, **asked) == expected


@pytest.mark.parametrize(
    ("amp", "expected"),
    [({"input_low": 4.5, "input_high": 0.0}, ""), ({"input_low": 4.51}, "input_range"),
     ({"input_high": 4.5}, ""), ({"input_high": 4.51}, "input_range"), ({"input_high": -0.5}, "")],
)  # fmt: skip
def test_the_reference_is_inside_the_input_range_at_both_ends(amp: Row, expected: str) -> None:
    """Ground between rails of 5 V with 10 %: 4.5 V from the nearer of each at the low end."""
    asked = {"space": {"wirings": ("rising-unbiased",), "references": ("ground",)}}
    split = {"high": 5.0, "low": -5.0, "tolerance": 0.1}
    assert key(amp, supply=split, **asked) == expected


def test_an_input_that_stops_above_the_lower_rail_rules_ground_out() -> None:
    asked = {"space": {"wirings": ("falling-unbiased", "rising-unbiased"), "references": ("ground",)}}
    assert key({"input_low": 0.1}, supply={"guard": 0.0}, **asked) == "input_range"


@pytest.mark.parametrize(("low", "expected"), [(4.87, "dark_output"), (4.881, "window"), (4.9, "window")])
def test_a_window_needs_room_without_the_guard(low: float, expected: str) -> None:
    """Limits of 4.88 V (5 V less 2 % and 20 mV) and `output_low`."""
    assert key({"output_low": low}, supply={"tolerance": 0.02, "guard": 0.05}) == expected


def test_makers_packages_require_and_exclude() -> None:
    for space, expected in [
        ({"makers": ("Maker A", "Maker B")}, ""),
        ({"makers": ("Maker A",)}, "excluded"),
        ({"packages": ("SOIC-8", "TO-5")}, ""),
        ({"packages": ("TO-5",)}, "excluded"),
        ({"require": ("YZA-1",)}, ""),
        ({"require": ("Maker A/YZA-1", "YZD-1")}, ""),
        ({"require": ("YZR-1",)}, ""),
        ({"exclude": ("Maker Z/YZA-1",)}, ""),
        ({"exclude": ("YZA-1",), "require": ("YZA-1",)}, "excluded"),
        ({"status": ("obsolete",)}, "status"),
    ]:
        assert key(space=space) == expected, space


def test_require_binds_only_the_roles_it_names() -> None:
    made = catalogs([opamp(), opamp(maker="Maker Z"), opamp(part="YZA-2")], [diode(), diode(part="YZD-2")])
    outcome = search.shortlist(request(space={"require": ("YZA-1",)}), made)
    names = {(c.opamp_maker, c.opamp, c.photodiode) for c in outcome.candidates}
    assert names == {(m, "YZA-1", d) for m in ("Maker A", "Maker Z") for d in ("YZD-1", "YZD-2")}
    assert outcome.dropped == {"excluded": 2}
    outcome = search.shortlist(request(space={"require": ("Maker Z/YZA-1",)}), made)
    assert {c.opamp_maker for c in outcome.candidates} == {"Maker Z"}
    outcome = search.shortlist(request(space={"exclude": ("Maker Z/YZA-1", "YZD-2")}), made)
    assert {(c.opamp_maker, c.opamp) for c in outcome.candidates} == {
        ("Maker A", "YZA-1"),
        ("Maker A", "YZA-2"),
    }
    assert outcome.dropped == {"excluded": 4}


@pytest.mark.parametrize(
    ("area", "span", "expected"),
    [(4e-6, (1e-6, 10e-6), ""), (4e-6, (4e-6, 4e-6), ""), (4e-6, (5e-6, None), "excluded"),
     (4e-6, (None, 3e-6), "excluded"), (None, (1e-6, None), "missing:active_area"), (4e-6, (None, None), "")],
)  # fmt: skip
def test_active_area(area: float | None, span: tuple[float | None, float | None], expected: str) -> None:
    light = {"area_from": span[0], "area_to": span[1]}
    assert key(None, {"active_area": area}, light=light) == expected


def test_irradiance_falls_on_the_active_area() -> None:
    """The same light once as power and once over 4 mm2 gives the same receiver, in other units."""
    made = catalogs()
    power = search.shortlist(request(targets={"snr": 20.0}), made).candidates[0]
    spread = {"kind": "irradiance", "weakest": 30e-9 / 4e-6, "strongest": 1e-6 / 4e-6}
    light = search.shortlist(request(light=spread, targets={"snr": 20.0}), made).candidates[0]
    for name in ("full_scale", "noise_equivalent_light"):
        one, other = power.figures[name], light.figures[name]
        assert one is not None
        assert other is not None
        assert other == pytest.approx(one / 4e-6, rel=1e-8)
    for name in ("snr", "dynamic_range", "bandwidth", "offset"):
        assert light.figures[name] == pytest.approx(power.figures[name], rel=1e-8)


@pytest.mark.parametrize(("wavelength", "expected"), [(400e-9, ""), (1100e-9, ""), (399e-9, "wavelength")])
def test_the_ends_of_the_responsivity_are_inside(wavelength: float, expected: str) -> None:
    assert key(light={"wavelength": wavelength}) == expected


@pytest.mark.parametrize(
    ("channels", "price"),
    [(1.0, 2 * 1.5), (2.0, 2.0), (4.0, 2.0)],
)
def test_a_second_package_is_bought_at_the_price_of_twice_the_quantity(channels: float, price: float) -> None:
    """Breaks at 100 and 200: one package at 100 receivers costs 2.0, each of two 1.5."""
    asked = {"space": {**DIVIDER, "wirings": ("rising-unbiased",)}, "quantity": 100}
    breaks = [(1.0, 3.0), (100.0, 2.0), (200.0, 1.5)]
    made = catalogs([opamp(channels=channels, price=breaks)])
    best = search.shortlist(request(**asked), made).candidates[0]
    assert best.reference.buffered
    assert best.reference.extra_package == (channels == 1.0)
    # diode 3, Rf 0.02, divider 2 x 0.02 + 0.03, Cf 0.03 where placed
    placed = 0.03 * (best.feedback_capacitance > 0)
    assert best.figures["cost"] == pytest.approx(price + 3.0 + 0.02 + 0.07 + placed, rel=1e-9)
    packages = 2 if channels == 1.0 else 1
    top, bottom = best.reference.top, best.reference.bottom
    assert top is not None
    assert bottom is not None
    current = packages * channels * 1e-3 + 5.0 / (top + bottom)
    assert best.figures["supply_current"] == pytest.approx(current, rel=1e-8)


def test_the_shortlist_never_buys_up_to_the_next_break() -> None:
    made = catalogs([opamp(price=[(1.0, 3.0), (100.0, 0.01)])])
    bare = request(quantity=99, space={**DIVIDER, "wirings": ("rising-biased",)})
    cost = search.shortlist(bare, made).candidates[0].figures["cost"]
    assert cost is not None
    assert cost > 6.0
    # but two packages a receiver are 198, beyond the break, and so cheaper than one
    free = search.shortlist(request(quantity=99), made).candidates[0]
    assert free.reference.extra_package
    assert free.figures["cost"] == pytest.approx(3.0 + 0.02 + 0.02 + 0.07, abs=0.031)


def test_a_buffer_needs_an_opamp_that_can_follow() -> None:
    asked = {"space": {**DIVIDER, "wirings": ("rising-unbiased",)}}
    assert key({"min_gain": 1.0}, **asked) == ""
    assert key({"min_gain": 1.01}, **asked) == "min_gain"
    # |A| = 1 below GBW: 45 deg are left with a second pole at about GBW / sqrt 2
    assert key({"second_pole": 0.72 * 10e6}, **asked) == ""
    assert key({"second_pole": 0.70 * 10e6}, **asked) == "min_gain"
    bare = {"space": {**DIVIDER, "wirings": ("rising-biased",)}}
    assert key({"min_gain": 1.01}, **bare) == ""
