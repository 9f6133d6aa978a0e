"""Why nothing meets: conflicting sets and least relaxations, against every combination."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import replace
from functools import cache
from itertools import combinations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request, Resilience
from optimizer.search.result import SOURCES
from optimizer.search.weigh import steps
from optimizer.search.weigh.conflicts import MOST_SETS, Conflicts, Names, Relaxation, minimal
from optimizer.search.weigh.tradeoff import tradeoff
from tests.search import changed, made
from tests.search.changed import All, everything
from tests.search.test_tradeoff import GOOD, INSTANCES, is_small
from tests.search.whole import named

SEEN: Counter[str] = Counter()


@cache
def wrong_of(kind: str, seed: int) -> list[str]:
    request, catalogs = INSTANCES[kind](seed)
    if not is_small(request, catalogs):
        return []
    SEEN[kind] += 1
    return wrong(request, catalogs, SEEN)


def wrong(request: Request, catalogs: Catalogs, seen: Counter[str]) -> list[str]:
    """What is said of a request that nothing meets otherwise than evaluating every combination would."""
    every, found = everything(request, catalogs), tradeoff(request, catalogs)
    limits = dict(every.space.limits)
    meets = bool(every.meets(limits).any())
    if meets or found.conflicts is None:
        return [] if meets == (found.conflicts is None) else ["whether anything meets"]
    return [*_wrong_sets(every, found.conflicts, seen), *_wrong_relaxations(every, found.conflicts, seen)]


def _wrong_sets(every: All, found: Conflicts, seen: Counter[str]) -> list[str]:
    limits = every.space.limits
    names = [*limits, SOURCES] if every.space.sources > 1 else list(limits)
    expected = changed.minimal_conflicts(names, every.can_meet)
    seen["ineligible"] += expected == {frozenset()}
    if expected == {frozenset()}:
        return ["eligible"] * (found.eligible or bool(found.sets))
    seen[f"sets of {min(map(len, expected))}"] += 1
    seen["several sets"] += len(expected) > 1
    same = {frozenset(one) for one in found.sets} == expected and found.complete and found.eligible
    sizes = [len(one) for one in found.sets]
    return [] if same and sizes == sorted(sizes) else ["sets"]


def _wrong_relaxations(every: All, found: Conflicts, seen: Counter[str]) -> list[str]:
    limits = dict(every.space.limits)
    return [one.target for one in found.relaxations if _is_wrong(every, limits, one, seen)]


def _is_wrong(every: All, limits: dict[str, float], one: Relaxation, seen: Counter[str]) -> bool:
    rest = {name: limit for name, limit in limits.items() if name != one.target}
    if every.space.sources > 1:
        front = changed.sourced_front(every, rest, one.target)
        best, name = (front[-1][1] if front else None), None
    else:
        points = changed.best(every, rest, one.target)
        best, name = (None, None) if points is None else points
    seen["helped" if best is not None else "not even dropped"] += 1
    if best is None or one.candidate is None or one.value is None:
        return (best is None) != (one.candidate is None)
    margin = round(float(margins.raw_margin(one.target, np.array(one.value), one.limit)), 9)
    seen["beyond -1"] += margin < -1.0
    return not (one.value == best and one.margin == margin < 0.0 and name in (None, named(one.candidate)))


@pytest.mark.parametrize("kind", list(INSTANCES))
@settings(max_examples=12, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_sets_and_relaxations_equal_evaluating_every_combination(kind: str, seed: int) -> None:
    assert wrong_of(kind, seed) == []


def test_the_instances_are_worth_testing() -> None:
    for kind in INSTANCES:
        for seed in range(12):
            assert wrong_of(kind, seed) == []
        assert SEEN[kind] >= 3, SEEN
    for what in ("sets of 1", "sets of 2", "several sets", "helped", "not even dropped", "ineligible"):
        assert SEEN[what] >= 1, SEEN


def found_for(request: Request, catalogs: Catalogs) -> Conflicts:
    found = tradeoff(request, catalogs).conflicts
    assert found is not None
    return found


def test_a_target_that_no_setting_meets_conflicts_with_itself() -> None:
    hard = replace(GOOD, targets=replace(GOOD.targets, offset=1e-9))
    found = found_for(hard, made.catalogs())
    assert found.sets == (("offset",),)
    eased = {one.target: one for one in found.relaxations}
    assert [name for name, one in eased.items() if one.candidate is not None] == ["offset"]
    offset = eased["offset"]
    assert offset.candidate is not None
    assert offset.value == offset.candidate.figures["offset"]
    assert offset.limit == 1e-9


def test_the_least_relaxation_does_not_hang_on_what_one_hunt_tells_apart(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Against a limit so loose that all margins are the largest, a hunt takes the cheapest of all."""
    hard = replace(GOOD, targets=replace(GOOD.targets, offset=1e-9))
    parts = made.catalogs([made.opamp(), made.opamp(part="YZA-2", offset_voltage=0.1e-3, price=[(1.0, 9.0)])])
    usual = found_for(hard, parts)
    with monkeypatch.context() as patch:
        patch.setattr("optimizer.search.weigh.steps.far_below", lambda name, _limit: steps.loosest(name))
        assert found_for(hard, parts).relaxations == usual.relaxations
    eased = next(one for one in usual.relaxations if one.target == "offset")
    assert eased.candidate is not None
    assert eased.candidate.opamp == "YZA-2"


