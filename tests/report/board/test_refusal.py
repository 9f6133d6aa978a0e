"""Why there is no plan: hopeless channels first, then the conflict, then what would let a plan through."""

from __future__ import annotations

from dataclasses import replace

import pytest

from optimizer.planning.plan import NOTHING, Refusal, Relaxation
from optimizer.report.board import brief
from optimizer.report.board.refusal import conflict_words
from tests.planning import made_plan
from tests.report.board.shown import data, printed, sections, words

EASED = """\
One limit alone eased
limit       stated  lets a plan through
---------------------------------------
cost          9.50                 9.83  the least that does
line_items      14                   15  will do; a lesser change might
Easing one of these alone, however far, lets no plan through: supply_current
(2.2 mA).
Of these no value that lets a plan through was found in the time: area
(500 mm2).
"""


def test_the_conflict_and_the_least_relaxations() -> None:
    text = printed(made_plan.refused())
    assert "No plan meets the board, which is proven." in text
    assert EASED in text
    assert (
        "cost and line_items with gate and colour cannot be met together; no fewer are in conflict."
        in words(made_plan.refused())
    )


@pytest.mark.parametrize(
    ("limits", "channels", "smallest", "said"),
    [
        (("cost",), ("gate",), True, "cost with gate cannot be met together; no fewer are in conflict."),
        (
            ("cost", "area"),
            (),
            False,
            "The limits on cost and area cannot be met together; perhaps fewer are in conflict.",
        ),
        (("line_items",), (), True, "The limit on line_items cannot be met, whatever the rest."),
        (
            (),
            ("gate", "colour"),
            True,
            "The channels gate and colour cannot be met together; no fewer are in conflict.",
        ),
        ((), ("gate",), True, "The channel gate cannot be met, whatever the rest."),
        ((), (), False, ""),
    ],
)
def test_the_conflict_in_words(
    limits: tuple[str, ...], channels: tuple[str, ...], smallest: bool, said: str
) -> None:
    refusal = Refusal(limits=limits, channels=channels, smallest=smallest)
    assert conflict_words(data(made_plan.refused(refusal))) == said


def test_what_is_shown_for_the_candidates_alone_is_not_called_proof() -> None:
    planned = replace(made_plan.refused(pools=made_plan.pools()), status=NOTHING)
    said = words(planned)
    assert "No plan was found: the candidates looked at, which are not all, give none. Others might." in said
    assert "Among the candidates looked at: cost and line_items with gate and colour cannot be met" in said
    assert "Among the candidates looked at: one limit alone eased limit stated" in said
    assert "some of what was left out could make a plan possible" in said
    assert "which is proven" not in said


def test_what_is_proven_is_not_doubted_for_cut_pools() -> None:
    said = words(made_plan.refused(pools=made_plan.pools()))
    assert "No plan meets the board, which is proven." in said
    assert "what was left out cannot make a plan possible" in said
    assert "could make a plan possible" not in said


def test_values_are_told_apart_from_their_limits() -> None:
    close = Refusal(limits=("area",), relaxations=(Relaxation("area", 500e-6, 500.4e-6, proven=True),))
    assert "area 500 mm2 500.4 mm2 the least that does" in words(made_plan.refused(close))


def test_hopeless_channels_come_with_their_own_explanation() -> None:
    hopeless = made_plan.hopeless()
    text = printed(made_plan.refused(Refusal(hopeless=(hopeless,))), 120)
    said = " ".join(text.split())
    assert "There is no plan: a channel that nothing meets by itself cannot be on any board." in said
    assert "Nothing meets the request of ambient, ambient.toml." in said
    assert "Dropping this one target would let something through: snr." in said
    near = sections(text)["Near misses: 3 eligible pairs that miss a target, the nearest miss first"]
    assert [line.split()[1:3] for line in near if line.split()[0] in ("1", "2", "3")] == [
        [row.photodiode, row.opamp] for row in hopeless.near_misses
    ]
    pairs = sum(hopeless.dropped.values())
    assert f"Why {pairs} pairs dropped out" in said
    assert "cannot be met" not in said


def test_what_no_part_could_meet_is_said() -> None:
    reason = "snr: the shot noise of the weakest light alone is above it"
    dark = replace(made_plan.hopeless(), impossible=(reason,), near_misses=(), dropped={}, blocking=())
    said = words(made_plan.refused(Refusal(hopeless=(dark,))))
    assert f"No part could meet this request, so nothing was searched: - {reason}" in said


def test_hopeless_channels_stand_first() -> None:
    both = Refusal(hopeless=(made_plan.hopeless(),), limits=("cost", "area"), channels=("gate",))
    said = words(made_plan.refused(both))
    assert said.index("Nothing meets the request of ambient") < said.index("cost and area with gate")


def test_quiet_says_why_there_is_none() -> None:
    text = printed(made_plan.refused(), draw=brief)
    assert text.startswith("No plan meets the board, which is proven.\n")
    assert EASED in text
    assert "What was looked at" not in text
