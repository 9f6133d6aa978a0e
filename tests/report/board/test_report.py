"""What `board` prints of a plan: blocks word for word, everything there, and no line too wide."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from optimizer.planning.outline import Limits, Wanted
from optimizer.planning.plan import Package, Place, Planned
from optimizer.record import read_board, write
from optimizer.report.board import brief, of_planned, report
from optimizer.report.cautions import GENERAL, NEAR_INFRARED, SOURCES, ULTRAVIOLET
from optimizer.search.result import Alternate
from tests.planning import made_plan
from tests.report.board.shown import printed, record, sections, words

HEAD = """\
sorting line, optical board
150 boards of 6 channels of 3 kinds: 7.14 a board, 1071.00 in all, in EUR
Proven: no plan over everything that the requests admit costs less.
Planned in 2.35 s with HiGHS.
"""
CHANNELS = """\
The plan, channel by channel
channel    photodiode  op-amp  wiring           reference
          Rf      Cf  limiting target
---------------------------------------------------------
gate x2    YZD-01      YZA-22  rising-biased    455 mV, own
    2.7 Mohm  1.6 pF  bandwidth, 24 % to spare
colour x3  YZD-01      YZA-12  rising-unbiased  455 mV, level 1
    6.8 Mohm  8.2 pF  full_scale, 42 % to spare
ambient    YZD-01      YZA-12  rising-unbiased  455 mV, level 1
     22 Mohm   24 pF  full_scale, 21 % to spare
"""
ON_ONE_LINE = """\
channel    photodiode  op-amp  wiring           reference              Rf      Cf  limiting target
--------------------------------------------------------------------------------------------------
gate x2    YZD-01      YZA-22  rising-biased    455 mV, own      2.7 Mohm  1.6 pF  bandwidth, 24 % to spare
"""
PACKAGES = """\
                                     amplifiers
packages  op-amp  maker                 in each  spare  serving
---------------------------------------------------------------
       1  YZA-22  Yonderbeck Analog           2      -  gate 1, 2
       1  YZA-12  Yonderbeck Analog           2      -  colour 1, 2
       1  YZA-12  Yonderbeck Analog           2      -  colour 3, ambient
       1  YZA-12  Yonderbeck Analog           2      1  buffer of level 1
4 packages with 8 amplifiers, 1 of them spare.