def test_nothing_is_eligible() -> None:
    found = found_for(GOOD, made.catalogs([made.opamp(supply_max=3.0)]))
    assert not found.eligible
    assert found.sets == ()
    assert all(one.candidate is None for one in found.relaxations)


def test_second_sources_can_be_what_stands_in_the_way() -> None:
    one_maker = [made.opamp(pinout="single"), made.opamp(part="YZA-2", pinout="single")]
    asked = replace(GOOD, resilience=Resilience(opamp_sources=2))
    found = found_for(asked, made.catalogs(one_maker))
    assert found.sets == ((SOURCES,),)


def known_sets(conflicting: Sequence[set[str]], calls: list[Names]) -> object:
    """A witness for a made-up family of conflicting sets, which notes what it is asked."""

    def witness(asked: Names) -> Sequence[Names]:
        calls.append(asked)
        return () if any(one <= asked for one in conflicting) else (asked,)

    return witness


NAMES = ("a", "b", "c", "d", "e")


@pytest.mark.parametrize(
    "conflicting",
    [[{"a"}], [{"a", "b"}], [{"a", "b"}, {"b", "c"}], [{"a", "b", "c"}, {"d"}], [set(NAMES)], []],
)
def test_minimal_sets_come_out_once_and_the_smallest_first(conflicting: list[set[str]]) -> None:
    calls: list[Names] = []
    sets, complete = minimal(NAMES, known_sets(conflicting, calls), ())  # type: ignore[arg-type]
    assert [set(one) for one in sets] == sorted(conflicting, key=len)
    assert complete
    assert len(calls) == len(set(calls))


def test_what_is_known_to_be_met_is_not_asked_again() -> None:
    calls: list[Names] = []
    known = [frozenset("abcd"), frozenset("bcde")]
    sets, complete = minimal(NAMES, known_sets([{"a", "e"}], calls), known)  # type: ignore[arg-type]
    assert (sets, complete) == ((("a", "e"),), True)
    assert calls == [frozenset("ae")]


def test_beyond_a_sensible_count_it_says_that_there_are_more() -> None:
    names = tuple("abcdefgh")
    pairs = [set(pair) for pair in combinations(names, 2)]
    calls: list[Names] = []
    sets, complete = minimal(names, known_sets(pairs, calls), ())  # type: ignore[arg-type]
    assert len(sets) == MOST_SETS < len(pairs)
    assert not complete
    exact, complete = minimal(names, known_sets(pairs[:MOST_SETS], calls), ())  # type: ignore[arg-type]
    assert len(exact) == MOST_SETS
    assert complete
