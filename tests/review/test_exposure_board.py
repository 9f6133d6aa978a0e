"""What hangs on the parts of a board: counted as on its bill, said by board and channel."""

from __future__ import annotations

import json
import shutil
from collections import Counter
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError
from optimizer.review.exposure import Exposures, exposure
from optimizer.review.shelf import take_up
from optimizer.review.supply import Exposure
from optimizer.review.withdrawal import VANISHED
from tests.review.catalog_edits import with_cells, with_copy, without
from tests.review.made_board import saved_board


@pytest.fixture
def saved(tmp_path: Path) -> Path:
    """A board's record beside its files, to be changed at will."""
    return saved_board(tmp_path / "board")


def looked_at(*paths: Path) -> Exposures:
    return exposure(take_up([str(path) for path in paths]))


def part(found: Exposures, name: str) -> Exposure:
    return next(one for one in found.parts if one.part == name)


def document(path: Path) -> dict[str, Any]:
    data: dict[str, Any] = json.loads(path.read_text("utf-8"))
    return data


def rewritten(path: Path, name: str, **changes: Any) -> Path:
    other = path.with_name(name)
    other.write_text(json.dumps(document(path) | changes), "utf-8")
    return other


def test_every_part_of_the_bill_is_there_with_its_pieces(saved: Path) -> None:
    found = looked_at(saved)
    billed: Counter[tuple[str, str]] = Counter()
    for line in document(saved)["plans"][0]["bill"]:
        billed[line["part"], line["maker"]] += 200 * line["pieces"]
    assert {(one.part, one.maker): one.needed for one in found.parts} == billed


def test_the_board_and_its_channels_are_named(saved: Path) -> None:
    found = looked_at(saved)
    assert part(found, "YZD-01").records == (f"{saved} (gate, level)",)
    assert part(found, "YZA-21").records == (f"{saved} (gate)",)
    assert part(found, "YZA-11").records == (f"{saved} (level)",)


def test_pieces_of_several_boards_add_up(saved: Path) -> None:
    other = rewritten(saved, "other.json")
    second = rewritten(saved, "second.json", chosen=2)
    found = looked_at(saved, other, second)
    assert part(found, "YZD-01").needed == 200 * (3 + 3 + 2)
    assert part(found, "YZD-03").needed == 200
    assert part(found, "YZA-21").needed == 3 * 200 * 2
    assert part(found, "YZA-21").records == (f"{saved} (gate)", f"{other} (gate)", f"{second} (gate)")


def test_a_dual_that_serves_two_copies_counts_once(saved: Path) -> None:
    data = document(saved)
    plan = data["plans"][0]
    for built in plan["channels"]:
        if built["channel"] == "gate":
            built["opamp"] = "YZA-22"
    line = next(line for line in plan["bill"] if line["part"] == "YZA-21")
    line |= {"part": "YZA-22", "pieces": 1, "buy": 200}
    found = looked_at(rewritten(saved, "dual.json", plans=[plan]))
    assert part(found, "YZA-22").needed == 200
    assert part(found, "YZA-22").records == (f"{saved.parent / 'dual.json'} (gate)",)


def test_a_package_that_serves_buffers_alone_is_not_forgotten(saved: Path) -> None:
    data = document(saved)
    plan = data["plans"][0]
    gate = next(built for built in plan["channels"] if built["channel"] == "gate")
    reference = gate["candidate"]["reference"]
    plan["levels"] = [
        {
            "name": "L1",
            "voltage": reference["voltage"],
            "top": reference["top"],
            "bottom": reference["bottom"],
            "bypass": 1e-7,
            "resistor_family": "YZR-K",
            "capacitor_family": "YZC-X",
            "opamp": "YZA-22",
            "channels": ["gate"],
        }
    ]
    gate["level"] = "L1"
    place = {"channel": None, "copy": 0, "level": "L1"}
    maker = "Yonderbeck Analog"
    plan["packages"] += [{"opamp": "YZA-22", "maker": maker, "amplifiers": 2, "spare": 1, "places": [place]}]
    bill = {**plan["bill"][0], "role": "opamp", "part": "YZA-22", "maker": maker, "pieces": 1, "buy": 200}
    plan["bill"].append(bill)
    found = looked_at(rewritten(saved, "level.json", plans=[plan]))
    assert part(found, "YZA-22").needed == 200
    assert part(found, "YZA-22").records == (f"{saved.parent / 'level.json'} (gate)",)


def test_a_substitute_counts_where_it_serves_every_channel(saved: Path) -> None:
    """Twins of the photodiode that both channels use: as good for both, and too slow for the gates."""
    diodes = saved.parent / "photodiodes.csv"
    assert part(looked_at(saved), "YZD-01").alone
    with_cells(diodes, "YZD-01", package="SMD 3x2", pinout="KA")
    with_copy(diodes, "YZD-01", part="YZD-T", maker="Quillfen Devices")
    with_copy(diodes, "YZD-01", part="YZD-S", maker="Quillfen Devices", rise_time="60 us")
    one = part(looked_at(saved), "YZD-01")
    assert (one.drop_ins, one.makers) == (1, 2)
    assert one.fewest >= 1


def test_a_part_that_has_gone_is_said_with_its_channels(saved: Path) -> None:
    without(saved.parent / "opamps.csv", "YZA-11")
    found = looked_at(saved)
    one = part(found, "YZA-11")
    assert one.status == VANISHED
    assert found.parts[0] == one
    assert [(stale.record, stale.why) for stale in found.stale] == [(f"{saved} (level)", ("missing opamp",))]


def test_a_board_without_plan_uses_no_part(saved: Path) -> None:
    empty = rewritten(saved, "empty.json", plans=[], chosen=None)
    with pytest.raises(InputError, match="marks no plan as chosen"):
        take_up([str(saved), str(empty)])


def test_a_board_file_with_other_channels_is_refused(saved: Path) -> None:
    file = saved.parent / "board.toml"
    file.write_text(file.read_text("utf-8").replace("count = 2", "count = 3"), "utf-8")
    with pytest.raises(InputError, match="the board has other channels now: of this one, 2 in the record"):
        take_up([str(saved)])


def test_a_board_file_that_is_nowhere_is_named(saved: Path, tmp_path: Path) -> None:
    moved = tmp_path / "elsewhere"
    moved.mkdir()
    shutil.copy(saved, moved)
    data = document(saved) | {"board_file": "nowhere/board.toml"}
    (moved / saved.name).write_text(json.dumps(data), "utf-8")
    with pytest.raises(InputError, match="the board file that the record names is neither"):
        take_up([str(moved / saved.name)])