Shared reference levels
level    voltage   from V+    to V-  bypass  buffer  shared by
--------------------------------------------------------------
level 1   455 mV  100 kohm  10 kohm  100 nF  YZA-12  colour, ambient
"""
TOTALS = """\
Totals against limits
a board            used  limit            margin
------------------------------------------------
cost               7.14  at most 9.50     25 % to spare
supply_current  2.17 mA  at most 2.2 mA   1 % to spare, limiting
area            191 mm2  at most 500 mm2  62 % to spare
line_items           12  at most 14       14 % to spare
opamp_parts           2  -                -
packages              4  -                -
placements           31  -                -
"""
LOOKED_AT = """\
channel           combinations  pairs  candidates  left out
-----------------------------------------------------------
gate     1.23 thousand million     48         312  nothing that matters
colour             988 million     48       1,500  cut: at most 23,456 settings
ambient            988 million     48       1,500  cut: not counted
"""


@pytest.mark.parametrize("block", [HEAD, CHANNELS, PACKAGES, TOTALS], ids=lambda block: block.split("\n")[0])
def test_blocks_word_for_word(block: str) -> None:
    assert block in printed()


def test_where_there_is_room_a_channel_stands_on_one_line() -> None:
    assert ON_ONE_LINE in printed(width=120)


def test_what_was_looked_at_and_how_pools_were_cut() -> None:
    planned = made_plan.planned(pools=made_plan.pools())
    assert LOOKED_AT in printed(planned)
    assert "what was left out cannot be part of a plan cheaper than the first" in words(planned)
    assert "some of what was left out could be part of a cheaper plan" in words(planned)
    assert "Candidates were added in 2 rounds of search through every setting." in words(planned)


def test_the_sections_stand_in_order() -> None:
    assert [name.split(",")[0] for name in sections(printed())][:8] == [
        "sorting line",
        "The plan",
        "Op-amp packages",
        "Shared reference levels",
        "Bill of materials",
        "                                      a build  a board",
        "Totals against limits",
        "With each channel's cheapest receiver",
    ]
    assert words().index("Other plans") < words().index("What was looked at") < words().index("Caution:")


EVERY = (
    made_plan.planned,
    lambda: made_plan.planned(pools=made_plan.pools(), faults=("x" * 200,), notes=("a note " * 30,)),
    made_plan.refused,
    made_plan.nothing_found,
)


@pytest.mark.parametrize("made", EVERY)
@pytest.mark.parametrize("draw", [report, brief])
@pytest.mark.parametrize("width", [40, 60, 80, 120, 200])
def test_every_line_keeps_to_its_width(made: Any, draw: Any, width: int) -> None:
    assert printed(made(), width, draw=draw)


def renamed(planned: Planned, **names: str) -> Planned:
    """The first plan with other names in its bill."""
    first = planned.plans[0]
    bill = tuple(replace(line, **names) for line in first.bill)
    return replace(planned, plans=(replace(first, bill=bill),))


@pytest.mark.parametrize("width", [60, 80, 120])
def test_long_names_fold(width: int) -> None:
    long = renamed(
        made_plan.planned(), part="Q" * 30, maker="Grumbleworth and Daughters Semiconductor", package="W" * 25
    )
    text = printed(long, width)
    assert "".join(text.split()).count("Q") == 12 * 30 + 30  # and once more where one is bought beyond need


def test_names_cannot_drive_a_terminal() -> None:
    odd = renamed(made_plan.planned(), part="a\x1b[31mb", maker="c\nd\x07")
    assert "\x1b" not in printed(odd)
    assert "\x07" not in printed(odd)
    assert "a\\x1b[31mb" in printed(odd, 120)


def test_quiet_prints_the_plan_the_bill_and_the_totals() -> None:
    text = printed(draw=brief)
    assert [name.split(",")[0] for name in sections(text)] == [
        "The plan",
        "Bill of materials",
        "                                      a build  a board",
        "Totals against limits",
    ]
    assert CHANNELS in text
    assert TOTALS in text


def test_quiet_still_says_what_went_wrong_and_what_is_not_proven() -> None:
    first = replace(made_plan.plans()[0], proven="none", bound=100_000)
    planned = made_plan.planned(status="time limit", plans=(first,), faults=("CBC was killed",))
    said = words(planned, draw=brief)
    assert said.startswith("NOT PROVEN:")
    assert "A solver failed: CBC was killed" in said


def test_planned_boards_are_reported_directly_too() -> None:
    planned, outline = made_plan.planned(), made_plan.outline()
    direct = [line.plain for line in of_planned(planned, outline, 80)]
    assert direct == [line.plain for line in report(record(planned, outline), 80)]


def test_a_record_that_was_saved_reads_the_same(tmp_path: Path) -> None:
    made = record()
    write(made, tmp_path / "board.json")
    saved = read_board(tmp_path / "board.json")
    assert [line.plain for line in report(saved, 80)] == [line.plain for line in report(made, 80)]


def test_copies_that_are_built_differently_get_a_row_each() -> None:
    first = made_plan.plans()[0]
    gate, *others = first.builds
    other = made_plan.build("gate", "YZD-03", "YZA-22", (1,))
    split = (replace(gate, copies=(2,)), other, *others)
    lines = printed(made_plan.planned(plans=(replace(first, builds=split),)), 120).split("\n")
    assert [line.split()[:3] for line in lines if line.startswith("gate ")][:2] == [
        ["gate", "2", "YZD-01"],
        ["gate", "1", "YZD-03"],
    ]


def test_a_reference_is_ground_ones_own_or_shared() -> None:
    first = made_plan.plans()[0]
    gate = first.builds[0]
    reference = replace(gate.candidate.reference, kind="ground", voltage=0.0, top=None, bottom=None)
    grounded = replace(gate, candidate=replace(gate.candidate, reference=reference))
    planned = made_plan.planned(plans=(replace(first, builds=(grounded, *first.builds[1:])),))
    assert "rising-biased ground 2.7 Mohm" in words(planned, 120)
    assert "rising-unbiased 455 mV, level 1 6.8 Mohm" in words(planned, 120)


def test_what_is_assumed_is_marked_and_told_by_channel() -> None:
    first = made_plan.plans()[0]
    builds = tuple(
        replace(build, candidate=replace(build.candidate, assumed=("opamp.open_loop_gain",)))
        if build.channel != "gate"
        else build
        for build in first.builds
    )
    said = words(made_plan.planned(plans=(replace(first, builds=builds),)), 120)
    assert "YZA-12* rising-unbiased" in said
    assert (
        "* assumed where the catalog leaves a blank: opamp.open_loop_gain = 100 dB (colour, ambient)" in said
    )


def test_second_sources_are_told_by_channel() -> None:
    first = made_plan.plans()[0]
    gate, *others = first.builds
    twin = Alternate("YZA-99", "Quillfen Devices", 1.5, "snr", 0.1)
    doubled = replace(gate, candidate=replace(gate.candidate, alternates=(twin,)))
    text = printed(made_plan.planned(plans=(replace(first, builds=(doubled, *others)),)), 120)
    assert sections(text)["Second sources of op-amps"] == [
        "  gate x2  YZA-22 (Yonderbeck Analog) or, in the same package and pinout, YZA-99 (Quillfen Devices)"
    ]


def test_alike_packages_share_a_row_and_own_buffers_are_told() -> None:
    first = made_plan.plans()[0]
    quads = tuple(
        Package("YZA-4Q", "Yonderbeck Analog", 4, (Place("colour", copy), Place("colour", copy)))
        for copy in (1, 2, 3)
    )
    text = printed(made_plan.planned(plans=(replace(first, packages=quads),)), 120)
    row = next(line for line in text.split("\n") if "YZA-4Q" in line)
    assert row.split(maxsplit=6) == [
        *["3", "YZA-4Q", "Yonderbeck", "Analog", "4", "6"],
        "colour 1-3, buffer of colour 1-3",
    ]


def test_without_levels_or_limits_that_is_plain() -> None:
    first = replace(made_plan.plans()[0], levels=(), limiting=None)
    free = tuple(replace(total, limit=None) for total in first.totals)
    planned = made_plan.planned(plans=(replace(first, totals=free),))
    text = printed(planned, outline=made_plan.outline(limits=Limits()))
    assert "Shared reference levels" not in text
    assert "limiting\n" not in text
    assert "The board file states no limit on the whole board." in text


def test_an_unknown_area_is_said() -> None:
    first = made_plan.plans()[0]
    unknown = tuple(replace(t, value=None) if t.name == "area" else t for t in first.totals)
    said = words(made_plan.planned(plans=(replace(first, totals=unknown),)))
    assert "area unknown at most 500 mm2 unknown" in said


def test_a_use_is_told_apart_from_its_limit() -> None:
    first = made_plan.plans()[0]
    close = tuple(
        replace(t, value=2.1999e-3, limit=2.2e-3) if t.name == "supply_current" else t for t in first.totals
    )
    planned = made_plan.planned(plans=(replace(first, totals=close),))
    assert "supply_current 2.1999 mA at most 2.2 mA under 0.01 % to spare" in words(planned)


def test_cautions_of_all_channels_stand_once() -> None:
    """Green and red light need none of their own; the gates' infrared does, and ultraviolet would."""
    outline = made_plan.outline()
    gate = outline.channels[0]
    request = gate.study.request
    dark = replace(request, light=replace(request.light, wavelength=254e-9))
    ultraviolet = Wanted("dark", "dark.toml", 1, replace(gate.study, request=dark))
    with_dark = replace(outline, channels=(*outline.channels, ultraviolet))
    said = words(made_plan.nothing_found(), outline=with_dark)
    for text in (SOURCES, NEAR_INFRARED, ULTRAVIOLET, GENERAL):
        assert said.count(text) == 1
    assert ULTRAVIOLET not in words()
    assert said.count("Not in the model:") == 1
