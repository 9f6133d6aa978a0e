"""From settings to candidates: names, references, what was assumed, what does not exist."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from optimizer import search
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Ambient
from optimizer.search.assemble import plain_number
from optimizer.search.result import Candidate
from tests.search.made import assumed, capacitor, catalogs, diode, listed, opamp, request, resistor

AMBIENT = Ambient(-20.0, 60.0, stated=True)
BIASED = {"wirings": ("rising-biased",), "references": ("divider",)}
UNBIASED = {"wirings": ("rising-unbiased",), "references": ("divider",)}


def best(made: Catalogs, **asked: Any) -> Candidate:
    return search.shortlist(request(**asked), made).candidates[0]


def with_assumed(role: str, *columns: str, made: Catalogs | None = None) -> Catalogs:
    """Catalogs in which these columns of the first part of a role were filled in."""
    result = made or catalogs()
    for column in columns:
        filled: dict[str, Any] = {role: assumed(getattr(result, role), column, 0)}
        result = replace(result, **filled)
    return result


ALWAYS = [
    *(("opamps", name) for name in ("open_loop_gain", "second_pole", "current_noise", "output_low")),
    *(("opamps", name) for name in ("quiescent_current", "noise_corner", "channels", "price", "min_gain")),
    ("opamps", "input_high"),
    ("photodiodes", "price"),
    ("photodiodes", "rise_time"),
    ("resistors", "parasitic_capacitance"),
    ("resistors", "price"),
    ("capacitors", "price"),
]


@pytest.mark.parametrize(("role", "column"), ALWAYS)
def test_what_every_candidate_uses_is_listed(role: str, column: str) -> None:
    made = with_assumed(role, column)
    assert best(made, space={"no_capacitor": False}).assumed == (f"{role[:-1]}.{column}",)


NEVER = [
    ("opamps", "board_area"), ("opamps", "lead_weeks"), ("photodiodes", "board_area"),
    ("resistors", "tolerance"), ("resistors", "tempco"), ("capacitors", "tolerance"),
]  # fmt: skip


@pytest.mark.parametrize(("role", "column"), NEVER)
def test_what_no_figure_uses_is_not_listed(role: str, column: str) -> None:
    assert best(with_assumed(role, column), space={"no_capacitor": False}).assumed == ()


SOMETIMES: list[tuple[str, str, dict[str, Any], dict[str, Any]]] = [
    ("opamps", "bias_doubling", {"ambient": AMBIENT}, {}),
    ("opamps", "offset_drift", {"ambient": AMBIENT}, {}),
    ("opamps", "temp_max", {"ambient": AMBIENT}, {}),
    ("photodiodes", "dark_doubling", {"ambient": AMBIENT}, {}),
    ("photodiodes", "dark_current", {"space": BIASED}, {"space": UNBIASED}),
    ("photodiodes", "reverse_max", {"space": BIASED}, {"space": UNBIASED}),
    ("photodiodes", "shunt_resistance", {"space": UNBIASED}, {"space": BIASED}),
    ("photodiodes", "active_area", {"light": {"kind": "irradiance", "weakest": 0.01, "strongest": 0.25}}, {}),
    ("photodiodes", "active_area", {"light": {"area_from": 1e-6}}, {}),
    ("opamps", "output_current", {"supply": {"load": 10e3}}, {}),
    ("opamps", "slew_rate", {"targets": {"bandwidth": 1e3}}, {}),
]


@pytest.mark.parametrize(("role", "column", "used", "unused"), SOMETIMES)
def test_what_only_some_requests_use_is_listed_only_there(
    role: str, column: str, used: dict[str, Any], unused: dict[str, Any]
) -> None:
    made = with_assumed(role, column)
    assert best(made, **used).assumed == (f"{role[:-1]}.{column}",)
    assert best(made, **unused).assumed == ()


def test_assumed_values_are_sorted_and_only_the_candidates_own() -> None:
    made = catalogs([opamp(), opamp(part="YZA-2")])
    made = with_assumed("opamps", "second_pole", "open_loop_gain", "output_low", made=made)
    made = with_assumed("photodiodes", "rise_time", made=made)
    found = {c.opamp: c.assumed for c in search.shortlist(request(), made).candidates}
    assert found == {
        "YZA-1": ("opamp.open_loop_gain", "opamp.output_low", "opamp.second_pole", "photodiode.rise_time"),
        "YZA-2": ("photodiode.rise_time",),
    }


def test_without_a_capacitor_nothing_of_capacitors_is_assumed() -> None:
    bare = {"space": {"capacitance": (1e3, 2e3), "references": ("ground",)}, "supply": {"low": -5.0}}
    assert best(with_assumed("capacitors", "price"), **bare).assumed == ()


def test_the_divider_uses_what_was_assumed_of_its_own_family() -> None:
    """Rf is of one family; the divider's two are of another whose price was filled in.

    The contract lists 'the filled blanks that this candidate's figures and checks use', and its cost does.
    """
    families = [resistor(family="YZR-2", **listed(10e3, 22e3, 47e3)), resistor(**listed(220e3))]
    made = with_assumed("resistors", "price", made=catalogs(resistors=families))
    found = best(made, space=BIASED)
    assert found.resistor_family == "YZR-1"
    assert found.assumed == ("resistor.price",)


def test_the_bypass_uses_what_was_assumed_of_its_own_family() -> None:
    """The same for Cb, where no feedback capacitor is placed."""
    families = [capacitor(family="YZC-2", **listed(100e-9)), capacitor(**listed(2e-12), price=[(1.0, 9.0)])]
    made = with_assumed("capacitors", "price", made=catalogs(capacitors=families))
    found = best(made, space=BIASED)
    assert found.capacitor_family is None
    assert found.assumed == ("capacitor.price",)


def test_two_makers_of_one_family_are_told_apart() -> None:
    """A family is known by name and maker: the first row of that name must not answer for another.

    So the record also depends on the order of the catalog's rows.
    """
    families = [resistor(maker="Maker X", **listed(220e3)), resistor(maker="Maker Y", **listed(470e3))]
    made = with_assumed("resistors", "price", made=catalogs(resistors=families))
    ground = {"references": ("ground",)}
    found = {}
    for rf in (220e3, 470e3):
        space = {**ground, "resistance": (rf, rf)}
        found[rf] = best(made, space=space, supply={"low": -5.0}).assumed
    assert found == {220e3: ("resistor.price",), 470e3: ()}


def test_figures_that_do_not_exist_are_none_and_their_margin_is_minus_1() -> None:
    asked = request(light={"strongest": 1.0, "background": 0.5}, targets={"dynamic_range": 10.0})
    miss = search.shortlist(asked, catalogs()).near_misses[0]
    assert miss.figures["full_scale"] == 0.0
    assert miss.figures["dynamic_range"] is None
    margins = {t.name: (t.value, t.margin) for t in miss.targets}
    assert margins["dynamic_range"] == (None, -1.0)
    assert margins["full_scale"] == (0.0, -1.0)
    assert miss.margin == -1.0
    assert miss.limiting == "dynamic_range"
    assert miss.missed == ("dynamic_range", "full_scale")


def test_slew_exists_only_beside_a_bandwidth_target() -> None:
    assert best(catalogs()).figures["slew"] is None
    assert best(catalogs(), targets={"bandwidth": 1e3}).figures["slew"] is not None
    unknown = catalogs([opamp(slew_rate=None)])
    assert best(unknown, targets={"bandwidth": 1e3}).figures["slew"] is None


def test_an_unknown_rise_time_leaves_the_bandwidth_unknown() -> None:
    assert best(catalogs(photodiodes=[diode(rise_time=None)])).figures["bandwidth"] is None


def test_references_say_what_they_are() -> None:
    split = {"supply": {"low": -5.0}, "space": {"references": ("ground",)}}
    ground = best(catalogs(), **split).reference
    assert (ground.kind, ground.voltage, ground.top, ground.bottom) == ("ground", 0.0, None, None)
    assert not ground.buffered
    assert not ground.extra_package
    bare = best(catalogs(), space=BIASED).reference
    assert bare.kind == "divider"
    assert not bare.buffered
    assert bare.top is not None
    assert bare.bottom is not None
    assert bare.voltage == pytest.approx(5.0 * bare.bottom / (bare.top + bare.bottom), rel=1e-9)
    for channels, extra in [(1.0, True), (2.0, False)]:
        buffered = best(catalogs([opamp(channels=channels)]), space=UNBIASED).reference
        assert buffered.buffered
        assert buffered.extra_package == extra


@pytest.mark.parametrize("cutoff", [1e3, 12345.678, 1e7 / 3.0])
def test_low_passes_come_back_as_they_were_asked_for(cutoff: float) -> None:
    found = best(catalogs(), space={"low_pass": (cutoff,)}).low_pass
    assert found == pytest.approx(cutoff, rel=5e-9)


def test_only_outputs_that_rest_on_the_rail_are_marked_as_the_linear_models() -> None:
    low = catalogs([opamp(output_low=0.0)])
    space = {"references": ("ground",), "wirings": ("rising-unbiased",), "dark_on_rail": True}
    assert best(low, space=space).linear_model == ("dynamic_range", "output_noise_dark")
    assert best(low, space={**space, "references": ("divider",)}).linear_model == ()
    assert best(low, space=space, supply={"low": -5.0}).linear_model == ()
    assert best(low, space={**space, "dark_on_rail": False}, supply={"low": -5.0}).linear_model == ()


def test_every_number_of_a_candidate_has_9_digits() -> None:
    found = best(catalogs(), targets={"bandwidth": 1e3, "snr": 20.0})
    for name, value in found.figures.items():
        assert value is None or value == float(f"{value:.9g}"), name
    for target in found.targets:
        assert target.value == found.figures[target.name]
        assert target.margin == round(target.margin, 9)
    assert found.margin == min(t.margin for t in found.targets)
    assert next(t.name for t in found.targets if t.margin == found.margin) == found.limiting


def test_plain_numbers() -> None:
    assert plain_number(1.23456789012) == 1.23456789
    assert plain_number(float("nan")) is None
    assert plain_number(np.inf) is None
