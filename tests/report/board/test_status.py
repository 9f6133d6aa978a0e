"""What came of planning, in honest words: proven only what is, and what might still be saved."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from optimizer.planning.plan import (
    CATALOGS,
    INTERRUPTED,
    NOTHING,
    OPTIMAL,
    POOLS,
    UNPROVEN,
    WITHIN,
    Alone,
    Planned,
)
from tests.planning import made_plan
from tests.report.board.shown import words


def first(proven: str, saving: int = 0, **changes: Any) -> Planned:
    """The first plan alone, `saving` cents a build above its bound."""
    plan = made_plan.plans()[0]
    kept = (replace(plan, proven=proven, bound=plan.cost - saving),)
    return made_plan.planned(**{"plans": kept, "floor": None} | changes)


def test_proven_over_everything() -> None:
    assert "Proven: no plan over everything that the requests admit costs less." in words(first(CATALOGS))


def test_proven_over_the_pools_is_not_called_more() -> None:
    """Over everything 53.55 of 1071.00 a build might be saved, 5 %: 0.357 of 7.14 a board."""
    said = words(first(POOLS, pools=made_plan.pools(), floor=101_745))
    assert (
        "Proven over the candidates looked at, which are not all: no plan over them costs less. Over "
        "everything that the requests admit no plan costs less than 6.78 a board, so at most 0.36 a board "
        "(53.55 a build, 5 %) could be saved." in said
    )


def test_a_bound_over_everything_that_is_as_good_replaces_that_over_the_candidates() -> None:
    said = words(first(UNPROVEN, 1234, status=WITHIN, pools=made_plan.pools(), floor=106_000))
    assert (
        "The bound is 7.07 a board, so at most 0.073 a board (11.00 a build, 1 %) could be saved over "
        "everything that the requests admit." in said
    )
    assert "over the candidates looked at" not in said


def test_without_a_floor_nothing_is_said_of_everything() -> None:
    assert "everything that the requests" not in words(first(POOLS, pools=made_plan.pools(), floor=None))


def test_what_the_time_stopped_says_bound_and_gap() -> None:
    """12.34 of 1071.00 a build, for 150 boards: 0.082 a board, 1.2 %, the bound at 7.0577."""
    said = words(first(UNPROVEN, 1234, status=WITHIN))
    assert (
        "NOT PROVEN: stopped by the time limit of 60 s. The bound is 7.06 a board, so at most 0.082 a board "
        "(12.34 a build, 1 %) could be saved over everything that the requests admit." in said
    )


def test_a_bound_over_cut_pools_says_so() -> None:
    said = words(first(UNPROVEN, 1234, status=WITHIN, pools=made_plan.pools(), floor=101_745))
    assert "(12.34 a build, 1 %) could be saved over the candidates looked at. Over everything" in said
    assert "(53.55 a build, 5 %) could be saved." in said


@pytest.mark.parametrize("status", [WITHIN, INTERRUPTED])
def test_without_a_bound_nothing_is_promised(status: str) -> None:
    plan = made_plan.plans()[0]
    said = words(first(UNPROVEN, plan.cost, status=status))
    assert "NOT PROVEN" in said
    assert "No bound was found, so how much could be saved is not known." in said


def test_an_unproven_plan_is_not_proven_whatever_the_status() -> None:
    assert "NOT PROVEN" in words(first(UNPROVEN, 5, status=OPTIMAL))


@pytest.mark.parametrize("status", [OPTIMAL, WITHIN, INTERRUPTED])
@pytest.mark.parametrize("proven", [CATALOGS, POOLS, UNPROVEN])
def test_nothing_is_called_optimal(status: str, proven: str) -> None:
    assert "optim" not in words(first(proven, 7, status=status)).lower()


def test_faults_of_solvers_and_notes_are_told() -> None:
    said = words(first(UNPROVEN, 5, status=WITHIN, faults=("CBC was killed",), notes=("stock is short",)))
    assert "ended by what is said below, or by the time limit of 60 s." in said
    assert "A solver failed: CBC was killed" in said
    assert "stock is short" in said


@pytest.mark.parametrize(
    ("solver", "said"), [("cbc", "with CBC."), ("highs", "with HiGHS."), ("x", "with x.")]
)
def test_the_solver_is_named(solver: str, said: str) -> None:
    assert f"Planned in 2.35 s {said}" in words(made_plan.planned(solver=solver))


@pytest.mark.parametrize("solver", ["", "none"])
def test_no_solver_no_word(solver: str) -> None:
    assert "Planned in" not in words(made_plan.planned(solver=solver))


@pytest.mark.parametrize(
    ("status", "said"), [(NOTHING, "stopped by the time limit of 60 s;"), (INTERRUPTED, "interrupted, which")]
)
def test_no_plan_found_proves_nothing(status: str, said: str) -> None:
    text = words(made_plan.nothing_found(status=status))
    assert f"No plan was found: {said}" in text
    assert "proves nothing, for there may be one." in text


def test_fewer_plans_than_asked_for() -> None:
    few = made_plan.plans()[:3]
    no_more = words(made_plan.planned(plans=few, only=True, pools=made_plan.pools()))
    over = "there are no more with other photodiodes or op-amps, among the candidates looked at."
    assert f"5 plans were asked for; {over}" in no_more
    whole = tuple(replace(pool, complete=True, left_out=0) for pool in made_plan.pools())
    none_at_all = words(made_plan.planned(plans=few, only=True, pools=whole))
    assert "there are no more with other photodiodes or op-amps." in none_at_all
    perhaps = words(made_plan.planned(plans=few))
    assert "5 plans were asked for; no more were found in the time, though there may be some." in perhaps
    assert "asked for" not in words()


def test_against_each_channel_alone() -> None:
    """312.50 of 1383.50 a build is 22.6 %; for 150 boards 2.0833 of 9.2233."""
    assert (
        "With each channel's cheapest receiver, chosen by itself, it would come to 9.22 a board, with 15 "
        "line items and 6 op-amp packages. The plan saves 2.08 a board (312.50 a build, 23 %), three line "
        "items and two op-amp packages. Built so, the board would not keep to its limits: line_items."
        in words()
    )


@pytest.mark.parametrize(
    ("alone", "said"),
    [
        (Alone(107_100, 12, 4), "The plan saves nothing of it."),
        (Alone(107_100, 13, 4), "The plan saves one line item."),
        (
            Alone(107_250, 11, 5),
            "saves 0.01 a board (1.50 a build, 0.1 %) and one op-amp package, but takes more: one line item.",
        ),
        (Alone(106_950, 12, 4), "takes more: 0.01 a board (1.50 a build, 0.1 %)."),
    ],
)
def test_what_the_plan_saves_and_what_it_takes(alone: Alone, said: str) -> None:
    assert said in words(made_plan.planned(alone=alone), 200)
    assert "keep to its limits" not in words(made_plan.planned(alone=alone))


def test_alone_with_too_little_in_stock() -> None:
    said = words(made_plan.planned(alone=Alone(107_100, 12, 4, ("cost", "stock"))))
    assert "the board would not keep to its limits: cost. Built so, more of a part would be needed" in said


def test_alone_unknown_is_not_told() -> None:
    assert "chosen by itself" not in words(made_plan.planned(alone=None))
