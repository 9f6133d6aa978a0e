"""What `replace` prints: what changes, before and after, what fails first; at any width."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from rich.cells import cell_len

from optimizer.report import to_text
from optimizer.report.beside import beside_lines
from optimizer.report.changes import changes, cost_words, short
from optimizer.report.replacement import replacement_lines
from optimizer.review.reopen import chosen_of, reopen
from optimizer.review.replacement import Replacement, record_of, replacement
from optimizer.review.withdrawal import Wish
from tests import made_up
from tests.review.catalog_edits import with_cells, with_copy, without
from tests.saved_record import saved_in

FITS = {"package": "SOT-23-5", "pinout": "single-5"}


@pytest.fixture
def board(tmp_path: Path) -> Path:
    """A record whose op-amp has a dearer twin with the same outline."""
    record = saved_in(tmp_path)
    opamps = tmp_path / "opamps.csv"
    with_cells(opamps, "YZA-21", **FITS)
    with_copy(opamps, "YZA-21", part="YZA-29", maker="Quillfen Devices", price="1.50")
    return record


def answered(path: Path, *gone: str, keep: tuple[str, ...] = ()) -> Replacement:
    reopened = reopen(path)
    return replacement(reopened, chosen_of(reopened.record), Wish(gone, keep), show=3)


def printed(answer: Replacement, width: int = 80) -> str:
    text = to_text(replacement_lines(answer, record_of(answer), width), colour=False)
    assert max(cell_len(line) for line in text.split("\n")) <= width
    return text


def words(answer: Replacement, width: int = 80) -> str:
    return " ".join(printed(answer, width).split())


def test_what_changes_and_what_it_costs(board: Path) -> None:
    text = words(answered(board, "YZA-21"))
    assert "Gone: op-amp YZA-21 (Yonderbeck Analog), named as gone" in text
    assert "> 1 YZD-01 with YZA-29, 1 position changes" in text
    assert "op-amp YZA-21 (Yonderbeck Analog) -> YZA-29 (Quillfen Devices)" in text
    assert "cost 1.21 -> 1.99, 0.78 more a receiver, 156.00 more for 200 built" in text
    assert "Changed since the record was made: opamps.csv (other contents)" in text


def test_targets_before_and_after_stand_side_by_side_with_what_limits(board: Path) -> None:
    lines = printed(answered(board, "YZA-21")).split("\n")
    heading = next(line for line in lines if line.strip().startswith("target"))
    assert heading.split() == ["target", "before", "row", "1"]
    at = lines.index(heading)
    assert lines[at + 1].split() == ["bandwidth", "37.2", "kHz", "37.2", "kHz"]
    assert lines[at + 2].split() == [
        *["at", "least", "30", "kHz", "24", "%", "to", "spare", "24", "%", "to", "spare"]
    ]
    assert any(line.split() == ["limiting", "bandwidth", "bandwidth"] for line in lines)


def test_the_sections_stand_from_the_least_change_up(board: Path) -> None:
    text = printed(answered(board, "YZA-21"))
    places = [text.index(f"\n{change}: ") for change in ("drop-in", "values", "footprint", "redesign")]
    assert places == sorted(places)


def test_what_was_proved_what_is_left_out_and_cautions_follow(board: Path) -> None:
    text = words(answered(board, "YZA-21"))
    assert "The ranking is proven: the same as evaluating every combination." in text
    assert "Not in the model:" in text
    assert "Caution: laser and LED sources can injure eyes" in text


@pytest.mark.parametrize("width", [60, 80, 120, 200])
def test_every_width_holds_all_rows(board: Path, width: int) -> None:
    answer = answered(board, "YZA-21")
    text = printed(answer, width)
    for rank in range(1, len(answer.substitutes) + 1):
        assert f"row {rank}" in text


def test_where_none_meets_the_first_to_fail_is_said(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-29", voltage_noise="15 nV/rtHz")
    text = words(answered(board, "YZA-21"))
    assert "None meets. The nearest: op-amp YZA-21 -> YZA-29 snr misses by" in text
    assert "Fails first: snr. The smallest relaxation that admits one, in margin: snr by" in text


def test_where_none_is_eligible_the_check_is_said(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-29", stock="3")
    assert "fails at stock (less in stock than the build needs)" in words(answered(board, "YZA-21"))


def test_where_a_blank_stops_it_the_column_is_said(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-29", output_low="")
    assert "fails at missing (a value that a target or check needs is blank, output_low)" in words(
        answered(board, "YZA-21")
    )


@pytest.mark.parametrize(
    ("cells", "said"),
    [
        (FITS, "There is none: no other op-amp in SOT-23-5 single-5"),
        ({"pinout": ""}, "package or pinout of YZA-21 is not known, so no other counts as the same"),
    ],
)
def test_where_there_is_no_such_part_that_is_said(tmp_path: Path, cells: dict[str, str], said: str) -> None:
    record = saved_in(tmp_path)
    with_cells(tmp_path / "opamps.csv", "YZA-21", **cells)
    assert said in words(answered(record, "YZA-21"))


def test_a_family_that_is_gone_names_values_and_packages(tmp_path: Path) -> None:
    record = saved_in(tmp_path)
    with_copy(tmp_path / "resistors.csv", "YZR-K", family="YZR-L", maker="Ottersill Passives", price="0.03")
    text = words(answered(record, "YZR-K"))
    assert "Gone: Rf and divider YZR-K (Ninebarrow Passives), named as gone" in text
    assert "Rf 2.7 Mohm (YZR-K, 0603) -> 2.7 Mohm (YZR-L, 0603)" in text
    assert "reference 455 mV, 100 kohm over 10 kohm (YZR-K, 0603) -> 455 mV" in text


def test_nothing_kept_out_of_sight(board: Path) -> None:
    """What is kept, and that nothing meets, is said."""
    without(board.parent / "opamps.csv", "YZA-29")
    answer = answered(board, "YZA-21", keep=("photodiode", "wiring"))
    assert "Kept as it is: photodiode, wiring" in words(answer)
    assert "No substitute meets the request." in words(replace(answer, **emptied(answer)))


def emptied(answer: Replacement) -> dict[str, Any]:
    """The answer's rows turned into what is nearest, as if all missed."""
    from optimizer.review.replacement import Lack

    lacks = [Lack(change, None, "stock") for change in ("drop-in", "values", "footprint", "redesign")]
    return {"substitutes": (), "lacks": tuple(lacks)}


