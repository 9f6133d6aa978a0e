"""The order of the shortlist by the contract's text in plain Python: rankings, comfort, ties, misses."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from optimizer import search
from optimizer.request.types import RANKINGS
from optimizer.search.result import Candidate
from tests.search.made import awkward, capacitor, catalogs, diode, listed, opamp, request, resistor
from tests.search.whole import everything, named


@pytest.mark.parametrize("by", RANKINGS)
@pytest.mark.parametrize("seed", range(100, 110))
def test_rows_and_near_misses_are_those_of_every_setting(seed: int, by: str) -> None:
    asked, made = awkward(seed, by)
    outcome, whole = search.shortlist(asked, made), everything(asked, made)
    assert [named(c) for c in outcome.candidates] == whole.candidates
    assert [named(c) for c in outcome.near_misses] == whole.near_misses


def rows(made: Any, **asked: Any) -> tuple[Candidate, ...]:
    return search.shortlist(request(**asked), made).candidates


def test_identical_opamps_go_by_name_and_then_by_maker() -> None:
    names = [("YZA-2", "Maker A"), ("YZA-1", "Maker Z"), ("YZA-1", "Maker A"), ("YZA-10", "Maker A")]
    made = catalogs([opamp(part=part, maker=maker) for part, maker in names])
    for by in RANKINGS:
        found = [(c.opamp, c.opamp_maker) for c in rows(made, ranking={"by": by})]
        assert found == sorted(names), by
        first = [(c.opamp, c.opamp_maker) for c in rows(made, ranking={"by": by, "show": 2})]
        assert first == sorted(names)[:2]


def test_photodiodes_go_before_opamps_by_name() -> None:
    made = catalogs([opamp(part="YZA-2"), opamp()], [diode(part="YZD-2"), diode()])
    found = [(c.photodiode, c.opamp) for c in rows(made)]
    assert found == [("YZD-1", "YZA-1"), ("YZD-1", "YZA-2"), ("YZD-2", "YZA-1"), ("YZD-2", "YZA-2")]


def test_equal_costs_of_pairs_go_by_margin_up_to_comfort_and_then_by_name() -> None:
    """YZA-9 has half the noise, which counts below comfort and not above."""
    made = catalogs([opamp(voltage_noise=32e-9), opamp(part="YZA-9", voltage_noise=16e-9)])
    asked = {"targets": {"snr": 1.0}, "space": {"resistance": (100e3, 100e3)}}
    found = rows(made, ranking={"comfort": 1.0}, **asked)
    assert [c.opamp for c in found] == ["YZA-9", "YZA-1"]
    assert found[0].margin > found[1].margin
    easy = rows(made, ranking={"comfort": 0.01}, **asked)
    assert [c.opamp for c in easy] == ["YZA-1", "YZA-9"]
    assert easy[0].margin < easy[1].margin


def test_comfortable_margins_rank_alike() -> None:
    """By margin, a part beyond comfort in everything does not outrank a cheaper one that just reaches it."""
    made = catalogs([opamp(price=[(1.0, 4.0)], voltage_noise=2e-9), opamp(part="YZA-2")])
    asked = {"targets": {"snr": 20.0, "phase_margin": 30.0}}
    found = rows(made, ranking={"by": "margin"}, **asked)
    assert [c.opamp for c in found] == ["YZA-2", "YZA-1"]
    assert min(c.margin for c in found) >= 0.5


def test_within_a_pair_cost_comes_before_margin_and_margin_before_ties() -> None:
    """A capacitor costs something: cheapest is without, at 6 deg of phase margin and more of Rf."""
    made = catalogs(capacitors=[capacitor(price=[(1.0, 0.5)])])
    best = rows(made, targets={"phase_margin": 1.0})[0]
    assert best.feedback_capacitance == 0.0
    assert best.capacitor_family is None
    by_margin = rows(made, targets={"phase_margin": 1.0}, ranking={"by": "margin"})[0]
    assert by_margin.feedback_capacitance > 0.0
    assert by_margin.margin > best.margin


BARE = {"references": ("ground",), "wirings": ("falling-biased",)}
SPLIT = {"low": -5.0}


def only(made: Any, space: Any, **asked: Any) -> Candidate:
    return rows(made, space={**BARE, **space}, supply=SPLIT, ranking={"comfort": 0.01}, **asked)[0]


def test_last_ties_take_the_smaller_rf_and_the_family_first_by_name() -> None:
    """All margins are comfortable and all prices equal, so that nothing but the last ties is left."""
    families = [
        resistor(family="YZR-3", **listed(220e3)),
        resistor(family="YZR-2", **listed(220e3, 470e3)),
        resistor(family="YZR-4", **listed(470e3)),
    ]
    best = only(catalogs(resistors=families), {})
    assert (best.feedback_resistance, best.resistor_family) == (220e3, "YZR-2")
    best = only(catalogs(resistors=families[::-1]), {})
    assert (best.feedback_resistance, best.resistor_family) == (220e3, "YZR-2")


def test_families_of_one_name_go_by_maker() -> None:
    families = [resistor(maker="Maker Y", **listed(220e3)), resistor(maker="Maker X", **listed(220e3))]
    assert only(catalogs(resistors=families), {}).resistor_family == "YZR-1"


def test_last_ties_take_the_smaller_capacitor_of_the_family_first_by_name() -> None:
    families = [
        capacitor(family="YZC-2", **listed(2e-12, 3e-12)),
        capacitor(family="YZC-1", **listed(3e-12)),
        capacitor(family="YZC-0", **listed(2e-12)),
    ]
    best = only(catalogs(capacitors=families), {"no_capacitor": False})
    assert (best.feedback_capacitance, best.capacitor_family) == (2e-12, "YZC-0")


def test_last_ties_take_wirings_in_their_order_and_the_lower_low_pass_with_none_last() -> None:
    """A diode that is the same biased or not: no dark current, no leakage, a capacitance that stays."""
    flat = diode(dark_current=0.0, shunt_resistance=float("inf"), capacitance=[(0.0, 9e-12), (30.0, 9e-12)])
    space = {"references": ("ground",), "resistance": (220e3, 220e3)}
    lags = {"low_pass": (None, 200e3, 100e3)}
    easy = {"supply": SPLIT, "ranking": {"comfort": 0.01}}
    best = rows(catalogs(photodiodes=[flat]), space={**space, **lags}, **easy)[0]
    assert (best.wiring, best.low_pass) == ("rising-unbiased", 100e3)
    wirings = ("falling-biased", "falling-unbiased")
    best = rows(catalogs(photodiodes=[flat]), space={**space, "wirings": wirings}, **easy)[0]
    assert best.wiring == "falling-unbiased"


def test_last_ties_take_ground_before_a_divider_and_the_lower_reference() -> None:
    """Free dividers that draw nothing to speak of, biased, so that no buffer is bought."""
    free = {"resistors": [resistor(price=[(1.0, 1e-12)])], "capacitors": [capacitor(price=[(1.0, 1e-12)])]}
    asked = {
        "supply": SPLIT,
        "ranking": {"comfort": 1e-6, "by": "supply_current"},
        "targets": {"offset": 1.0},
    }
    made = catalogs([opamp(quiescent_current=0.1)], **free)
    space = {"wirings": ("rising-biased",), "references": ("ground", "divider")}
    assert rows(made, space=space, **asked)[0].reference.kind == "ground"


def test_near_misses_follow_in_the_order_of_margin_and_never_hold_a_pair_twice() -> None:
    parts = [opamp(part=f"YZA-{k}", price=[(1.0, 2.0 + 0.5 * k)]) for k in range(6)]
    asked = request(targets={"cost": 6.2}, ranking={"show": 5})
    outcome = search.shortlist(asked, catalogs(parts))
    assert [c.opamp for c in outcome.candidates] == ["YZA-0", "YZA-1", "YZA-2"]
    assert [c.opamp for c in outcome.near_misses] == ["YZA-3", "YZA-4"]
    assert outcome.dropped == {"missed_target": 1}
    margins = [c.margin for c in outcome.near_misses]
    assert margins == sorted(margins, reverse=True)
    for miss in outcome.near_misses:
        assert miss.margin < 0.0
        assert miss.missed == ("cost",)
        assert miss.limiting == "cost"
    for row in outcome.candidates:
        assert row.missed == ()
        assert row.margin >= 0.0


def test_near_misses_take_the_best_setting_by_margin_whatever_the_ranking() -> None:
    """By cost the pair would go without a capacitor; as a near miss it takes the one that misses least."""
    asked = {"targets": {"phase_margin": 95.0, "bandwidth": 100e3}}
    found = {}
    for by in RANKINGS:
        outcome = search.shortlist(request(ranking={"by": by}, **asked), catalogs())
        assert outcome.candidates == ()
        found[by] = outcome.near_misses[0]
    assert len({named(c) for c in found.values()}) == 1


def test_several_missed_targets_are_named_in_the_order_of_the_record() -> None:
    asked = request(targets={"cost": 1.0, "snr": 90.0, "phase_margin": 179.0})
    miss = search.shortlist(asked, catalogs()).near_misses[0]
    assert miss.missed == ("snr", "phase_margin", "cost")
    assert [t.name for t in miss.targets] == ["snr", "full_scale", "phase_margin", "cost"]


def test_no_near_misses_beside_a_full_table() -> None:
    parts = [opamp(part=f"YZA-{k}", price=[(1.0, 2.0 + 0.5 * k)]) for k in range(6)]
    outcome = search.shortlist(request(targets={"cost": 6.2}, ranking={"show": 3}), catalogs(parts))
    assert len(outcome.candidates) == 3
    assert outcome.near_misses == ()


def test_an_unknown_supply_current_comes_last_where_it_ranks() -> None:
    made = catalogs([opamp(quiescent_current=None), opamp(part="YZA-2", quiescent_current=0.9)])
    found = rows(made, ranking={"by": "supply_current"})
    assert [c.opamp for c in found] == ["YZA-2", "YZA-1"]
    assert found[1].figures["supply_current"] is None


@pytest.mark.parametrize("seed", range(6))
def test_show_cuts_the_same_list(seed: int) -> None:
    """Rows asked for do not change the order of those before."""
    asked, made = awkward(200 + seed)
    many = search.shortlist(replace(asked, ranking=replace(asked.ranking, show=20)), made)
    few = search.shortlist(replace(asked, ranking=replace(asked.ranking, show=2)), made)
    assert few.candidates == many.candidates[:2]
