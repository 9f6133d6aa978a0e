"""The front of cost against a target: every point against all combinations."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search.result import Progress
from optimizer.search.weigh.front import AGAINST, Front, front
from tests.search import changed, made
from tests.search.changed import All, everything
from tests.search.test_tradeoff import GOOD, INSTANCES, is_small
from tests.search.whole import named

SEEN: Counter[str] = Counter()


def picked(seed: int, request: Request, many: int) -> list[str]:
    """Some targets to hold cost against."""
    rng = np.random.default_rng(seed)
    names = [name for name in AGAINST if name != "slew" or request.targets.bandwidth is not None]
    return [str(name) for name in rng.choice(names, many, replace=False)]


def wrong_fronts(request: Request, catalogs: Catalogs, targets: list[str], seen: Counter[str]) -> list[str]:
    """The targets whose front is not that of evaluating every combination."""
    every = everything(request, catalogs)
    return [target for target in targets if is_wrong(every, front(request, catalogs, target), seen)]


def is_wrong(every: All, found: Front, seen: Counter[str]) -> bool:
    limits = dict(every.space.limits)
    rest = {name: limit for name, limit in limits.items() if name != found.target}
    met = bool(every.meets(limits).any())
    if every.space.sources > 1:
        expected = changed.sourced_front(every, rest, found.target)
        same = [(p.cost, p.value) for p in found.points] == expected
    else:
        points = changed.front(every, rest, found.target)
        expected = [(cost, value) for cost, value, _ in points]
        same = [(p.cost, p.value, named(p.candidate)) for p in found.points] == points
    seen.update({"points": len(expected), "met": met, "several": len(expected) > 1, "none": not expected})
    return not (same and found.meets == met and (found.conflicts is None) == bool(expected))


@cache
def wrong(kind: str, seed: int) -> list[str]:
    request, catalogs = INSTANCES[kind](seed)
    if not is_small(request, catalogs):
        return []
    SEEN[kind] += 1
    return wrong_fronts(request, catalogs, picked(seed, request, 2), SEEN)


@pytest.mark.parametrize("kind", list(INSTANCES))
@settings(max_examples=12, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_point_equals_comparing_every_combination(kind: str, seed: int) -> None:
    assert wrong(kind, seed) == []


def test_the_instances_are_worth_testing() -> None:
    for kind in INSTANCES:
        for seed in range(8):
            assert wrong(kind, seed) == []
        assert SEEN[kind] >= 3, SEEN
    for what in ("points", "met", "several", "none"):
        assert SEEN[what] >= 5, SEEN


AMPS = [made.opamp(part=f"YZA-{k}", gbw=10.0**k, price=[(1.0, k / 2.0)]) for k in (6, 7)]
PARTS = made.catalogs(AMPS)


def test_a_faster_amplifier_costs_more() -> None:
    found = front(GOOD, PARTS, "bandwidth")
    assert {point.candidate.opamp for point in found.points} == {"YZA-6", "YZA-7"}
    costs = [point.cost for point in found.points]
    values = [point.value for point in found.points]
    assert costs == sorted(set(costs))
    assert values == sorted(set(values))
    assert found.limit == 10e3
    assert found.others == ("full_scale", "phase_margin", "offset")
    for point in found.points:
        assert point.cost == point.candidate.figures["cost"]
        assert point.value == point.candidate.figures["bandwidth"]
        assert point.margin == next(t.margin for t in point.candidate.targets if t.name == "bandwidth")


def test_the_own_limit_is_dropped_and_the_request_met_only_beyond_it() -> None:
    hard = replace(GOOD, targets=replace(GOOD.targets, bandwidth=1e12))
    found = front(hard, PARTS, "bandwidth")
    assert found.points
    assert not found.meets
    assert front(GOOD, PARTS, "bandwidth").meets


def test_a_target_that_is_not_stated_can_be_asked_for() -> None:
    found = front(GOOD, PARTS, "snr")
    assert found.limit is None
    assert found.points
    assert found.meets
    assert all(point.margin is None for point in found.points)


def test_where_the_others_cannot_be_met_it_says_why() -> None:
    hard = replace(GOOD, targets=replace(GOOD.targets, offset=1e-9))
    found = front(hard, PARTS, "bandwidth")
    assert found.points == ()
    assert found.conflicts is not None
    assert found.conflicts.sets == (("offset",),)


def test_nothing_to_choose_from() -> None:
    found = front(made.request(space={"resistance": (1.0, 2.0)}), PARTS, "snr")
    assert (found.points, found.conflicts, found.meets) == ((), None, False)
    assert found.impossible


def test_progress_counts_points() -> None:
    told: list[Progress] = []
    found = front(GOOD, PARTS, "bandwidth", progress=told.append)
    assert told[-1].decided >= len(found.points)


def test_the_target_of_every_figure_with_a_side_is_there() -> None:
    assert "cost" not in AGAINST
    assert len(AGAINST) == 9