def test_names_cannot_drive_a_terminal(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-29", maker="Maker\x1b[31m")
    assert "\x1b" not in printed(answered(board, "YZA-21"))


# The pieces


def row(**changed: Any) -> dict[str, Any]:
    made = made_up.record().data["candidates"][0]
    return made | changed


def test_a_reference_names_the_families_that_differ() -> None:
    divider = {"kind": "divider", "voltage": 2.4, "top": 47e3, "bottom": 44.2e3, "buffered": True}
    old = row(reference=divider | {"extra_package": True}, divider_family="YZR-1", divider_package="0603")
    new = old | {"divider_family": "YZR-2", "divider_package": None}
    ((label, text),) = changes(old, new, ["reference"])
    assert (label, text) == (
        "reference",
        "2.4 V, 47 kohm over 44.2 kohm, buffered (YZR-1, 0603) -> "
        "2.4 V, 47 kohm over 44.2 kohm, buffered (YZR-2)",
    )


def test_another_number_of_packages_is_said() -> None:
    two = row()["reference"] | {"extra_package": True}
    assert list(changes(row(), row(reference=two), [])) == [("op-amp packages", "1 -> 2")]


def test_a_capacitor_that_comes_or_goes() -> None:
    bare = row(feedback_capacitance=0.0, capacitor_family=None)
    assert short(row(), bare, ["feedback_capacitance"]) == "Cf 4.7 pF -> none"
    ((_, text),) = changes(bare, row(), ["feedback_capacitance"])
    assert text == "none -> 4.7 pF (YZC-C)"


@pytest.mark.parametrize(
    ("cost", "said"),
    [
        (3.3134, "3.21 -> 3.31, 0.10 more a receiver, 20.00 more for 200 built"),
        (3.2084, "3.21 -> 3.21, 0.0050 less a receiver, 1.00 less for 200 built"),
        (3.2134, "3.21 -> 3.21, the same"),
    ],
)
def test_the_cost_a_receiver_and_a_build(cost: float, said: str) -> None:
    new = row(figures=row()["figures"] | {"cost": cost})
    assert cost_words(row(), new, made_up.record().data["request"]) == said


def test_a_figure_that_does_not_exist_and_a_corner() -> None:
    request = made_up.record().data["request"]
    target = {"name": "snr", "value": 48.0, "limit": 46.0, "margin": 0.2}
    gone = {"name": "snr", "value": None, "limit": 46.0, "margin": -1.0}
    worst = target | {"worst": 46.5, "corner": {"gbw": -0.3}}
    rows = [{"rank": 1, "targets": [gone]}, {"rank": 2, "targets": [worst]}]
    text = " ".join(to_text(beside_lines([target], rows, request, 80), colour=False).split())
    assert "does not exist" in text
    assert "46.5 dB" in text
    assert "at gbw -30 %" in text
