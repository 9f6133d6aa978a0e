"""Why pairs drop out, and which single targets block: held to evaluating everything."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from optimizer import search
from optimizer.request.types import Request
from optimizer.search import plain, reach
from optimizer.search import space as spaces
from optimizer.search.result import Outcome
from optimizer.search.roles import PASSES
from tests.search.made import awkward, catalogs, diode, opamp, request
from tests.search.whole import Whole, everything

SEEDS = range(30)


@cache
def both(seed: int) -> tuple[Request, Outcome, Whole]:
    asked, made = awkward(seed)
    outcome = search.shortlist(asked, made)
    return asked, outcome, everything(asked, made)


@pytest.mark.parametrize("seed", SEEDS)
def test_counts_are_those_of_every_setting(seed: int) -> None:
    asked, outcome, whole = both(seed)
    if whole.meeting < asked.ranking.show:
        assert Counter(outcome.dropped) == +whole.reached


@pytest.mark.parametrize("seed", SEEDS)
def test_counts_and_rows_are_all_pairs(seed: int) -> None:
    _, outcome, _ = both(seed)
    rows = len(outcome.candidates) + len(outcome.near_misses)
    assert sum(outcome.dropped.values()) + rows == outcome.pairs == 20
    assert all(count > 0 for count in outcome.dropped.values())


@pytest.mark.parametrize("seed", SEEDS)
def test_with_a_full_table_a_pair_that_meets_is_never_said_to_miss(seed: int) -> None:
    asked, outcome, whole = both(seed)
    if whole.meeting >= asked.ranking.show:
        # what is eligible and does not meet; the rest may have been left undecided
        assert outcome.dropped.get("missed_target", 0) <= whole.reached["missed_target"]
        assert outcome.dropped.get("cannot_beat", 0) >= whole.meeting - asked.ranking.show
        for key, count in outcome.dropped.items():
            if key != "cannot_beat":
                assert count <= whole.reached[key], key


@pytest.mark.parametrize("seed", SEEDS)
def test_blocking_names_each_target_that_alone_keeps_everything_out(seed: int) -> None:
    _, outcome, whole = both(seed)
    assert outcome.blocking == whole.blocking


def test_the_instances_reach_most_checks_and_ends() -> None:
    keys, ends = Counter[str](), Counter[str]()
    for seed in SEEDS:
        asked, outcome, whole = both(seed)
        keys += whole.reached
        ends["met"] += bool(outcome.candidates)
        ends["blocked"] += bool(whole.blocking)
        ends["near"] += bool(outcome.near_misses)
        ends["full"] += whole.meeting >= asked.ranking.show
        assert not outcome.impossible
    reached = {key.partition(":")[0] for key in keys}
    for name in ("status", "stock", "wavelength", "missing", "input_range", "window", "dark_output", "load",
                 "min_gain", "missed_target"):  # fmt: skip
        assert name in reached, name
    assert min(ends.values()) >= 3, ends


def test_blocking_is_full_scale_where_that_is_all_that_is_graded() -> None:
    """10 V of swing over 0.1 Mohm and 0.56 A/W: 180 uW at most."""
    asked = request(light={"strongest": 1e-3})
    outcome = search.shortlist(asked, catalogs())
    assert outcome.candidates == ()
    assert outcome.blocking == ("full_scale",)
    assert outcome.near_misses[0].missed == ("full_scale",)


def test_two_targets_that_each_keep_out_block_only_together() -> None:
    """Neither cost nor current alone lets the pair in."""
    both_tight = request(targets={"cost": 1.0, "supply_current": 1e-6})
    assert search.shortlist(both_tight, catalogs()).blocking == ()
    one_tight = request(targets={"cost": 1.0, "supply_current": 1.0})
    assert search.shortlist(one_tight, catalogs()).blocking == ("cost",)


def test_a_target_blocks_where_another_pair_than_the_nearest_misses_it_alone() -> None:
    """The nearest pair misses cost and current by a little; the other misses cost alone, by much."""
    rows = [
        opamp(part="YZA-1", price=[(1.0, 2.2)], quiescent_current=1.2e-3),
        opamp(part="YZA-2", price=[(1.0, 90.0)], quiescent_current=0.1e-3),
    ]
    asked = request(targets={"cost": 5.0, "supply_current": 1.0e-3}, ranking={"show": 1})
    outcome = search.shortlist(asked, catalogs(rows))
    assert outcome.near_misses[0].missed == ("supply_current", "cost")
    assert outcome.blocking == ("cost",)


def test_nothing_blocks_where_something_meets_or_nothing_is_eligible() -> None:
    assert search.shortlist(request(), catalogs()).blocking == ()
    none = search.shortlist(request(), catalogs([opamp(status="obsolete")]))
    assert none.blocking == ()
    assert none.near_misses == none.candidates == ()
    assert none.dropped == {"status": 1}


def test_a_full_table_leaves_pairs_that_meet_as_unable_to_beat_it() -> None:
    rows = [opamp(part=f"YZA-{k}", price=[(1.0, 1.0 + k)]) for k in range(6)]
    outcome = search.shortlist(request(ranking={"show": 2}), catalogs(rows))
    assert [c.opamp for c in outcome.candidates] == ["YZA-0", "YZA-1"]
    assert outcome.dropped == {"cannot_beat": 4}


def test_parts_that_fail_alone_take_their_pairs_even_beyond_a_full_table() -> None:
    rows = [
        opamp(part="YZA-1"),
        opamp(part="YZA-2"),
        opamp(part="YZA-3", status="obsolete", price=[(1.0, 99.0)]),
    ]
    outcome = search.shortlist(
        request(ranking={"show": 1}), catalogs(rows, [diode(), diode(part="YZD-2", stock=0.0)])
    )
    assert outcome.dropped == {"status": 2, "stock": 2, "cannot_beat": 1}


WITNESSES = ((), ((0.0, 0.0),), ((1.0, 0.0), (1.0, 1.0)))
"""Likely settings to begin with: none, the smallest values, the largest resistor; the rest is scanned."""


@pytest.mark.parametrize("likely", WITNESSES)
@pytest.mark.parametrize("seed", range(400, 412))
def test_the_check_reached_does_not_hang_on_a_lucky_setting(
    seed: int, likely: tuple[tuple[float, float], ...], monkeypatch: pytest.MonkeyPatch
) -> None:
    asked, made = awkward(seed)
    wide = replace(asked.space, resistance=(1e3, 10e6), capacitance=(1e-12, 1e-9), low_pass=(None,))
    space = spaces.build(replace(asked, space=wide), made)
    amps, sensors = (np.flatnonzero(v.alone == PASSES) for v in (space.opamp_verdicts, space.diode_verdicts))
    pairs = [(o, d) for o in amps for d in sensors]
    opamp, diode_ = (np.array([pair[k] for pair in pairs], dtype=np.int64) for k in (0, 1))
    monkeypatch.setattr(reach, "_QUANTILES", likely)
    found = reach.furthest(space, opamp, diode_)
    assert found.tolist() == [whole_reach(seed, int(o), int(d), space) for o, d in pairs]


REACHES: dict[tuple[int, int, int], int] = {}


def whole_reach(seed: int, opamp: int, diode: int, space: spaces.Space) -> int:
    """What evaluating every setting of a pair reaches; kept, for it does not depend on the witnesses."""
    place = (seed, opamp, diode)
    if place not in REACHES:
        REACHES[place] = plain.pair(space, opamp, diode).reach
    return REACHES[place]


def test_an_output_on_the_rail_may_pass_with_large_resistors_only(monkeypatch: pytest.MonkeyPatch) -> None:
    """Weakest light of 17 nA lifts the output by 50 mV of guard and 20 mV of limit from 4.7 Mohm on."""
    monkeypatch.setattr(reach, "_QUANTILES", ((0.0, 0.0),))
    resting = {"references": ("ground",), "wirings": ("rising-unbiased",), "dark_on_rail": True}
    asked = request(space={**resting, "resistance": (1e3, 10e6)}, supply={"guard": 0.05})
    space = spaces.build(asked, catalogs())
    zero = np.zeros(1, dtype=np.int64)
    assert plain.pair(space, 0, 0).reach == PASSES
    assert reach.furthest(space, zero, zero).tolist() == [PASSES]
    small = request(space={**resting, "resistance": (1e3, 3e6)}, supply={"guard": 0.05})
    assert search.shortlist(small, catalogs()).dropped == {"dark_output": 1}
