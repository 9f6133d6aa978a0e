"""The report on real parts: corners are named, yields are marked, each mode says what its figures are."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import pytest

from optimizer.record import Record
from optimizer.report import report, table_only, to_text
from optimizer.report.cautions import left_out
from optimizer.report.corner import AXES, corner_words, deviation
from optimizer.report.interrupted import interrupted
from optimizer.report.words import share
from optimizer.request.types import SPREADS
from optimizer.search.result import Candidate, Simulated, TargetValue, Unusable
from optimizer.search.spread.spreads import AXES as DEVIATING
from tests.made_up import CANDIDATE, CORNERED, CORNERS, DRAWN, MISS, REQUEST, outcome, record

WIDTHS = [60, 66, 72, 80, 100, 120, 160, 200]
EVERYWHERE = dict.fromkeys(DEVIATING, -0.125)
NOMINAL = replace(CORNERS, tolerance=replace(CORNERS.tolerance, method="nominal"))
NEAR = replace(
    MISS,
    targets=(
        TargetValue("snr", 48.1, 46.0, -0.04, 45.7, {"gbw": -0.3, "feedback_resistance": -0.01}),
        TargetValue("bandwidth", 20e3, 20e3, -1.0, None, {"gbw": 0.3}),
        TargetValue("cost", 4.6, 4.5, -0.0217, 4.6, {}),
    ),
    limiting="bandwidth",
    missed=("snr", "bandwidth", "cost"),
)
UNKNOWN = replace(CORNERED, simulated=Simulated(draws=0, unknown=("resistor.tolerance", "resistor.tempco")))
BELOW = replace(
    CORNERED,
    simulated=replace(DRAWN, passed=9_500, yield_=0.95, low=0.9456, high=0.9541, failures={"snr": 500}),
)


def text_of(made: Record, width: int = 80) -> str:
    return to_text(report(made, width), colour=False)


def joined(text: str) -> str:
    return re.sub(r"\s+", " ", text)


def said(*rows: Candidate, request: Any = CORNERS, **changes: Any) -> str:
    return joined(text_of(record(outcome(rows, **changes), request)))


def without_draws(candidate: Candidate) -> Candidate:
    return replace(candidate, simulated=None)


# Corners in words


def test_everything_that_may_deviate_has_words() -> None:
    assert tuple(AXES) == DEVIATING
    assert set(SPREADS) <= set(AXES)


@pytest.mark.parametrize(
    ("fraction", "words"),
    [(-0.3, "-30 %"), (0.0115, "+1.15 %"), (-0.0021, "-0.21 %"), (0.2, "+20 %"), (1e-7, "+0.00001 %")],
)
def test_deviations_have_a_sign_and_sensible_digits(fraction: float, words: str) -> None:
    assert deviation(fraction) == words


def test_the_farthest_deviation_comes_first() -> None:
    corner = {"feedback_resistance": -0.01, "divider_top": 0.01, "gbw": -0.3, "voltage_noise": 0.2}
    assert joined(corner_words(corner)) == "gbw -30 %, voltage noise +20 %, Rf -1 %, R1 +1 %"


# The table


@pytest.mark.parametrize("width", WIDTHS)
def test_no_line_is_wider_than_the_terminal_and_no_deviation_is_parted(width: int) -> None:
    wide = replace(CORNERED, targets=(replace(CORNERED.targets[0], corner=EVERYWHERE), *CORNERED.targets[1:]))
    near = replace(NEAR, targets=(replace(NEAR.targets[0], corner=EVERYWHERE),), limiting="snr", margin=-0.04)
    for rows in ((wide, UNKNOWN, BELOW), (CORNERED,)):
        text = text_of(record(outcome(rows, (near,)), CORNERS), width)
        assert max(len(line) for line in text.split("\n")) <= width
        for axis in AXES.values():
            assert f"{axis} -12.5 %" in text or rows == (CORNERED,)


@pytest.mark.parametrize("width", [80, 120])
def test_the_limiting_target_names_its_corner(width: int) -> None:
    lines = to_text(table_only(record(outcome((CORNERED,)), CORNERS), width), colour=False)
    assert "bandwidth, 0.4 % to spare at gbw -30 %, Rf +1.15 %" in joined(lines)
    assert " at " not in to_text(table_only(record(), width), colour=False)


def test_a_target_that_exists_at_nominal_only_does_not_exist() -> None:
    lost = replace(CORNERED, targets=(replace(CORNERED.targets[0], worst=None, margin=-1.0),), margin=-1.0)
    assert "bandwidth, does not exist at gbw -30 %" in said(lost)


def test_yields_stand_in_the_table_where_something_was_drawn() -> None:
    text = to_text(table_only(record(outcome((CORNERED, UNKNOWN)), CORNERS), 160), colour=False)
    assert re.search(r"cost +yield", text)
    assert "99.23 %" in text
    assert "unknown" in text
    assert "yield" not in to_text(table_only(record(), 160), colour=False)


@pytest.mark.parametrize(
    ("fraction", "words"),
    [
        (1.0, "100 %"), (0.9923, "99.23 %"), (0.99996, "99.996 %"), (0.999999, "99.9999 %"), (0.5, "50 %"),
        (0.0, "0 %"), (0.0001, "0.01 %"),
    ],
)  # fmt: skip
def test_a_share_never_looks_like_all_where_it_is_not(fraction: float, words: str) -> None:
    assert share(fraction) == words


def test_rows_below_the_yield_are_marked_and_the_mark_is_explained() -> None:
    text = to_text(table_only(record(outcome((CORNERED, BELOW, UNKNOWN)), CORNERS), 80), colour=False)
    assert re.search(r"^ *> 1 ", text, re.MULTILINE)
    assert re.search(r"^ *! 2 ", text, re.MULTILINE)
    assert re.search(r"^ *! 3 ", text, re.MULTILINE)
    note = "! the yield's 95 % interval begins below the 99 % asked for, or the yield is unknown (rows 2, 3)"
    assert note in joined(text)
    assert "yield unknown: resistor.tolerance and resistor.tempco are blank (row 3)" in joined(text)


def test_the_chosen_row_bears_both_marks() -> None:
    text = to_text(table_only(record(outcome((BELOW,)), CORNERS), 80), colour=False)
    assert re.search(r"^>! 1 ", text, re.MULTILINE)


def test_without_a_yield_asked_for_nothing_is_marked() -> None:
    free = replace(CORNERS, tolerance=replace(CORNERS.tolerance, yield_=None))
    text = said(BELOW, UNKNOWN, request=free)
    assert "!" not in text
    assert "asked for" not in text
    assert "yield unknown: resistor.tolerance and resistor.tempco are blank (row 2)" in text


# Above the table


def test_the_heading_says_what_was_graded() -> None:
    assert "One receiver that meets the request at every corner, lowest cost first" in said(CORNERED)
    assert "Nothing meets the request at every corner." in said(near_misses=(NEAR,))
    assert "One receiver that meets the request, lowest cost" in said(CANDIDATE, request=NOMINAL)
    quiet = to_text(table_only(record(outcome((), (NEAR,)), CORNERS), 80), colour=False)
    assert "Nothing meets the request at every corner." in quiet


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        (
            (CORNERED, BELOW),
            "1 of them is shown to reach the yield of 99 % asked for; the others stand last.",
        ),
        ((CORNERED, CORNERED, BELOW), "2 of them are shown to reach the yield of 99 % asked for; the others"),
        ((BELOW, UNKNOWN), "None of them is shown to reach the yield of 99 % asked for."),
        ((BELOW,), "It is not shown to reach the yield of 99 % asked for."),
    ],
)
def test_how_many_reach_the_yield_is_said_first(rows: tuple[Candidate, ...], words: str) -> None:
    assert words in said(*rows)
    assert "shown to reach the yield of" not in said(CORNERED)


# The chosen row


def test_each_target_stands_at_nominal_and_at_its_worst_corner() -> None:
    text = said(CORNERED)
    assert "target nominal worst limit margin" in text
    assert (
        "bandwidth 24.1 kHz 20.1 kHz at least 20 kHz 0.4 % to spare "
        "limiting, worst at gbw -30 %, Rf +1.15 %" in text
    )
    assert "full_scale 3.3 µW 3.15 µW at least 3 µW 5 % to spare worst at R1 -0.21 %" in text
    assert "cost 3.21 3.21 at most 4.50 40 % to spare no corner is worse" in text


def test_a_comfortable_margin_is_still_said_to_be_one() -> None:
    easy = replace(CORNERED.targets[1], margin=0.8)
    text = said(replace(CORNERED, targets=(CORNERED.targets[0], easy)))
    assert "comfortable, worst at gbw +30 %, Rf -1.15 %" in text


def test_the_yield_of_the_chosen_row_with_its_interval_and_what_fails() -> None:
    assert (
        "yield 9,923 of 10,000 receivers drawn at random meet the request: 99.23 %, 95 % interval 99.04 % to "
        "99.38 % (Wilson); reaches the 99 % asked for, by the interval's lower end; fails: snr in 0.6 %, "
        "full_scale in 0.2 %, dark_output in 0.01 % of them" in said(CORNERED)
    )
    assert "does not reach the 99 % asked for, by the interval's lower end; fails: snr in 5 %" in said(BELOW)
    assert "yield unknown: resistor.tolerance and resistor.tempco are blank" in said(UNKNOWN)


def test_too_few_draws_to_show_a_yield_are_said_to_be_so() -> None:
    few = Simulated(draws=100, passed=100, yield_=1.0, low=0.963, high=1.0, worst=DRAWN.worst)
    text = said(replace(CORNERED, simulated=few))
    assert "100 draws cannot show the 99 % asked for: state more draws" in text
    assert "fails:" not in text


# Near misses


def test_near_misses_are_held_to_their_worst_corner() -> None:
    text = said(near_misses=(NEAR,))
    assert "snr misses by 4 % at gbw -30 %, Rf -1 % (45.7 dB there, 48.1 dB at nominal, needs 46 dB)" in text
    assert "bandwidth does not exist at gbw +30 % (needs 20 kHz)" in text
    assert "cost misses by 2 % (4.60, at most 4.50)" in text
    assert "bandwidth, does not exist bandwidth does not" in text  # the corner stands in the line below alone


# Real parts


def test_the_spreads_and_what_a_corner_is_are_said() -> None:
    text = said(CORNERED)
    assert (
        "Every target is graded at the worst corner of these spreads: Rf, Cf and the divider's R1 (to V+) "
        "and R2 (to V-) by their families' tolerance, gbw 30 %, voltage noise 20 %, input capacitance 20 %. "
        "A corner is a vertex: every value at one of its two ends. Between the ends a figure may be worse."
    ) in text
    assert "Each row was drawn 10,000 times at random, uniformly within each spread (seed 1)." in text


def test_every_figure_that_a_draw_makes_worse_than_its_corner_is_named_with_both_values() -> None:
    assert (
        "Some draws made figures worse than their worst corner: snr 45.9 dB, not 46.3 dB (row 1); "
        "full_scale 2.9 µW, not 3.15 µW (row 1)." in said(CORNERED)
    )
    within = {"bandwidth": 20090.0, "snr": 46.265, "full_scale": 3.2e-6, "cost": 3.2134}
    inside = replace(CORNERED, simulated=replace(DRAWN, worst=within))
    assert "No draw made a figure worse than its worst corner." in said(inside)
    assert "Some draws" not in said(inside)


def test_a_figure_that_a_draw_loses_is_worse_than_any() -> None:
    lost = replace(CORNERED, simulated=replace(DRAWN, worst={**DRAWN.worst, "bandwidth": None}))
    assert "worst corner: bandwidth does not exist, not 20.1 kHz (row 1); snr" in said(lost)


def test_of_many_rows_the_farthest_are_named_and_the_others_counted() -> None:
    def worse(snr: float) -> Candidate:
        return replace(CORNERED, simulated=replace(DRAWN, worst={"snr": snr}))

    text = said(*(worse(snr) for snr in (46.0, 45.0, 46.2, 44.0, 45.5)))
    assert "snr 44 dB, not 46.3 dB (row 4), 45 dB, not 46.3 dB (row 2), 45.5 dB" in text
    assert "(row 5), less in 2 more rows." in text


def test_normal_draws_are_said_to_be_normal() -> None:
    normal = replace(CORNERS, tolerance=replace(CORNERS.tolerance, distribution="normal", seed=7))
    assert "at random, normally with each spread as 3 sigma, so that a few lie beyond it (seed 7)." in said(
        CORNERED, request=normal
    )


def test_nominal_grading_says_what_was_drawn_and_nothing_of_corners() -> None:
    text = said(replace(CANDIDATE, simulated=DRAWN), request=NOMINAL)
    assert "each spread (seed 1): Rf, Cf and the divider's R1" in text
    assert "corner" not in text
    assert "target value limit margin" in text


def test_rows_that_could_not_be_drawn_are_not_said_to_be() -> None:
    free = replace(NOMINAL, tolerance=replace(NOMINAL.tolerance, yield_=None))
    rows = (replace(CANDIDATE, simulated=DRAWN), replace(CANDIDATE, simulated=UNKNOWN.simulated))
    assert "Each row whose spreads are known was drawn 10,000 times" in said(*rows, request=free)
    assert "was drawn" not in said(rows[1], request=free)


def test_where_nothing_spreads_that_is_said() -> None:
    text = said(replace(CANDIDATE, simulated=replace(DRAWN, passed=10_000)))
    assert "Nothing spreads: no family and no line of [tolerance] states a spread; nominal values" in text
    assert "A corner is a vertex" not in text


def test_that_only_shown_rows_were_drawn_is_said_where_some_are_put_last() -> None:
    assert "Pairs without a row were not drawn: among more rows, one may reach it." in said(CORNERED, BELOW)
    assert "stand last. Pairs" not in said(CORNERED)
    assert "stand last. Pairs" not in said(UNKNOWN)


def test_without_tolerances_nothing_is_said_of_real_parts() -> None:
    text = joined(text_of(record()))
    for word in ("Real parts", "corner", "yield", "drawn"):
        assert word not in text


def test_an_interrupted_search_says_that_nothing_was_drawn() -> None:
    made = record(outcome((without_draws(CORNERED),), proven=True), CORNERS)
    text = joined(to_text(interrupted(made, None, 80), colour=False))
    assert "No random receivers were drawn, so the yields are unknown and change no rank." in text
    plain = joined(to_text(interrupted(record(), None, 80), colour=False))
    assert "drawn" not in plain


# Families that took no part


def test_families_left_out_for_a_blank_are_named() -> None:
    families = (
        Unusable("resistor", "YZR-9", "Maker C", ("tolerance", "tempco")),
        Unusable("capacitor", "<b>YZC", "Maker C", ("price",)),
    )
    words = (
        "Families that took no part, for the catalog leaves blank what the request needs: YZR-9 (resistor: "
        "tolerance and tempco), <b>YZC (capacitor: price)."
    )
    assert words in said(CORNERED, unusable=families)
    assert words in said(unusable=families, impossible=("no resistor family offers a priced value",))
    assert "took no part" not in said(CORNERED)


# What the model leaves out, in each mode


@pytest.mark.parametrize(
    ("request_", "words"),
    [
        ({}, ("temperature coefficients of R and C;", "Figures use nominal catalog values.")),
        (
            {"tolerance": {"method": "nominal"}},
            (
                "temperature coefficients of C;",
                "ranking use nominal catalog values; the yield alone is of real",
            ),
        ),
        (
            {"tolerance": {"method": "corners"}},
            ("temperature coefficients of C;", "margins, limiting target and ranking the worst corner."),
        ),
    ],
)
def test_what_is_left_out_is_true_of_the_request(request_: Mapping[str, Any], words: tuple[str, ...]) -> None:
    text = left_out(request_)
    for said_ in words:
        assert said_ in text
    assert ("parts that deviate together" in text) == bool(request_)


def test_the_report_says_what_is_left_out_of_its_own_request() -> None:
    for request in (REQUEST, NOMINAL, CORNERS):
        made = record(outcome((without_draws(CANDIDATE),)), request)
        assert joined(left_out(made.data["request"])) in joined(text_of(made))
