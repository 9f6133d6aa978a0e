"""Substitutes against every choice of small boards: classes, order, nearest misses, what stops them."""

from __future__ import annotations

from collections import Counter
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.figures import CHECKS
from optimizer.search import assemble
from optimizer.search.change import substitutes
from optimizer.search.change.positions import CHANGES, USES, positions_of
from optimizer.search.query import whole as compiled
from optimizer.search.roles import PASSES
from tests.search import board_answers, boards
from tests.search.boards import Case
from tests.search.whole import named


def said(one: Case) -> dict[str, Any]:
    """What the engine says of each change: its rows, the nearest, or the check where none is eligible."""
    answer: dict[str, Any] = {}
    space = compiled(one.request, one.catalogs)
    plan = boards.plan_of(one, space)
    for change, offer in substitutes.offers(space, one.catalogs, plan).items():
        ranked = substitutes.ranked(offer, change, by=one.request.ranking.by, show=boards.SHOW)
        rows = assemble.candidates(offer.space, one.catalogs, ranked.choice)
        changed = positions_of(offer.space, plan.board, offer.grades, ranked.choice)
        near = substitutes.nearest(offer, change).choice
        nearest = assemble.candidates(offer.space, one.catalogs, near)
        answer[CHANGES[change - 1]] = {
            "rows": [
                (named(row), set(names), pytest.approx(row.figures["cost"], rel=1e-8))
                for row, names in zip(rows, changed, strict=True)
            ],
            "nearest": named(nearest[0]) if nearest else None,
            "stopped": "" if nearest else substitutes.stopped(offer, change).partition(":")[0],
            "able": [
                {str(parts.text["part"][row]) for row in substitutes.able(offer, change, axis)}
                for axis, parts in ((0, one.catalogs.opamps), (1, one.catalogs.photodiodes))
            ],
        }
    return answer


def expected(one: Case) -> dict[str, Any]:
    answer = board_answers.answer(one)
    wanted = {}
    for change in CHANGES:
        reach, eligible = answer.reach.get(change), change in answer.nearest
        check = "" if eligible or reach is None else "corner" if reach == PASSES else CHECKS[reach]
        wanted[change] = {
            "rows": answer.rows.get(change, []),
            "nearest": answer.nearest.get(change),
            "stopped": check,
            "able": answer.able.get(change, [set(), set()]),
        }
    return wanted


@settings(max_examples=28, deadline=None, derandomize=True)
@given(seed=st.integers(0, 999))
def test_equals_every_choice(seed: int) -> None:
    one = boards.case(seed)
    assert said(one) == expected(one)


def test_the_boards_are_worth_testing() -> None:
    """Among them every kind of change has rows, misses, and nothing at all; much is withdrawn and kept."""
    kinds = Counter[str]()
    for seed in range(40):
        one = boards.case(seed)
        plan = boards.plan_of(one, compiled(one.request, one.catalogs))
        kinds.update(f"{use} withdrawn" for use in plan.withdrawn)
        kinds["two withdrawn"] += len(plan.withdrawn) > 1
        kinds["kept"] += bool(plan.keep)
        kinds["corners"] += one.request.tolerance.stated
        kinds["earlier record"] += "opamp_package" not in one.candidate
        for change, offer in substitutes.offers(
            compiled(one.request, one.catalogs), one.catalogs, plan
        ).items():
            name, met = CHANGES[change - 1], substitutes.anything(offer, change)
            near = met or bool(substitutes.nearest(offer, change).choice.opamp.size)
            stopped = not near and bool(substitutes.stopped(offer, change))
            kinds[f"{name} rows"] += met
            kinds[f"{name} misses"] += near and not met
            kinds["stopped"] += stopped
            kinds["nothing"] += not near and not stopped
    for change in CHANGES:
        assert kinds[f"{change} rows"] >= 5, kinds
        assert kinds[f"{change} misses"] >= 2, kinds
    for use in USES:
        assert kinds[f"{use} withdrawn"] >= 2, kinds
    for name in ("two withdrawn", "kept", "earlier record", "corners", "stopped", "nothing"):
        assert kinds[name] >= 2, kinds


@pytest.mark.parametrize("seed", range(8))
def test_products_hold_each_setting_of_a_change_once(seed: int) -> None:
    one = boards.case(seed)
    space = compiled(one.request, one.catalogs)
    offered = substitutes.offers(space, one.catalogs, boards.plan_of(one, space))
    for change, offer in offered.items():
        axes = offer.grades.axes
        every = np.stack(np.meshgrid(*(axis.grade for axis in axes), indexing="ij")).max(axis=0)
        moved = sum(np.meshgrid(*(axis.changed for axis in axes), indexing="ij"))
        for changed in (None, *range(8)):
            held = np.zeros(every.shape, dtype=int)
            for part in substitutes.products(offer.grades, change, changed):
                held[np.ix_(*part)] += 1
            wanted = (every == change) & (True if changed is None else moved == changed)
            assert np.array_equal(held, wanted.astype(int))
