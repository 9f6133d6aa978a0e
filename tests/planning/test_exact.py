"""Whole boards out of requests and catalogs, against trying every plan there is.

The brute force takes margins of single settings from the plain evaluator; all else, from which packages
hold the same amplifier to what a build pays, is its own.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache

import pytest

from optimizer.planning import gather, plan
from optimizer.planning.outline import Solve
from optimizer.planning.plan import Planned
from optimizer.planning.plan_board import plan_board
from tests.planning.brute import Brute
from tests.planning.held import several_rails, tiny_enough, wrongs
from tests.planning.tiny import drawn

PLAIN = (
    1004, 1006, 1023, 1026, 1028, 1040, 1042, 1047, 1051, 1052, 1056, 1069, 1081, 1087, 1109, 1113, 1131,
    1151, 1159, 1168, 1174, 1176, 1181, 1199, 1202, 1208, 1214,
)  # fmt: skip
WITHOUT_PLANS = (1071, 1079, 1098, 1141)
SEVERAL_RAILS = (1097, 1114, 1137, 1146)
SECOND_SOURCES = (1057, 1064, 1078, 1171, 1237)
EVERY = (*PLAIN, *WITHOUT_PLANS, *SEVERAL_RAILS, *SECOND_SOURCES)
STARVED = (1240, 1252, 1255, 1265)


@cache
def board(seed: int) -> Brute:
    """The board of a seed, small enough to try everything."""
    brute = Brute(drawn(seed))
    assert tiny_enough(brute)
    return brute


@cache
def planned(seed: int) -> Planned:
    return plan_board(board(seed).outline)


@pytest.mark.parametrize("seed", EVERY)
def test_equals_every_plan_tried(seed: int) -> None:
    assert wrongs(board(seed), planned(seed)) == []


def test_what_is_said_is_mostly_proven() -> None:
    """Where no op-amp serves on two supplies, tiny boards are decided, most over all that there is."""
    seen: Counter[str] = Counter()
    for seed in (*PLAIN, *WITHOUT_PLANS, *SECOND_SOURCES):
        answer = planned(seed)
        seen[answer.plans[0].proven if answer.plans else answer.status] += 1
    assert seen[plan.CATALOGS] >= 25, seen
    assert seen[plan.INFEASIBLE] == len(WITHOUT_PLANS), seen
    assert not seen[plan.UNPROVEN], seen


def test_nothing_is_proven_where_op_amps_serve_on_several_supplies() -> None:
    assert all(several_rails(board(seed).outline) for seed in SEVERAL_RAILS)
    apart = [answer for answer in map(planned, SEVERAL_RAILS) if answer.notes]
    assert len(apart) >= 2
    for answer in apart:
        assert {one.proven for one in answer.plans} <= {plan.UNPROVEN}
        assert answer.status not in (plan.OPTIMAL, plan.INFEASIBLE)
        assert answer.floor is None


@pytest.mark.parametrize("seed", STARVED)
def test_pools_that_begin_with_next_to_nothing(seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
    """Then what is proved is proved of parts and uses that the pools do not hold."""
    for name in ("FIRST", "SIDE", "EACH"):
        monkeypatch.setattr(gather, name, 1)
    monkeypatch.setattr(gather, "MOST", 3)
    assert wrongs(board(seed), plan_board(board(seed).outline)) == []


@pytest.mark.parametrize("seed", [PLAIN[3]])
@pytest.mark.parametrize("solver", ["cbc", "highs"])
def test_with_each_solver(solver: str, seed: int) -> None:
    outline = replace(board(seed).outline, solve=Solve(plans=2, time=20.0, solver=solver))
    assert wrongs(board(seed), plan_board(outline)) == []
