"""What replaces a part on a board, against every board that could; and what is refused, said and saved."""

from __future__ import annotations

import json
import random
from collections import Counter
from pathlib import Path

import pytest

from optimizer.errors import InputError
from optimizer.planning.plan import Build
from optimizer.planning.reading import read_board as read_outline
from optimizer.record import BoardRecord, read_any, read_board, write
from optimizer.record.board import build
from optimizer.report.page.board import compose_board
from optimizer.review.board import plan_of, reopen_board
from optimizer.review.board_dossier import gather_board
from optimizer.review.board_replacement import BoardReplacement, board_record_of, board_replacement
from optimizer.review.dossier import Place
from optimizer.review.exposure import exposure
from optimizer.review.shelf import take_up
from optimizer.review.withdrawal import NAMED, OBSOLETE, VANISHED, Wish
from tests.review import all_boards
from tests.review.catalog_edits import with_cells, with_copy, without
from tests.review.made_board import candidates_of, planned, saved_board
from tests.review.tiny_boards import tiny


@pytest.fixture
def saved(tmp_path: Path) -> Path:
    """A board's record beside its files: two gates and a level, each on a single op-amp of its own."""
    return saved_board(tmp_path / "board")


def replaced(
    path: Path, *gone: str, keep: tuple[str, ...] = (), show: int = 1, rank: int | None = None
) -> BoardReplacement:
    record = read_any(path)
    assert isinstance(record, BoardRecord)
    return board_replacement(reopen_board(record, path), plan_of(record, rank), Wish(gone, keep), show=show)


def refused(path: Path, *gone: str, keep: tuple[str, ...] = ()) -> str:
    with pytest.raises(InputError) as caught:
        replaced(path, *gone, keep=keep)
    return str(caught.value)


def said(answer: BoardReplacement, rank: int = 1) -> list[tuple[str, int, str | None]]:
    return [(one.where, one.count, one.channel) for one in answer.substitutes[rank - 1].changed]


def packages_of(record: Path) -> Counter[str]:
    data = read_any(record).data
    return Counter(package["opamp"] for package in data["plans"][0]["packages"])


@pytest.mark.parametrize("seed", range(40))
def test_no_board_changes_fewer_positions_or_costs_less(seed: int, tmp_path: Path) -> None:
    board = tiny(tmp_path, seed)
    stood = all_boards.before(board, packages_of(board.record))
    used = sorted({name for b in board.builds for name in all_boards.uses(b.candidate, b.opamp)})
    gone = random.Random(seed).choice([name for name in used if name != "YZR-1"])
    answer = replaced(board.record, gone)
    anew = all_boards.fewest(board, stood, gone, all_boards.ways(board, stood, gone, all_move=True))
    kept = all_boards.ways(board, stood, gone, all_move=False)
    least = all_boards.fewest(board, stood, gone, kept)
    assert anew == least  # changing another channel too never helps
    if least is None:
        assert not answer.substitutes
        return
    (first,) = answer.substitutes
    assert first.changes == least
    assert first.fewest
    assert sum(change.count for change in first.changed) == first.changes
    cost = all_boards.cheapest(board, stood, gone, kept, least)
    if cost is not None:
        assert first.plan.cost == cost
        assert first.cheapest


# What changes


def test_a_twin_in_the_same_package_changes_one_position_for_each_package(saved: Path) -> None:
    """Cheaper twins than the dual of the same family that would also do."""
    with_copy(saved.parent / "opamps.csv", "YZA-21", part="YZT-1", family="YZT", price="0.50")
    answer = replaced(saved, "YZA-21")
    first = answer.substitutes[0]
    assert said(answer) == [("packages", 2, None)]
    assert {build.opamp for build in first.plan.builds if build.channel == "gate"} == {"YZT-1"}
    assert first.plan.cost < read_board(saved).plans[0]["cost"]


