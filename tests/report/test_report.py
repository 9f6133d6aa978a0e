"""The report on made-up outcomes: everything is said, nothing is cut, nothing drives the terminal."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace

import pytest

from optimizer.record import Record
from optimizer.record.build import plain
from optimizer.report import report, table_only, to_text
from optimizer.report.interrupted import interrupted
from optimizer.search.result import Progress
from tests.made_up import CANDIDATE, DIVIDER, FIGURES, MISS, outcome, record

WIDTHS = [60, 66, 72, 80, 100, 120, 160, 200]
LONG = replace(
    CANDIDATE,
    photodiode="<script>alert(1)</script>-" + "X" * 60,
    opamp="[bold]=CMD|' /C calc'!A0[/bold]",
    opamp_maker="maker\x1b[31m",
    wiring="falling-unbiased",
    reference=DIVIDER,
    feedback_resistance=953e3,
    feedback_capacitance=0.0,
    capacitor_family=None,
    assumed=("opamp.current_noise", "opamp.open_loop_gain"),
    limiting="supply_current",
    margin=0.0312,
    linear_model=("output_noise_dark", "dynamic_range"),
)
FULL = record(outcome((CANDIDATE, LONG), (MISS,)))


def text_of(made: Record, width: int = 80) -> str:
    return to_text(report(made, width), colour=False)


def joined(text: str) -> str:
    return re.sub(r"\s+", " ", text)


@pytest.mark.parametrize("width", WIDTHS)
def test_no_line_is_wider_than_the_terminal(width: int) -> None:
    filtered = plain(record(outcome((LONG, replace(CANDIDATE, low_pass=50e3)))).data)
    filtered["request"]["space"]["low_pass"] = ["none", 50e3]
    nothing = record(outcome((), (MISS, MISS)))
    impossible = record(outcome((), (), impossible=("x " * 90,)))
    for made in (FULL, Record(filtered), nothing, impossible):
        too_wide = [line for line in text_of(made, width).split("\n") if len(line) > width]
        assert too_wide == []


@pytest.mark.parametrize("width", WIDTHS)
def test_nothing_of_a_long_name_is_cut(width: int) -> None:
    for chosen, times in ((None, 1), (1, 2)):  # in the table, and again in the chosen row's own list
        text = text_of(record(outcome((LONG,)), chosen=chosen), width)
        assert text.count("X") == 60 * times
        assert re.sub(r"\s", "", text).count("[bold]") == times
        assert max(len(line) for line in text.split("\n")) <= width


@pytest.mark.parametrize("width", WIDTHS)
def test_the_table_says_what_the_issue_asks_for(width: int) -> None:
    text = joined(text_of(record(), width))
    for word in ("YZD-21", "YZA-14", "rising-", "ground", "1 Mohm", "4.7 pF", "24.1 kHz", "48.1 dB"):
        assert word in text
    for word in ("92.5 dB", "1.23 mA", "3.21", "full_scale,", "10 % to spare"):
        assert word in text
    for heading in ("photodiode", "op-amp", "wiring", "Vref", "Rf", "Cf", "bandwidth", "SNR", "cost"):
        assert heading in text
    assert "limiting target" in text


def test_a_wide_terminal_takes_one_line_a_row() -> None:
    many = record(outcome((CANDIDATE,) * 3), chosen=None)
    wide = to_text(table_only(many, 160), colour=False).strip().split("\n")
    assert sum("YZD-21" in line and "full_scale, 10 % to spare" in line for line in wide) == 3


def test_plain_output_has_no_escape_codes_and_no_boxes() -> None:
    text = text_of(FULL)
    assert "\x1b" not in text
    assert not re.search("[\u2500-\u257f]", text)


def test_colour_is_never_the_only_sign() -> None:
    coloured = to_text(report(FULL, 80), colour=True)
    assert "\x1b[" in coloured
    assert re.sub(r"\x1b\[[0-9;]*m", "", coloured) == text_of(FULL)


def test_the_chosen_row_is_marked_and_given_in_full() -> None:
    made = record(outcome((CANDIDATE, replace(LONG, photodiode="YZD-9"))), chosen=2)
    assert "> 2" in text_of(made)
    text = joined(text_of(made))
    assert "Row 2, chosen" in text
    assert "47 kohm from V+" in text
    assert "second package" in text
    assert "bypassed by 100 nF" in text
    assert "no capacitor placed" in text


def test_assumed_values_are_marked_and_explained() -> None:
    text = joined(text_of(FULL, 120))
    assert "* assumed where the catalog leaves a blank" in text
    assert "opamp.open_loop_gain = 100 dB (row 2)" in text
    assert "92.5 dB^" in text
    assert "linear model" in text
    assert "* assumed" not in text_of(record())


@pytest.mark.parametrize(
    ("marked", "said"),
    [
        (range(1, 301), "= 100 dB (every row)"),
        (range(1, 300), "= 100 dB (rows 1-299)"),
        ((28, 29, *range(34, 46)), "= 100 dB (rows 28, 29, 34-45)"),
        (range(2, 17, 2), "= 100 dB (rows 2, 4, 6, 8, 10, 12, 14, 16)"),
        (range(2, 19, 2), "= 100 dB (in 9 rows)"),
        ((7,), "= 100 dB (row 7)"),
    ],
)
def test_the_rows_of_a_footnote_are_named_while_they_are_few(marked: Sequence[int], said: str) -> None:
    blank = replace(CANDIDATE, assumed=("opamp.open_loop_gain",))
    rows = tuple(blank if rank in marked else CANDIDATE for rank in range(1, 301))
    text = to_text(table_only(record(outcome(rows)), 80), colour=False)
    footnote = text[text.index("* assumed") :]
    assert said in joined(footnote)
    assert len(footnote) < 160


def test_an_assumed_value_of_the_request_is_given_in_units() -> None:
    made = record(outcome((replace(CANDIDATE, assumed=("opamp.output_low",)),)))
    data = plain(made.data)
    data["request"]["assume"] = {"opamps": {"output_low": 0.05}}
    assert "opamp.output_low = 50 mV (row 1)" in joined(text_of(Record(data)))


def test_near_misses_say_what_they_miss_and_by_how_much() -> None:
    text = joined(text_of(FULL))
    assert "Near misses: 1 eligible pair that misses a target" in text
    assert "snr misses by under 0.01 % (45.9999 dB, needs 46 dB)" in text
    assert "cost misses by 10 % (5.00, at most 4.50)" in text
    assert "dynamic_range does not exist here (needs 80 dB)" in text


def test_why_the_rest_dropped_out_with_counts() -> None:
    text = joined(text_of(FULL, 120))
    assert "Why 59,999 other pairs dropped out" in text
    assert "31,200 wavelength wavelength outside" in text
    assert "16,799 cannot_beat proved unable to beat" in text


def test_what_was_covered_and_that_it_is_proven() -> None:
    text = joined(text_of(FULL))
    assert "12.3 million million combinations" in text
    assert "The ranking is proven" in text
    unproven = joined(text_of(record(outcome(proven=False))))
    assert "NOT PROVEN" in unproven
    assert "The ranking is proven" not in unproven


def test_an_interrupted_search_claims_no_more_than_was_proved() -> None:
    last = Progress(40, 30, 12, None)
    text = joined(to_text(interrupted(record(outcome(proven=False)), last, 80), colour=False))
    assert "30 of the 40 pairs whose parts are eligible" in text
    assert "NOT proven" in text
    assert "YZD-21" in text
    nothing = joined(to_text(interrupted(record(outcome((), (), proven=False)), None, 80), colour=False))
    assert "Nothing had been proved yet." in nothing
    assert "proves nothing yet" in nothing
    done = joined(to_text(interrupted(record(outcome(proven=True)), last, 80), colour=False))
    assert done.strip().endswith("The ranking above is proven; near misses and counts were not finished.")
    assert "YZD-21" in done
    assert "open" not in done
    none = joined(to_text(interrupted(record(outcome((), (), proven=True)), last, 80), colour=False))
    assert "Nothing meets the request, which is proven" in none


@pytest.mark.parametrize("last", [None, Progress(40, 20, 12, None)])
def test_interrupted_workers_claim_nothing_of_what_they_had_found(last: Progress | None) -> None:
    """Pairs that one worker has decided may have met the request: its rows are lost all the same."""
    nothing = record(outcome((), (), proven=False))
    text = joined(to_text(interrupted(nothing, last, 80, workers=2), colour=False))
    assert "Nothing is proven yet, and what the workers had found by then is lost" in text
    assert "decided" not in text
    assert "Nothing found" not in text
    proven = record(outcome((), (), proven=True))
    text = joined(to_text(interrupted(proven, last, 80, workers=2), colour=False))
    assert "Nothing meets the request, which is proven" in text
    assert "lost" not in text


@pytest.mark.parametrize(
    ("blocking", "said"),
    [
        (("snr",), "Dropping this one target would let something through: snr."),
        (("snr", "cost"), "Dropping any one of these targets would let something through: snr, cost."),
        ((), "No single target, if dropped, would let something through."),
    ],
)
def test_when_nothing_meets_the_nearest_miss_comes_first(blocking: tuple[str, ...], said: str) -> None:
    text = joined(text_of(record(outcome((), (MISS,), blocking=blocking))))
    assert said in text
    order = [
        text.index(part) for part in ("Nothing meets", "the nearest miss first", "Why 59,999", "Covered")
    ]
    assert order == sorted(order)


def test_the_targets_that_the_nearest_miss_misses_are_named_worst_first() -> None:
    text = joined(text_of(record(outcome((), (MISS,)))))
    assert "The nearest miss misses dynamic_range, cost and snr: it is the setting whose worst" in text
    assert "must give" not in text
    one = replace(MISS, targets=tuple(t for t in MISS.targets if t.name not in ("dynamic_range", "cost")))
    text = joined(text_of(record(outcome((), (one, MISS), blocking=("snr",)))))
    assert "would let something through: snr. The nearest miss misses snr alone." in text
    assert "The nearest miss misses" not in text_of(FULL)


def test_when_no_pair_is_eligible_the_report_says_so() -> None:
    assert "No pair is eligible" in text_of(record(outcome((), ())))


def test_an_impossible_request_is_explained_without_a_table() -> None:
    made = record(outcome((), (), impossible=("snr: the shot noise alone allows 41.2 dB",)))
    for text in (text_of(made), to_text(table_only(made, 80), colour=False)):
        assert "No part could meet this request" in text
        assert "- snr: the shot noise alone allows 41.2 dB" in text
        assert "photodiode" not in text


def test_quiet_prints_the_table_alone() -> None:
    text = to_text(table_only(FULL, 80), colour=False)
    assert "YZD-21" in text
    assert "Caution" not in text
    assert "Covered" not in text
    assert "Near misses" not in text


def test_low_pass_has_a_column_where_one_may_be_chosen() -> None:
    data = plain(record(outcome((replace(CANDIDATE, low_pass=50e3),))).data)
    assert "low-pass" not in to_text(table_only(Record(data), 160), colour=False)
    data["request"]["space"]["low_pass"] = ["none", 50e3]
    text = to_text(table_only(Record(data), 160), colour=False)
    assert "low-pass" in text
    assert "50 kHz" in text


def test_two_makers_of_one_part_name_are_told_apart() -> None:
    other = replace(CANDIDATE, opamp_maker="Quillfen Devices")
    text = to_text(table_only(record(outcome((CANDIDATE, other))), 160), colour=False)
    assert "YZA-14 (Quillfen Devices)" in text
    assert "YZA-14 (Yonderbeck Analog)" in text
    assert "YZD-21 (" not in text


def test_figures_that_do_not_exist_are_a_dash() -> None:
    none = replace(CANDIDATE, figures=dict.fromkeys(FIGURES))
    lines = to_text(table_only(record(outcome((none,))), 160), colour=False).split("\n")
    row = next(line for line in lines if "YZD-21" in line)
    assert len(re.findall(r" -(?= |$)", row)) == 5


def test_left_out_rows_are_counted() -> None:
    data = plain(record().data)
    data["left_out"] = [{"file": "opamps.csv", "rows": 1234}]
    assert "1,234 rows, opamps.csv (1,234)" in joined(text_of(Record(data)))
