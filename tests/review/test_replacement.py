"""What replaces a part: what counts as gone, what is refused, and the record that is written."""

from __future__ import annotations

import json
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError
from optimizer.record import Record, read, write
from optimizer.review.dossier import differences
from optimizer.review.reopen import chosen_of, reopen
from optimizer.review.replacement import Replacement, before, record_of, replacement
from optimizer.review.withdrawal import NAMED, OBSOLETE, VANISHED, Wish
from optimizer.search import assemble
from optimizer.search.change import dividers
from optimizer.search.locate import locate
from optimizer.search.query import whole
from tests.review.catalog_edits import with_cells, with_copy, without
from tests.saved_record import saved_in

FITS = {"package": "SOT-23-5", "pinout": "single-5"}


@pytest.fixture
def saved(tmp_path: Path) -> Path:
    """A record that `shortlist` saved beside its request and catalogs."""
    return saved_in(tmp_path)


@pytest.fixture
def board(saved: Path) -> Path:
    """A record whose op-amp has a twin at another price, with the same outline."""
    opamps = saved.parent / "opamps.csv"
    with_cells(opamps, "YZA-21", **FITS)
    with_copy(opamps, "YZA-21", part="YZA-29", maker="Quillfen Devices", price="1.50")
    return saved


def replaced(path: Path, *gone: str, keep: tuple[str, ...] = (), rank: int | None = None) -> Replacement:
    reopened = reopen(path)
    return replacement(reopened, chosen_of(reopened.record, rank), Wish(gone, keep), show=3)


def refused(path: Path, *gone: str, keep: tuple[str, ...] = ()) -> str:
    with pytest.raises(InputError) as caught:
        replaced(path, *gone, keep=keep)
    return str(caught.value)


def named(answer: Replacement) -> list[tuple[str, str, str]]:
    return [(one.change, one.candidate.photodiode, one.candidate.opamp) for one in answer.substitutes]


# What is gone


def test_a_named_part_gives_way_to_a_drop_in(board: Path) -> None:
    answer = replaced(board, "YZA-21")
    (part,) = answer.withdrawal.parts
    assert (part.use, part.part, part.maker, part.why) == ("opamp", "YZA-21", "Yonderbeck Analog", NAMED)
    first = answer.substitutes[0]
    assert (first.change, first.changed, first.candidate.opamp) == ("drop-in", ("opamp",), "YZA-29")
    old = answer.old
    for name in ("wiring", "feedback_resistance", "resistor_family", "feedback_capacitance", "low_pass"):
        assert getattr(first.candidate, name) == old[name]


@pytest.mark.parametrize("name", ["YZA-21", "Yonderbeck Analog/YZA-21"])
def test_a_part_is_named_alone_or_with_its_maker(board: Path, name: str) -> None:
    assert [part.part for part in replaced(board, name).withdrawal.parts] == ["YZA-21"]


def test_what_is_gone_is_never_proposed(board: Path) -> None:
    answer = replaced(board, "YZA-21", "YZA-22", "YZD-03")
    used = {one.candidate.opamp for one in answer.substitutes} | {
        one.candidate.photodiode for one in answer.substitutes
    }
    assert not used & {"YZA-21", "YZA-22", "YZD-03"}