def test_both_gates_move_into_a_dual_together(saved: Path) -> None:
    answer = replaced(saved, "YZA-21")
    first = answer.substitutes[0]
    (change,) = first.changed
    assert change.old == [("YZA-21", "Yonderbeck Analog")] * 2
    assert change.new == [("YZA-22", "Yonderbeck Analog")]
    dual = next(package for package in first.plan.packages if package.opamp == "YZA-22")
    assert [(place.channel, place.copy) for place in dual.places] == [("gate", 1), ("gate", 2)]
    assert all(not build.candidate.missed for build in first.plan.builds)


def test_a_photodiode_that_goes_from_two_channels_goes_from_both(saved: Path) -> None:
    answer = replaced(saved, "YZD-01")
    assert said(answer) == [("channel", 2, "gate"), ("channel", 1, "level")]
    assert answer.gone.parts[0].why == NAMED
    line = next(line for line in answer.substitutes[0].plan.bill if line.role == "photodiode")
    assert (line.part, line.pieces) == ("YZD-03", 3)  # one part for both: one line item


def test_obsolete_and_vanished_parts_are_gone_without_a_word(saved: Path) -> None:
    with_cells(saved.parent / "opamps.csv", "YZA-11", status="obsolete")
    without(saved.parent / "photodiodes.csv", "YZD-01")
    answer = replaced(saved)
    assert {(part.part, part.why) for part in answer.gone.parts} == {
        ("YZA-11", OBSOLETE),
        ("YZD-01", VANISHED),
    }
    assert {change.file for change in answer.opened.changed} == {"opamps.csv", "photodiodes.csv"}
    used = {line.part for line in answer.substitutes[0].plan.bill}
    assert not used & {"YZA-11", "YZD-01"}


def test_what_is_kept_does_not_change(saved: Path) -> None:
    with_copy(saved.parent / "opamps.csv", "YZA-21", part="YZT-1", family="YZT")
    free = replaced(saved, "YZD-01", show=3)
    kept = replaced(saved, "YZD-01", keep=("opamp",), show=3)
    assert any(where == "packages" for rank in (1, 2, 3) for where, *_ in said(free, rank))
    assert not any(
        where == "packages" for rank in range(len(kept.substitutes)) for where, *_ in said(kept, rank + 1)
    )


def test_another_plan_may_be_replaced(saved: Path) -> None:
    answer = replaced(saved, "YZD-03", rank=2)
    (change,) = answer.substitutes[0].changed
    assert (change.channel, change.copies, change.positions) == ("gate", (2,), ("photodiode",))
    assert answer.old["rank"] == 2


def test_a_channel_that_no_longer_holds_may_change_too(saved: Path) -> None:
    request = saved.parent / "channels" / "level.toml"
    text = request.read_text("utf-8")
    request.write_text(text.replace('bandwidth = "3 kHz"', 'bandwidth = "29 kHz"'), "utf-8")
    answer = replaced(saved, "YZA-21")
    assert [hit.receiver.channel for hit in answer.gone.hits if hit.stale] == ["level"]
    level = next(build for build in answer.substitutes[0].plan.builds if build.channel == "level")
    assert not level.candidate.missed
    assert level.opamp != "YZA-11"


def test_a_package_stays_though_the_smallest_of_its_amplifier_goes(saved: Path) -> None:
    """The gates' dual is graded by the single of the same amplifier, which the board does not use."""
    outline = read_outline(saved.parent / "board.toml")
    found = candidates_of(outline)
    builds = [
        Build("gate", (1, 2), found["gate"][0], None, "YZA-22", "Yonderbeck Analog"),
        Build("level", (1,), found["level"][0]),
    ]
    assert found["gate"][0].opamp == "YZA-21"
    path = saved.parent / "dual.json"
    write(build(outline, planned(outline, builds)), path)
    assert "plan 1 does not use it" in refused(path, "YZA-21")
    answer = replaced(path, "YZA-11", "YZA-21")
    assert [(hit.receiver.channel, hit.moves, hit.stale) for hit in answer.gone.hits] == [
        ("gate", False, ()),
        ("level", True, ()),
    ]
    assert said(answer) == [("packages", 1, None)]
    again = saved.parent / "again.json"
    write(board_record_of(answer), again)
    assert "plan 1 does not use it" in refused(again, "YZA-21")


