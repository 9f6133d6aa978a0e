"""What each target costs: every step against every combination under the limits so changed."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from functools import cache

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins, search
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import space as spaces
from optimizer.search.result import Progress
from optimizer.search.roles import PASSES
from optimizer.search.weigh import steps
from optimizer.search.weigh.tradeoff import POSITIONS, Step, Tradeoff, differences, questions_of, tradeoff
from tests.search import made
from tests.search.changed import All, everything
from tests.search.instances import small
from tests.search.test_corners import small_enough, tiny
from tests.search.test_exact import size_of
from tests.search.test_sources import sourced
from tests.search.whole import named

MOST = 60_000
"""Combinations of an instance; larger ones are left out, to keep the suite short."""


def is_small(request: Request, catalogs: Catalogs) -> bool:
    """Whether every combination can be evaluated soon, at every corner where corners are graded."""
    space = spaces.build(request, catalogs)
    if not (space.contexts.size and space.resistors.size and space.capacitors.size):
        return False
    if not (space.opamp_verdicts.alone == PASSES).any():
        return False
    corners = request.tolerance.method == "corners"
    return small_enough(space) if corners else size_of(space) <= MOST


def changed(limits: dict[str, float], name: str, step: Step) -> dict[str, float]:
    """`limits` with that of `name` moved, or without it."""
    rest = {other: limit for other, limit in limits.items() if other != name}
    if step.limit is None:
        return rest
    return {other: step.limit if other == name else limit for other, limit in limits.items()}


def wrong_steps(every: All, found: Tradeoff, seen: Counter[str]) -> list[tuple[str, float | None]]:
    """Steps whose answer is not that of evaluating every combination."""
    limits = dict(every.space.limits)
    wrong: list[tuple[str, float | None]] = []
    base = None if found.base is None else named(found.base)
    if base != every.cheapest(limits):
        wrong.append(("as it stands", 0.0))
    seen["base"] += base is not None
    for row in found.rows:
        for step in row.steps:
            under = changed(limits, row.target, step)
            answer = None if step.candidate is None else named(step.candidate)
            if answer != every.cheapest(under) or not rightly_graded(step, under):
                wrong.append((row.target, step.step))
            _count(found, step, seen)
    return wrong


def rightly_graded(step: Step, limits: dict[str, float]) -> bool:
    """Whether the candidate of a step is graded against the limits so changed."""
    found = step.candidate
    if found is None:
        return True
    stated = {target.name: target.limit for target in found.targets}
    values = {t.name: t.value if t.corner is None else t.worst for t in found.targets}
    right = [t.margin == float(margins.margin(t.name, values[t.name], t.limit)) for t in found.targets]  # type: ignore[arg-type]
    least = min((target.margin for target in found.targets), default=margins.LARGEST)
    return stated == limits and all(right) and found.margin == least and not found.missed


def _count(found: Tradeoff, step: Step, seen: Counter[str]) -> None:
    answer = step.candidate
    if answer is None:
        seen["none"] += 1
    elif found.base is None:
        seen["eased"] += 1
    elif answer.figures["cost"] != found.base.figures["cost"]:
        seen["another cost"] += 1
    else:
        seen["another receiver" if step.changes else "the same"] += 1


INSTANCES: dict[str, Callable[[int], tuple[Request, Catalogs]]] = {
    "small": small,
    "awkward": made.awkward,
    "corners": tiny,
    "sources": sourced,
}


@cache
def differences_of(kind: str, seed: int) -> tuple[tuple[str, float | None], ...]:
    request, catalogs = INSTANCES[kind](seed)
    if not is_small(request, catalogs):
        return ()
    SEEN[kind]["instances"] += 1
    return tuple(wrong_steps(everything(request, catalogs), tradeoff(request, catalogs), SEEN[kind]))


SEEN: dict[str, Counter[str]] = {kind: Counter() for kind in INSTANCES}


@settings(max_examples=25, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_equals_evaluating_every_combination(seed: int) -> None:
    assert not differences_of("small", seed)


@settings(max_examples=25, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_is_exact_where_costs_tie(seed: int) -> None:
    assert not differences_of("awkward", seed)


@settings(max_examples=12, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_is_exact_at_the_worst_corner(seed: int) -> None:
    assert not differences_of("corners", seed)


@settings(max_examples=12, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_is_exact_with_second_sources(seed: int) -> None:
    assert not differences_of("sources", seed)


def test_the_instances_are_worth_testing() -> None:
    for kind, seeds in (("small", 14), ("awkward", 14), ("corners", 10), ("sources", 10)):
        for seed in range(seeds):
            assert not differences_of(kind, seed)
    seen = sum(SEEN.values(), Counter[str]())
    for what in ("base", "none", "eased", "another cost", "another receiver", "the same"):
        assert seen[what] >= 5, SEEN
    for kind in INSTANCES:
        assert SEEN[kind]["instances"] >= 3, SEEN
        assert SEEN[kind]["base"] >= 1, SEEN


GOOD = made.request(targets={"bandwidth": 10e3, "phase_margin": 45.0, "offset": 5e-3})


def test_each_step_is_what_a_shortlist_of_the_changed_request_shows_first() -> None:
    """The whole tool on a request typed anew, for targets that alone can be moved in one."""
    parts = made.catalogs([made.opamp(), made.opamp(part="YZA-2", gbw=4e5, price=[(1.0, 0.8)])])
    found = tradeoff(GOOD, parts)
    compared = 0
    for row in found.rows:
        if row.target not in ("phase_margin", "offset"):
            continue
        for step in row.steps:
            targets = replace(GOOD.targets, **{row.target: step.limit})
            ranking = replace(GOOD.ranking, by="cost", show=1)
            outcome = search.shortlist(replace(GOOD, targets=targets, ranking=ranking), parts)
            assert (step.candidate,) == (outcome.candidates or (None,))
            compared += 1
    assert compared == 18


def test_rows_stand_in_the_order_of_the_record_and_steps_from_the_loosest() -> None:
    found = tradeoff(GOOD, made.catalogs())
    assert [row.target for row in found.rows] == ["bandwidth", "full_scale", "phase_margin", "offset"]
    assert all(tuple(step.step for step in row.steps) == steps.STEPS for row in found.rows)
    assert found.questions == 1 + 4 * len(steps.STEPS)
    assert found.conflicts is None
    assert found.evaluated > 0


def test_with_the_only_target_dropped_nothing_limits() -> None:
    found = tradeoff(made.request(), made.catalogs())
    (row,) = found.rows
    assert row.target == "full_scale"
    dropped = row.steps[0].candidate
    assert dropped is not None
    assert (dropped.targets, dropped.limiting, dropped.margin) == ((), "", margins.LARGEST)


def test_what_changes_is_named_position_by_position() -> None:
    base = tradeoff(GOOD, made.catalogs()).base
    assert base is not None
    assert differences(base, base) == ()
    other = replace(
        base,
        photodiode="another",
        opamp_maker="another",
        wiring="another",
        reference=replace(base.reference, top=1.0),
        resistor_family="another",
        feedback_capacitance=1.0,
        low_pass=1.0,
    )
    assert differences(base, other) == POSITIONS
    # what follows from the wiring and the op-amp is no change of its own
    assert differences(base, replace(base, reference=replace(base.reference, extra_package=True))) == ()


def test_a_space_with_nothing_in_it_has_no_table() -> None:
    found = tradeoff(made.request(space={"resistance": (1.0, 2.0)}), made.catalogs())
    assert (found.base, found.rows, found.conflicts) == (None, (), None)
    assert "no resistor family" in found.impossible[0]


def test_what_no_part_could_meet_is_said_and_the_rest_looked_into_all_the_same() -> None:
    request = made.request(light={"weakest": 1e-15}, targets={"snr": 80.0, "bandwidth": 1e6})
    found = tradeoff(request, made.catalogs())
    assert "shot noise" in found.impossible[0]
    assert found.base is None
    assert found.conflicts is not None
    assert found.conflicts.sets
    eased = {row.target: row.steps[0].candidate for row in found.rows}
    assert eased["snr"] is None or not eased["snr"].missed


def test_questions_hold_one_changed_limit_each() -> None:
    space = spaces.build(GOOD, made.catalogs())
    asked = questions_of(space)
    assert asked.names == tuple(space.limits)
    differ = (asked.limits != asked.limits[0]).sum(axis=1)
    assert differ[0] == 0
    assert (differ[1:] == 1).all()


def test_progress_counts_questions(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("optimizer.search.weigh.tradeoff.REPORT_EVERY", 0.0)
    told: list[Progress] = []
    found = tradeoff(GOOD, made.catalogs(), progress=told.append)
    assert told
    assert all(0 <= now.decided <= now.pairs == found.questions for now in told)


def test_the_same_for_any_order_of_rows() -> None:
    amps = [made.opamp(part=f"YZA-{k}", gbw=(2.0 + k) * 1e6) for k in range(3)]
    diodes = [made.diode(part=f"YZD-{k}", capacitance=[(0.0, (k + 1) * 20e-12)]) for k in range(3)]
    one = tradeoff(GOOD, made.catalogs(amps, diodes))
    other = tradeoff(GOOD, made.catalogs(amps[::-1], diodes[::-1]))
    assert (one.base, one.rows) == (other.base, other.rows)
