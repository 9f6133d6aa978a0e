"""What can serve in place of each part, against every choice of small boards."""

from __future__ import annotations

from collections import Counter

from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.search.change.positions import USES
from optimizer.search.change.serving import serving
from optimizer.search.query import whole as compiled
from tests.search import board_answers, boards
from tests.search.boards import Case


def said(one: Case, use: str) -> tuple[set[str], set[str]]:
    space = compiled(one.request, one.catalogs)
    found = serving(space, one.catalogs, boards.plan_of(one, space), use)
    return {name for name, _ in found.drop_ins}, {name for name, _ in found.values}


@settings(max_examples=28, deadline=None, derandomize=True)
@given(seed=st.integers(0, 999))
def test_equals_every_choice(seed: int) -> None:
    for use, one in board_answers.each_gone(boards.case(seed)):
        assert said(one, use) == board_answers.served(one, use), use


def test_the_boards_are_worth_testing() -> None:
    """Among them are parts of every use that have drop-ins, that need values changed, that have nothing."""
    kinds = Counter[str]()
    for seed in range(90):
        for use, one in board_answers.each_gone(boards.case(seed)):
            drop_ins, values = said(one, use)
            kinds[f"{use} drop-in"] += bool(drop_ins)
            kinds[f"{use} values"] += bool(values)
            kinds["nothing"] += not drop_ins and not values
    for use in USES:
        assert kinds[f"{use} drop-in"] >= 2, kinds
    for use in ("opamp", "feedback_resistance", "feedback_capacitance", "divider"):
        assert kinds[f"{use} values"] >= 1, kinds
    assert kinds["nothing"] >= 5, kinds
