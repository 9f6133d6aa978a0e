"""Planning a board from beginning to end: hopeless channels, conflicts, interrupts, little time."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest

from optimizer.planning import plan
from optimizer.planning.audit import audited
from optimizer.planning.outline import Limits, Outline, Rules, Solve
from optimizer.planning.plan import Planned, Refusal, Stage
from optimizer.planning.plan_board import plan_board
from optimizer.planning.reading import read_board
from optimizer.search.shortlist import shortlist
from tests.planning.brute import Brute
from tests.planning.held import wrongs
from tests.planning.test_exact import board, planned
from tests.planning.test_rules import amplifier, asked, parts
from tests.planning.tiny import drawn, outline_of
from tests.search.made import opamp

SONDE = Path(__file__).parents[2] / "examples" / "sonde-board" / "board.toml"


class TestHopeless:
    HELD = parts(amplifier("YZA-1", 1.0))

    def board(self) -> Outline:
        hard = asked(targets={"snr": 120.0})
        channels = [
            ("good", 2, asked(), self.HELD),
            ("late", 1, hard, self.HELD),
            ("hard", 2, hard, self.HELD),
        ]
        return outline_of(channels, limits=Limits(cost=0.01))

    def test_it_is_named_before_any_limit(self) -> None:
        answer = plan_board(self.board())
        assert answer.status == plan.INFEASIBLE
        assert answer.plans == ()
        assert answer.refusal is not None
        assert [one.channel for one in answer.refusal.hopeless] == ["late", "hard"]
        assert answer.refusal.limits == ()

    def test_it_has_the_explanation_of_its_own_shortlist(self) -> None:
        outline = self.board()
        answer = plan_board(outline)
        assert answer.refusal is not None
        study = outline.channels[1].study
        own = shortlist(study.request, study.catalogs)
        for one in answer.refusal.hopeless:
            assert one.blocking == own.blocking == ("snr",)
            assert [c.opamp for c in one.near_misses] == [c.opamp for c in own.near_misses]
            assert one.near_misses[0].missed == ("snr",)

    def test_a_stock_too_small_for_all_copies_is_no_hopeless_channel(self) -> None:
        held = parts(opamp(**(amplifier("YZA-1", 1.0) | {"stock": 15.0})))
        answer = plan_board(outline_of([("one", 2, asked(), held)]))
        assert answer.status == plan.INFEASIBLE
        assert answer.refusal is not None
        assert not answer.refusal.hopeless
        assert answer.refusal.channels == ("one",)


class TestConflict:
    """On tiny boards without plans."""

    SEEDS = (1071, 1098, 1141)

    @pytest.mark.parametrize("seed", SEEDS)
    def test_it_is_a_conflict_and_nothing_in_it_is_idle(self, seed: int) -> None:
        outline, refusal = refused(seed)
        assert refusal.channels
        assert Brute(only(outline, refusal.limits, refusal.channels)).cost is None
        if refusal.smallest:
            for limits, channels in without_one(refusal):
                assert Brute(only(outline, limits, channels)).cost is not None

    @pytest.mark.parametrize("seed", SEEDS)
    def test_the_least_that_each_limit_must_give_is_what_trying_everything_finds(self, seed: int) -> None:
        outline, refusal = refused(seed)
        brute = Brute(outline)
        stated = [r.name for r in refusal.relaxations]
        assert stated == [name for name in LIMITS if limit_of(outline, name)]
        for one in refusal.relaxations:
            least = brute.least(one.name)
            if one.proven:
                scale = 100 * outline.quantity if one.name == "cost" else 1
                assert (one.least is None) == (least is None)
                assert least is None or one.least == pytest.approx(least / scale, rel=1e-9)
            elif one.least is not None:
                assert least is not None


LIMITS = ("cost", "supply_current", "area", "line_items", "opamp_parts")


def limit_of(outline: Outline, name: str) -> float | None:
    if name == "opamp_parts":
        return outline.rules.opamp_parts or None
    return getattr(outline.limits, name)


@cache
def refused(seed: int) -> tuple[Outline, Refusal]:
    answer = planned(seed)
    assert answer.refusal is not None
    return board(seed).outline, answer.refusal


def only(outline: Outline, limits: tuple[str, ...], channels: tuple[str, ...]) -> Outline:
    """The board of some channels under some of its limits."""
    kept = {name: getattr(outline.limits, name) if name in limits else None for name in LIMITS[:4]}
    most = outline.rules.opamp_parts if "opamp_parts" in limits else 0
    return replace(
        outline,
        channels=tuple(c for c in outline.channels if c.name in channels),
        limits=Limits(**kept),
        rules=Rules(outline.rules.opamp_sources, most),
    )


def without_one(refusal: Refusal) -> Iterator[tuple[tuple[str, ...], tuple[str, ...]]]:
    """The conflict without each of its limits in turn."""
    for name in refusal.limits:
        yield tuple(other for other in refusal.limits if other != name), refusal.channels


class TestInterrupt:
    """The user stops at the n-th word of progress, for every n."""

    SEED = 1004

    @staticmethod
    def stopping(at: int, said: list[Stage]) -> Callable[[Stage], None]:
        def tell(stage: Stage) -> None:
            said.append(stage)
            if len(said) == at:
                raise KeyboardInterrupt

        return tell

    @pytest.mark.parametrize("seed", [SEED, 1071])
    def test_there_is_an_answer_at_whatever_time(self, seed: int) -> None:
        outline = drawn(seed)
        brute, every = Brute(outline), list[Stage]()
        whole = plan_board(outline, every.append)
        assert len(every) >= 3
        some = set()
        for at in (*range(1, 6), *range(6, len(every) + 1, 5)):
            said = list[Stage]()
            answer = plan_board(outline, self.stopping(at, said))
            # a search that takes other turns may end with fewer words
            if len(said) >= at:
                assert answer.status in (plan.INTERRUPTED, whole.status)
                found = wrongs(brute, answer)
                assert [one for one in found if answer.plans or "no plan was found" not in one] == []
                some.add(bool(answer.plans))
        assert whole.plans == () or True in some

    def test_later_words_change_nothing_that_is_known(self) -> None:
        """The costs that are told never rise, and bounds never fall."""
        said = list[Stage]()
        plan_board(drawn(self.SEED), said.append)
        costs = [stage.cost for stage in said if stage.cost is not None]
        bounds = [stage.bound for stage in said if stage.bound is not None]
        assert costs == sorted(costs, reverse=True)
        assert bounds == sorted(bounds)
        assert all(stage.seconds >= 0.0 for stage in said)


class TestTime:
    @staticmethod
    @cache
    def sonde() -> tuple[Outline, Planned]:
        outline = replace(read_board(SONDE), solve=Solve(plans=2, time=0.5))
        return outline, plan_board(outline)

    def test_half_a_second_gives_a_usable_plan(self) -> None:
        outline, answer = self.sonde()
        assert answer.plans
        for one in answer.plans:
            audited(outline, one)
            assert one.bound <= one.cost
        assert answer.faults == ()

    def test_and_says_honestly_how_far_it_is_proven(self) -> None:
        _, answer = self.sonde()
        first = answer.plans[0]
        assert answer.floor is not None
        assert answer.floor <= first.cost
        if answer.status == plan.OPTIMAL:
            assert first.proven in (plan.CATALOGS, plan.POOLS)
            assert first.bound == first.cost
        else:
            assert answer.status == plan.WITHIN
            assert first.proven == plan.UNPROVEN


@pytest.mark.parametrize("seed", [1004, 1057, 1131])
def test_the_same_inputs_give_the_same_plans_where_they_are_proven(seed: int) -> None:
    one, other = plan_board(drawn(seed)), plan_board(drawn(seed))
    assert one.status == other.status == plan.OPTIMAL
    assert one.plans[0] == other.plans[0]
    assert [p.cost for p in one.plans] == [p.cost for p in other.plans]
