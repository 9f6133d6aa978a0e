"""The ranked table on narrow terminals and with long names."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from optimizer.report import table_only, to_text
from tests.made_up import CANDIDATE, outcome, record


@pytest.mark.parametrize("width", [60, 66, 72, 80, 100, 120])
def test_part_names_of_30_characters_stay_whole_or_break_where_they_have_joints(width: int) -> None:
    long = replace(
        CANDIDATE, photodiode="YZD-21-LONGISH-SERIES-07-REEL2", opamp="YZA-14-VARIANT-B-SOT23-5-TAPED"
    )
    text = to_text(table_only(record(outcome((long,) * 3), chosen=None), width), colour=False)
    assert max(len(line) for line in text.split("\n")) <= width
    for name in (long.photodiode, long.opamp):
        pieces = re.split("(?<=-)", name)
        assert all(text.count(piece) >= 3 for piece in pieces)
        assert (text.count(name) == 3) == (width >= 80)


def test_a_narrow_terminal_parts_a_row_where_the_subject_changes() -> None:
    heads = {
        width: [line.split() for line in to_text(table_only(record(), width), colour=False).split("\n")]
        for width in (60, 66, 80)
    }
    assert heads[80][0] == ["photodiode", "op-amp", "wiring", "Vref", "Rf", "Cf"]
    assert heads[80][1][-2:] == ["limiting", "target"]
    assert heads[66][0] == heads[80][0]
    assert heads[66][1][-1] == "cost"
    assert heads[60][:2] == [["photodiode", "op-amp", "wiring"], ["Vref", "Rf", "Cf"]]
    assert heads[60][3] == ["limiting", "target"]
    long = replace(CANDIDATE, photodiode="Y" * 30, opamp="Z" * 30)
    lines = to_text(table_only(record(outcome((long,))), 104), colour=False).split("\n")
    assert lines[0].split()[-1] == "wiring"
    assert lines[1].split()[0] == "Vref"
    assert lines[1].endswith("limiting target")