# What cannot be


def test_a_channel_that_nothing_meets_is_named_with_its_nearest_miss(saved: Path) -> None:
    answer = replaced(saved, "YZR-K")
    assert not answer.substitutes
    assert [lack.channel for lack in answer.lacks] == ["gate"]
    assert answer.lacks[0].nearest is not None
    assert answer.lacks[0].nearest.missed


def test_a_limit_in_the_way_is_shown_with_what_it_would_take(saved: Path) -> None:
    file = saved.parent / "board.toml"
    text = file.read_text("utf-8").replace("cost = 40.0", "cost = 0.5")
    file.write_text(text + '[solve]\ntime = "3 s"\n', "utf-8")
    answer = replaced(saved, "YZD-01")
    assert not answer.substitutes
    assert not answer.lacks
    assert answer.beyond is not None
    assert answer.beyond.changes == 3
    total = answer.beyond.plan.total("cost")
    assert total.margin is not None
    assert total.margin < 0


def test_names_that_nothing_knows_or_the_board_does_not_use_are_refused(saved: Path) -> None:
    assert "neither the catalogs nor the record hold such a part" in refused(saved, "YZA-2x")
    assert "did you mean 'YZR-K'" in refused(saved, "YZRK")
    assert "plan 1 does not use it" in refused(saved, "YZD-07")
    assert "no part of plan 1 is obsolete" in refused(saved)


def test_a_position_cannot_be_kept_whose_part_is_gone(saved: Path) -> None:
    assert "cannot be kept, for its YZD-01 is gone" in refused(saved, "YZD-01", keep=("photodiode",))


# The record


def test_the_record_is_read_again_and_what_is_gone_stays_gone(saved: Path) -> None:
    record = board_record_of(replaced(saved, "YZD-01", show=2))
    path = saved.parent / "second.json"
    write(record, path)
    data = read_board(path).data
    assert data["replaces"]["out"] == ["Zellmarsh Photonics/YZD-01"]
    assert data["replaces"]["plan"]["rank"] == 1
    assert [plan["changes"] for plan in data["plans"]] == [3, 3]
    assert [(plan["fewest"], plan["cheapest"]) for plan in data["plans"]] == [(True, True), (False, False)]
    assert sum(change["count"] for change in data["plans"][0]["changed"]) == 3
    again = replaced(path, "YZA-11")
    used = {line.part for line in again.substitutes[0].plan.bill}
    assert not used & {"YZD-01", "YZA-11"}
    assert set(board_record_of(again).data["replaces"]["out"]) == {
        "Zellmarsh Photonics/YZD-01",
        "Yonderbeck Analog/YZA-11",
    }


def test_a_spoilt_record_of_substitutes_is_read_or_refused_in_words(saved: Path) -> None:
    """Whatever stands in the place of what a substitute says that it changes."""
    data = json.loads(json.dumps(board_record_of(replaced(saved, "YZD-01")).data))
    path = saved.parent / "second.json"
    change = data["plans"][0]["changed"][0]
    for holder, key in (
        *((change, key) for key in change),
        *((data["plans"][0], key) for key in ("changes", "changed", "fewest", "cheapest")),
        *((data["replaces"], key) for key in data["replaces"]),
        (data, "replaces"),
    ):
        kept = holder[key]
        for odd in ("odd", 7, None, ["odd"], [7], [{}], {"odd": [None]}):
            holder[key] = odd
            path.write_text(json.dumps(data), "utf-8")
            try:
                record = read_board(path)
            except InputError:
                continue
            opened = reopen_board(record, path)
            compose_board(gather_board(opened, Place(path.name, "board.toml", "review.md")))
        holder[key] = kept


def test_exposure_reads_the_record(saved: Path) -> None:
    path = saved.parent / "second.json"
    write(board_record_of(replaced(saved, "YZD-01")), path)
    found = exposure(take_up([str(path)]))
    assert "YZD-03" in {one.part for one in found.parts}
    assert not found.stale
