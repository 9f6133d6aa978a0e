"""The other plans as differences from the first, for pairs of plans made up so that the words are known."""

from __future__ import annotations

from dataclasses import replace

import pytest

from optimizer.planning.plan import CATALOGS, POOLS, UNPROVEN, BoardPlan, Build
from optimizer.report.board.differences import change_rows, difference_words, proof_words
from optimizer.search.result import Candidate
from tests.planning import made_plan
from tests.report.board.shown import of_plans, printed, words

FIRST = made_plan.plans()[0]


def with_totals(plan: BoardPlan, **values: float) -> BoardPlan:
    """`plan` with other totals; its cost follows, its limiting one is that with the least margin."""
    totals = tuple(replace(t, value=values.get(t.name, t.value)) for t in plan.totals)
    limited = [total for total in totals if total.margin is not None]
    least = min(limited, key=lambda total: total.margin or 0.0).name
    return replace(plan, totals=totals, limiting=least)


def with_margin(plan: BoardPlan, channel: str, target: str, margin: float) -> BoardPlan:
    """`plan` with another least margin of one channel."""
    builds = tuple(
        replace(b, candidate=replace(b.candidate, limiting=target, margin=margin))
        if b.channel == channel
        else b
        for b in plan.builds
    )
    return replace(plan, builds=builds)


def said(other: BoardPlan, first: BoardPlan = FIRST) -> str:
    document = of_plans(first, replace(other, rank=2))
    return difference_words(*document["plans"], document)


def changed(other: BoardPlan, first: BoardPlan = FIRST) -> list[tuple[str, str]]:
    document = of_plans(first, replace(other, rank=2))
    return change_rows(*document["plans"], document)


def test_what_is_saved_what_it_costs_and_which_margin_falls() -> None:
    """63.00 a build for 150 boards: 0.42 a board."""
    before = with_margin(FIRST, "colour", "snr", 0.10)
    other = with_margin(with_totals(before, line_items=11), "colour", "snr", 0.02)
    assert said(replace(other, cost=FIRST.cost + 6300), before) == (
        "saves one line item, costs 0.42 more a board (63.00 a build); colour's snr margin falls to 2 %"
    )


@pytest.mark.parametrize(
    ("other", "words_"),
    [
        (replace(FIRST, cost=FIRST.cost), "costs the same"),
        (replace(FIRST, cost=FIRST.cost - 150), "costs 0.01 less a board (1.50 a build)"),
        (
            with_totals(FIRST, line_items=10, packages=5),
            "saves two line items, takes one more op-amp package, costs the same",
        ),
        (with_totals(FIRST, packages=2), "saves two op-amp packages, costs the same"),
    ],
)
def test_money_line_items_and_packages(other: BoardPlan, words_: str) -> None:
    assert said(other) == words_


def test_the_limit_that_becomes_the_nearest_is_named() -> None:
    assert said(with_totals(FIRST, line_items=14)) == (
        "takes two more line items, costs the same; line_items limits the board then (exactly met)"
    )


@pytest.mark.parametrize(
    ("current", "moved"),
    [(2.178e-3, "falls to 1 %"), (2.09e-3, "rises to 5 %"), (2.2e-3, "falls to nothing")],
)
def test_the_nearest_limit_moves(current: float, moved: str) -> None:
    """Of 2.2 mA."""
    before = with_totals(FIRST, supply_current=2.156e-3)
    other = with_totals(before, supply_current=current)
    assert said(other, before) == f"costs the same; the board's supply_current margin {moved}"


@pytest.mark.parametrize(
    ("old", "new", "moved"),
    [
        (0.10, 0.30, "colour's least margin rises to 30 % (snr)"),
        (0.10, 0.0, "colour's snr margin falls to nothing"),
        (0.60, 0.40, "colour's snr margin falls to 40 %"),
    ],
)
def test_least_margins_of_channels_move(old: float, new: float, moved: str) -> None:
    before = with_margin(FIRST, "colour", "snr", old)
    assert said(with_margin(FIRST, "colour", "snr", new), before) == f"costs the same; {moved}"


@pytest.mark.parametrize(("old", "new"), [(0.6, 0.9), (0.101, 0.099)])
def test_comfortable_margins_are_alike_and_so_is_what_reads_the_same(old: float, new: float) -> None:
    before = with_margin(FIRST, "colour", "snr", old)
    assert said(with_margin(FIRST, "colour", "snr", new), before) == "costs the same"


def with_builds(*builds: Build) -> BoardPlan:
    """The first plan with other builds of the channels that these are of."""
    names = {build.channel for build in builds}
    return replace(FIRST, builds=(*(b for b in FIRST.builds if b.channel not in names), *builds))