def test_an_obsolete_part_is_gone_without_being_named(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-21", status="obsolete")
    (part,) = replaced(board).withdrawal.parts
    assert (part.part, part.why) == ("YZA-21", OBSOLETE)


def test_obsolete_parts_are_dropped_even_where_the_request_takes_them(board: Path) -> None:
    request = board.parent / "request.toml"
    request.write_text(
        request.read_text("utf-8").replace("[space]", '[space]\nstatus = ["active", "obsolete"]'), "utf-8"
    )
    with_cells(board.parent / "opamps.csv", "YZA-29", status="obsolete")
    answer = replaced(board, "YZA-21")
    assert "YZA-29" not in {one.candidate.opamp for one in answer.substitutes}


def test_a_part_that_has_vanished_is_gone_and_its_outline_is_the_records(board: Path) -> None:
    main_record(board)
    without(board.parent / "opamps.csv", "YZA-21")
    answer = replaced(board)
    (part,) = answer.withdrawal.parts
    assert (part.part, part.why) == ("YZA-21", VANISHED)
    assert named(answer)[0] == ("drop-in", "YZD-01", "YZA-29")


def main_record(path: Path) -> None:
    """Save the record once more, with the catalogs as they are now."""
    from optimizer import shortlist

    write(shortlist(path.parent / "request.toml"), path)


def test_a_vanished_part_may_be_named(board: Path) -> None:
    without(board.parent / "opamps.csv", "YZA-21")
    answer = replaced(board, "Yonderbeck Analog/YZA-21")
    assert [part.why for part in answer.withdrawal.parts] == [VANISHED]
    # the record was made before its outline was known
    assert [lack.change for lack in answer.lacks] == ["drop-in", "values"]


def test_a_family_is_gone_in_every_use(saved: Path) -> None:
    answer = replaced(saved, "YZR-K")
    assert [part.use for part in answer.withdrawal.parts] == ["feedback_resistance", "divider"]
    assert all(one.candidate.resistor_family != "YZR-K" for one in answer.substitutes)
    assert all(one.candidate.outlines["divider_family"] != "YZR-K" for one in answer.substitutes)


def test_two_parts_gone_must_both_fit(board: Path) -> None:
    diodes = board.parent / "photodiodes.csv"
    with_cells(diodes, "YZD-01", pinout="smd-2")
    with_copy(diodes, "YZD-01", part="YZD-09", price="0.60")
    answer = replaced(board, "YZA-21", "YZD-01")
    assert named(answer)[0] == ("drop-in", "YZD-09", "YZA-29")
    with_cells(diodes, "YZD-09", pinout="other-2")
    answer = replaced(board, "YZA-21", "YZD-01")
    assert "drop-in" in {lack.change for lack in answer.lacks}


def test_another_row_can_be_replaced(saved: Path) -> None:
    answer = replaced(saved, "YZD-03", rank=2)
    assert answer.old["rank"] == 2
    assert all(one.candidate.photodiode != "YZD-03" for one in answer.substitutes)


def test_kept_positions_stay(saved: Path) -> None:
    answer = replaced(saved, "YZA-21", keep=("photodiode", "wiring", "feedback_resistance"))
    assert answer.substitutes
    for one in answer.substitutes:
        assert not {"photodiode", "wiring", "feedback_resistance"} & set(one.changed)
        assert one.candidate.feedback_resistance == answer.old["feedback_resistance"]


# What is refused


@pytest.mark.parametrize(
    ("gone", "keep", "words"),
    [
        (("YZA-12",), (), ("row 1 does not use it", "it uses YZD-01, YZA-21, YZR-K, YZC-G, YZC-X")),
        (("YZA-2Z",), (), ("neither the catalogs nor the record", "did you mean 'YZA-22'?")),
        ((), (), ("no part of row 1 is obsolete, or missing", "name what is gone")),
        (("YZA-21",), ("opamp",), ("--keep: found 'opamp'", "cannot be kept", "--gone YZA-21")),
        (("YZR-K",), ("feedback_resistance",), ("--keep: found 'feedback_resistance'", "--gone YZR-K")),
    ],
)
def test_a_wish_that_cannot_be(
    saved: Path, gone: tuple[str, ...], keep: tuple[str, ...], words: tuple[str, ...]
) -> None:
    said = refused(saved, *gone, keep=keep)
    for word in words:
        assert word in said


def test_a_wrong_name_points_to_what_is_gone_anyway(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-21", status="obsolete")
    assert "without --gone, YZA-21 is obsolete in the catalogs" in refused(board, "YZA-12")


def test_what_is_gone_anyway_cannot_be_kept(board: Path) -> None:
    without(board.parent / "opamps.csv", "YZA-21")
    assert "its YZA-21 is gone (no longer in the catalogs)" in refused(board, keep=("opamp",))


def test_every_problem_is_said_at_once(saved: Path) -> None:
    said = refused(saved, "A-1", "B-2")
    assert "A-1" in said
    assert "B-2" in said


# Where there is none


def test_the_nearest_says_what_fails_first(board: Path) -> None:
    """The twin at ten times the noise misses the signal-to-noise ratio."""
    with_cells(board.parent / "opamps.csv", "YZA-29", voltage_noise="300 nV/rtHz")
    lack = replaced(board, "YZA-21").lacks[0]
    assert lack.change == "drop-in"
    assert lack.nearest is not None
    assert lack.nearest.candidate.opamp == "YZA-29"
    assert lack.nearest.candidate.limiting == "snr"
    assert lack.nearest.candidate.margin < 0.0


def test_the_check_that_stops_all_is_named(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-29", stock="3")
    lack = replaced(board, "YZA-21").lacks[0]
    assert (lack.nearest, lack.stopped) == (None, "stock")


def test_a_blank_that_stops_all_is_named(board: Path) -> None:
    with_cells(board.parent / "opamps.csv", "YZA-29", output_low="")
    assert replaced(board, "YZA-21").lacks[0].stopped == "missing:output_low"


def test_no_such_part_at_all(saved: Path) -> None:
    lack = replaced(saved, "YZA-21").lacks[0]
    assert (lack.nearest, lack.stopped, lack.lacking) == (None, "", ("opamp",))


# Second sources


@pytest.fixture
def sourced(board: Path) -> Path:
    """A request that asks for op-amps of two makers; that of the record has twins of two others."""
    request = board.parent / "request.toml"
    text = "\n".join(line for line in request.read_text("utf-8").split("\n") if not _is_resilience(line))
    request.write_text(f"{text}\n[resilience]\nopamp_sources = 2\n", "utf-8")
    with_copy(board.parent / "opamps.csv", "YZA-21", part="YZA-28", maker="Ottersill Analog", price="1.80")
    return board


def _is_resilience(line: str) -> bool:
    return line.startswith(("[resilience]", "opamp_sources"))


def test_substitutes_have_second_sources(sourced: Path) -> None:
    first = replaced(sourced, "YZA-21").substitutes[0]
    assert (first.change, first.candidate.opamp) == ("drop-in", "YZA-29")
    assert [other.opamp for other in first.candidate.alternates] == ["YZA-28"]


def test_what_is_gone_is_no_second_source(sourced: Path) -> None:
    """With YZA-28 gone too, the twin that is left would have but the withdrawn part beside it."""
    answer = replaced(sourced, "YZA-21", "YZA-28")
    lack = answer.lacks[0]
    assert lack.change == "drop-in"
    assert lack.nearest is not None
    assert lack.nearest.candidate.missed == ("opamp_sources",)


def test_an_obsolete_part_is_no_second_source(sourced: Path) -> None:
    with_cells(sourced.parent / "opamps.csv", "YZA-28", status="obsolete")
    assert replaced(sourced, "YZA-21").lacks[0].change == "drop-in"


# Real parts


def test_yields_are_drawn_and_those_that_do_not_reach_go_last(board: Path) -> None:
    request = board.parent / "request.toml"
    spreads = (
        '[tolerance]\nmethod = "nominal"\nyield = "99 %"\ndraws = 400\ngbw = "30 %"\nvoltage_noise = "90 %"\n'
    )
    request.write_text(request.read_text("utf-8") + "\n" + spreads, "utf-8")
    answer = replaced(board, "YZD-01")
    for change in ("footprint", "redesign"):
        reached = [
            one.candidate.simulated is not None and one.candidate.simulated.reaches(0.99)
            for one in answer.substitutes
            if one.change == change
        ]
        assert reached == sorted(reached, reverse=True)
    assert all("yield" in row for row in record_of(answer).data["candidates"])


def test_corners_hold_for_substitutes(board: Path) -> None:
    request = board.parent / "request.toml"
    text = request.read_text("utf-8")
    request.write_text(f'{text}\n[tolerance]\nmethod = "corners"\ngbw = "20 %"\n', "utf-8")
    answer = replaced(board, "YZA-21")
    assert answer.substitutes[0].candidate.opamp == "YZA-29"
    for one in answer.substitutes:
        assert all(target.worst is not None and target.margin >= 0.0 for target in one.candidate.targets)


# The old candidate


def test_targets_before_are_the_records(saved: Path) -> None:
    answer = replaced(saved, "YZA-21")
    assert list(answer.before) == answer.old["targets"]


def test_a_limit_that_has_moved_since_is_todays(saved: Path) -> None:
    request = saved.parent / "request.toml"
    request.write_text(
        request.read_text("utf-8").replace('bandwidth = "30 kHz"', 'bandwidth = "36 kHz"'), "utf-8"
    )
    answer = replaced(saved, "YZA-21")
    target = next(target for target in answer.before if target["name"] == "bandwidth")
    assert target["limit"] == 36e3
    assert target["value"] == answer.old["figures"]["bandwidth"]
    assert target["margin"] == pytest.approx(target["value"] / 36e3 - 1.0)
    assert [change.file for change in answer.reopened.changed] == ["request.toml"]


def test_a_figure_that_was_not_there_misses() -> None:
    old: dict[str, Any] = {"targets": [], "figures": {"dynamic_range": None}}
    (target,) = before(old, {"dynamic_range": 80.0})
    assert (target["value"], target["margin"]) == (None, -1.0)


# The record


def saved_again(board: Path, record: Record) -> Path:
    path = board.parent / "again.json"
    write(record, path)
    return path


def test_the_record_holds_every_substitute_in_order(board: Path) -> None:
    answer = replaced(board, "YZA-21")
    data = record_of(answer).data
    assert data["format"] == "luxsift-shortlist/1"
    assert data["chosen"] == 1
    rows = data["candidates"]
    assert [row["rank"] for row in rows] == list(range(1, len(rows) + 1))
    assert [(row["change"], row["photodiode"], row["opamp"]) for row in rows] == named(answer)
    assert rows[0]["changed"] == ["opamp"]
    assert data["replaces"]["candidate"] == answer.old
    assert data["replaces"]["out"] == ["Yonderbeck Analog/YZA-21"]
    assert data["request"]["space"]["exclude"] == ["Yonderbeck Analog/YZA-21"]
    assert data["search"]["proven"] is True


def test_the_record_reads_again_and_what_was_gone_stays_gone(board: Path) -> None:
    path = saved_again(board, record_of(replaced(board, "YZA-21")))
    assert read(path).candidates[0]["opamp"] == "YZA-29"
    again = replaced(path, "YZA-29")
    assert "YZA-21" not in {one.candidate.opamp for one in again.substitutes}
    assert record_of(again).data["replaces"]["out"] == ["Quillfen Devices/YZA-29"]
    assert record_of(again).data["request"]["space"]["exclude"] == [
        "Yonderbeck Analog/YZA-21",
        "Quillfen Devices/YZA-29",
    ]


@pytest.mark.parametrize("gone", ["YZA-21", "YZD-01", "YZR-K", "YZC-G", "YZC-X"])
def test_every_row_of_the_record_can_be_reviewed(saved: Path, gone: str) -> None:
    """What is computed again from the saved record agrees with it, whatever was bought from where."""
    capacitors = saved.parent / "capacitors.csv"
    with_copy(capacitors, "YZC-G", family="YZC-H", price="0.9")
    with_copy(capacitors, "YZC-X", family="YZC-Y", price="0.9")
    with_copy(saved.parent / "resistors.csv", "YZR-K", family="YZR-L", price="0.9")
    answer = replaced(saved, gone)
    assert answer.substitutes
    path = saved_again(saved, record_of(answer))
    reopened = reopen(path)
    study = reopened.study
    for row in reopened.record.candidates:
        space = dividers.recorded(whole(study.request, study.catalogs), study.catalogs, row)
        (now,) = assemble.candidates(space, study.catalogs, locate(space, study.catalogs, row))
        assert list(differences(row, asdict(now))) == []


def test_a_record_of_an_earlier_version_can_be_replaced(saved: Path) -> None:
    """One that names no outlines, and not the families of its divider."""
    data = json.loads(saved.read_text("utf-8"))
    for row in data["candidates"]:
        for key in [key for key in row if key.endswith(("_package", "_pinout"))]:
            del row[key]
        for key in ("resistor_maker", "capacitor_maker", "divider_family", "divider_maker", "bypass_family"):
            del row[key]
    saved.write_text(json.dumps(data), "utf-8")
    answer = replaced(saved, "YZR-K")
    assert [part.use for part in answer.withdrawal.parts] == ["feedback_resistance", "divider"]


def test_without_a_substitute_nothing_is_chosen(saved: Path) -> None:
    answer = replaced(saved, "YZA-21", keep=("photodiode", "wiring", "reference", "feedback_resistance"))
    none = replace(answer, substitutes=())
    data = record_of(none).data
    assert (data["candidates"], data["chosen"]) == ([], None)
