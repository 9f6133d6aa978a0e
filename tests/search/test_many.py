"""Many questions at once: the screen of pairs, floors, and that none changes the answer to another."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.search.weigh import many, steps
from optimizer.search.weigh.ground import Ground, lay_out
from optimizer.search.weigh.many import Many
from optimizer.search.weigh.questions import COST, Questions
from optimizer.search.weigh.screen import Screen
from optimizer.search.weigh.tradeoff import questions_of
from tests.search import made
from tests.search.changed import All, everything
from tests.search.instances import small
from tests.search.test_tradeoff import GOOD, is_small


def ground_of(seed: int) -> tuple[All, Ground] | None:
    request, catalogs = small(seed)
    ground = lay_out(request, catalogs)[1]
    return (everything(request, catalogs), ground) if ground and is_small(request, catalogs) else None


def exactly_met(every: All, rows: list[int]) -> Questions:
    """The request as it stands, then limits of which each is just what a setting of `rows` reaches."""
    limits = every.space.limits
    base = list(limits.values())
    asked = [base]
    for row in rows:
        for k, name in enumerate(limits):
            asked.append([*base[:k], float(every.values[name][row]), *base[k + 1 :]])
    return Questions(tuple(limits), np.array(asked), every.space.comfort)


@settings(max_examples=40, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_the_screen_lets_every_pair_through_that_serves(seed: int) -> None:
    """Each target tightened to what a setting has exactly: its pair must not be refused."""
    found = ground_of(seed)
    if found is None:
        return
    every, ground = found
    meets = np.flatnonzero(every.meets(every.space.limits))
    rows = np.random.default_rng(seed).permutation(meets)[:20].tolist()
    asked = exactly_met(every, rows)
    screen = Screen.of(ground.asked.index, ground.pairs, asked)
    for place, row in enumerate(rows):
        pair = (ground.pairs.opamp == every.choice.opamp[row]) & (
            ground.pairs.diode == every.choice.diode[row]
        )
        for k in range(len(asked.names)):
            question = 1 + place * len(asked.names) + k
            assert screen(question, np.flatnonzero(pair)).all(), (asked.names[k], row)


def test_the_screen_refuses_what_cannot_serve() -> None:
    parts = made.catalogs([made.opamp(), made.opamp(part="YZA-2", quiescent_current=4e-3)])
    request = made.request(targets={"supply_current": 5e-3})
    ground = lay_out(request, parts)[1]
    assert ground is not None
    questions = questions_of(ground.space)
    screen = Screen.of(ground.asked.index, ground.pairs, questions)
    tightest = questions.size - 1
    assert questions.names[-1] == "supply_current"
    refused = ~screen(tightest, np.arange(ground.pairs.size))
    assert set(ground.pairs.opamp[refused].tolist()) == {1}
    # looser limits than the request's are not screened
    assert screen(tightest - len(steps.STEPS) + 1, np.arange(ground.pairs.size)).all()


def solved(ground: Ground, asked: list[int], floor: float = -np.inf) -> Many:
    questions = questions_of(ground.space)
    index = ground.asked.index
    work = Many.of(index, questions, ground.pairs, lambda _question, places: np.ones(places.size, dtype=bool))
    work.best.floor[:] = floor
    many.solve(work, np.array(asked), lambda _work, _pool: None)
    return work


@settings(max_examples=15, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_questions_asked_together_are_answered_as_alone(seed: int) -> None:
    found = ground_of(seed)
    if found is None:
        return
    _, ground = found
    every = list(range(questions_of(ground.space).size))
    together = solved(ground, every)
    for question in every[::7]:
        alone = solved(ground, [question])
        assert np.array_equal(alone.best.key[question], together.best.key[question])


def test_a_floor_that_is_reached_changes_nothing() -> None:
    ground = lay_out(GOOD, made.catalogs())[1]
    assert ground is not None
    plain = solved(ground, [0])
    cost = float(plain.best.key[0, COST])
    assert np.array_equal(solved(ground, [0], floor=cost).best.key[0], plain.best.key[0])


def test_steps_are_taken_in_shares_and_questions_in_portions(monkeypatch: pytest.MonkeyPatch) -> None:
    """The answer does not depend on how much is done at once."""
    ground = lay_out(GOOD, made.catalogs([made.opamp(part=f"YZA-{k}") for k in range(4)]))[1]
    assert ground is not None
    every = list(range(questions_of(ground.space).size))
    usual = solved(ground, every)
    for name, size in (("BATCH", 7), ("SPLIT", 3), ("FEWEST", 1), ("LARGEST", 2), ("FIRST", 1)):
        monkeypatch.setattr(many, name, size)
    assert np.array_equal(solved(ground, every).best.key, usual.best.key)