def test_parts_that_change_are_told_by_channel() -> None:
    other = with_builds(made_plan.build("gate", "YZD-03", "YZA-21", (1, 2)))
    assert changed(other) == [
        ("gate", "photodiode YZD-01 -> YZD-03, op-amp YZA-22 -> YZA-21, other reference and Rf")
    ]


def test_copies_that_change_are_counted() -> None:
    other = with_builds(
        made_plan.build("colour", "YZD-01", "YZA-12", (2, 3)),
        made_plan.build("colour", "YZD-07", "YZA-12", (1,)),
    )
    assert changed(other) == [("colour", "photodiode YZD-01 -> YZD-07 in 1 of 3, other Rf")]


def test_several_parts_in_one_channel() -> None:
    other = with_builds(
        made_plan.build("colour", "YZD-03", "YZA-12", (1,)),
        made_plan.build("colour", "YZD-07", "YZA-12", (2, 3)),
    )
    ((channel, change),) = changed(other)
    assert channel == "colour"
    assert change.startswith("photodiode YZD-01 -> YZD-03 and YZD-07, other ")


def test_which_copy_is_built_how_does_not_matter() -> None:
    """Copies are alike: the same parts under other numbers are no change."""
    one = with_builds(
        made_plan.build("colour", "YZD-01", "YZA-12", (1, 2)),
        made_plan.build("colour", "YZD-07", "YZA-12", (3,)),
    )
    other = with_builds(
        made_plan.build("colour", "YZD-07", "YZA-12", (1,)),
        made_plan.build("colour", "YZD-01", "YZA-12", (2, 3)),
    )
    assert changed(other, one) == []


def passives(candidate: Candidate) -> Candidate:
    return replace(candidate, feedback_resistance=1e6, feedback_capacitance=1e-12, wiring="falling-biased")


def test_passives_are_summarised() -> None:
    gate = FIRST.builds[0]
    other = with_builds(replace(gate, candidate=passives(gate.candidate)))
    assert changed(other) == [("gate", "other wiring, Rf and Cf")]


def test_leaving_a_shared_level_changes_the_reference() -> None:
    ambient = next(build for build in FIRST.builds if build.channel == "ambient")
    assert changed(with_builds(replace(ambient, level=None))) == [("ambient", "other reference")]


def test_a_maker_alone_is_a_change() -> None:
    gate = FIRST.builds[0]
    assert changed(with_builds(replace(gate, opamp_maker="Quillfen Devices"))) == [
        ("gate", "op-amp YZA-22 -> YZA-22")
    ]


def test_packages_that_change_are_counted() -> None:
    """Two duals for the buffer's and a channel's two singles: no channel need change for that."""
    dual, *others = FIRST.packages
    singles = (replace(dual, opamp="YZA-21", amplifiers=1, places=dual.places[:1]),) * 2
    assert changed(replace(FIRST, packages=(*singles, *others))) == [("packages", "1 x YZA-22 -> 2 x YZA-21")]
    assert changed(replace(FIRST, packages=tuple(others))) == [("packages", "1 x YZA-22 -> none")]


def test_each_plan_says_whether_it_is_proven() -> None:
    first, two, three, four, five = made_plan.plans()
    every = (
        first,
        replace(two, proven=CATALOGS),
        replace(three, proven=POOLS),
        replace(four, proven=UNPROVEN, bound=four.cost - 1500),
        replace(five, proven=CATALOGS),
    )
    texts = list(proof_words(of_plans(*every)))
    assert texts[0] == "Each has other photodiodes or op-amps than all plans before it."
    assert (
        texts[1]
        == "Plans 2, 5: proven, no other such plan over everything that the requests admit costs less."
    )
    assert texts[2] == "Plan 3: proven, no other such plan over the candidates looked at costs less."
    assert texts[3].startswith("Plan 4: NOT PROVEN to be the cheapest such plan. The bound is ")
    assert "so at most 0.10 a board (15.00 a build, " in texts[3]


def test_the_whole_section() -> None:
    text = printed(width=120)
    at = text.index("Other plans")
    assert text[at:].startswith(
        "Other plans, by what differs from the first\n"
        "2  takes one more op-amp package, costs 0.37 more a board (55.50 a build)\n"
        "     gate      op-amp YZA-22 -> YZA-21\n"
        "     packages  1 x YZA-22 -> 2 x YZA-21\n"
        "3  takes one more line item, costs 0.81 more a board (121.50 a build)\n"
        "     ambient  photodiode YZD-01 -> YZD-03, other Cf\n"
    )
    assert "Plans 2-5: proven, no other such plan over the candidates looked at costs less." in words()


def test_one_plan_has_no_others() -> None:
    assert "Other plans" not in words(made_plan.planned(plans=(FIRST,), only=True))
