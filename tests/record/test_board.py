"""A board's record: what it says, that it is read back as written, and what is refused on reading."""

from __future__ import annotations

import copy
import hashlib
import json
import os
from collections.abc import Callable
from contextlib import suppress
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError, OutputError
from optimizer.planning.outline import Outline
from optimizer.planning.plan import Build, Hopeless, Planned, Refusal, Relaxation
from optimizer.planning.reading import read_board as read_outline
from optimizer.record import BoardRecord, Record, read, read_any, read_board, write
from optimizer.record.board import build
from tests import made_up
from tests.review.made_board import candidates_of, planned, written_in

Document = dict[str, Any]


@pytest.fixture(scope="module")
def outline(tmp_path_factory: pytest.TempPathFactory) -> Outline:
    return read_outline(written_in(tmp_path_factory.mktemp("board")))


@pytest.fixture(scope="module")
def plans(outline: Outline) -> Planned:
    found = candidates_of(outline)
    gate, level = found["gate"], found["level"]
    return planned(
        outline,
        [Build("gate", (1, 2), gate[0]), Build("level", (1,), level[0])],
        [Build("gate", (2,), gate[1]), Build("gate", (1,), gate[0]), Build("level", (1,), level[0])],
    )


@pytest.fixture
def data(outline: Outline, plans: Planned) -> Document:
    return copy.deepcopy(dict(build(outline, plans).data))


# What it says


def test_inputs_are_the_board_file_the_requests_and_the_catalogs_each_once(
    data: Document, outline: Outline
) -> None:
    files = [entry["file"] for entry in data["inputs"]]
    assert files[:3] == ["board.toml", "channels/gate.toml", "channels/level.toml"]
    assert sorted(files[3:]) == [
        "capacitors.csv",
        "opamps.csv",
        "photodiodes.csv",
        "resistors.csv",
        "source.toml",
    ]
    for entry in data["inputs"]:
        text = (outline.path.parent / entry["file"]).read_bytes()
        assert entry["sha256"] == hashlib.sha256(text).hexdigest()
    assert {entry["file"]: entry["rows"] for entry in data["inputs"]}["opamps.csv"] == 8


def test_the_requests_in_force_have_the_boards_quantity(data: Document) -> None:
    assert data["requests"].keys() == {"channels/gate.toml", "channels/level.toml"}
    assert {request["quantity"] for request in data["requests"].values()} == {200}
    assert data["requests"]["channels/level.toml"]["targets"]["bandwidth"] == 3e3
    assert data["board"]["limits"] == {"cost": 40.0, "line_items": 16}
    assert data["board"]["rules"] == {"opamp_sources": 1, "opamp_parts": 0}


def test_plans_hold_channels_packages_bill_and_totals(data: Document, plans: Planned) -> None:
    first = data["plans"][0]
    assert [(entry["channel"], entry["copies"]) for entry in first["channels"]] == [
        ("gate", [1, 2]),
        ("level", [1]),
    ]
    assert [entry["request"] for entry in first["channels"]] == [
        "channels/gate.toml",
        "channels/level.toml",
    ]
    candidate = first["channels"][0]["candidate"]
    assert candidate["photodiode"] == plans.plans[0].builds[0].candidate.photodiode
    assert candidate["figures"]["snr"] == plans.plans[0].builds[0].candidate.figures["snr"]
    assert len(first["packages"]) == 3
    assert first["packages"][0]["spare"] == 0
    assert first["cost"] == plans.plans[0].cost
    lines = sum(round(100 * line["cost"]) for line in first["bill"])
    placed = sum(line["pieces"] for line in first["bill"])
    assert lines + 1500 * len(first["bill"]) + 200 * placed == first["cost"]
    totals = {total["name"]: total for total in first["totals"]}
    assert totals["cost"]["value"] == pytest.approx(first["cost"] / 100 / 200)
    assert totals["cost"]["margin"] == pytest.approx(1 - totals["cost"]["value"] / 40.0)
    assert totals["area"] == {"name": "area", "value": None, "limit": None, "margin": None}


def test_how_it_was_found_is_said(data: Document, plans: Planned) -> None:
    search = data["search"]
    assert (search["status"], search["solver"], search["proven"]) == ("proven", "highs", "pools")
    assert search["bound"] == plans.plans[0].bound
    assert [pool["left_out"] for pool in search["pools"]] == [7, 7]
    assert data["chosen"] == 1
    assert data["alone"]["packages"] == 4
    assert data["refusal"] is None


def test_a_refusal_is_written_down(outline: Outline, plans: Planned) -> None:
    refusal = Refusal(
        hopeless=(Hopeless("gate", "channels/gate.toml", (), ("snr",), (made_up.MISS,), {"wavelength": 3}),),
        limits=("cost",),
        channels=("gate",),
        smallest=True,
        relaxations=(Relaxation("cost", 1.0, 4.4, proven=True),),
    )
    none = replace(plans, plans=(), status="infeasible", alone=None, refusal=refusal)
    said = build(outline, none).data
    assert said["plans"] == []
    assert said["chosen"] is None
    assert said["search"]["bound"] is None
    assert said["refusal"]["hopeless"][0]["near_misses"][0]["missed"] == list(made_up.MISS.missed)
    assert said["refusal"]["relaxations"] == [{"name": "cost", "limit": 1.0, "least": 4.4, "proven": True}]


# Written and read


def test_what_is_written_is_read_back(outline: Outline, plans: Planned, tmp_path: Path) -> None:
    first = build(outline, plans)
    write(first, tmp_path / "board.json")
    assert read_board(tmp_path / "board.json").data == first.data
    again = read_any(tmp_path / "board.json")
    assert isinstance(again, BoardRecord)
    assert again.chosen == first.plans[0]
    assert os.listdir(tmp_path) == ["board.json"]


def test_records_of_both_kinds_are_told_apart(tmp_path: Path) -> None:
    write(made_up.record(), tmp_path / "record.json")
    assert isinstance(read_any(tmp_path / "record.json"), Record)
    with pytest.raises(InputError, match="expected a board's record"):
        read_board(tmp_path / "record.json")


def test_a_board_is_no_shortlist(outline: Outline, plans: Planned, tmp_path: Path) -> None:
    write(build(outline, plans), tmp_path / "board.json")
    with pytest.raises(InputError, match="expected a record, 'luxsift-shortlist/1'"):
        read(tmp_path / "board.json")


def test_the_old_file_stays_where_writing_fails(
    outline: Outline, plans: Planned, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "board.json"
    path.write_text("old")
    monkeypatch.setattr(os, "replace", _refuse)
    with pytest.raises(OutputError, match="nothing was changed"):
        write(build(outline, plans), path)
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["board.json"]


def _refuse(*_: object) -> None:
    raise OSError(28, "No space left on device")


def test_unknown_keys_are_kept_and_ignored(data: Document, tmp_path: Path) -> None:
    data["weather"] = {"rain": 3}
    data["plans"][0]["channels"][0]["mood"] = "good"
    path = tmp_path / "board.json"
    path.write_text(json.dumps(data))
    assert read_board(path).data == data


Spoil = Callable[[Document], Any]

SPOILT: dict[str, tuple[Spoil, str]] = {
    "another version": (
        lambda d: d.update(format="luxsift-board/9"),
        "format: found 'luxsift-board/9', expected 'luxsift-board/1' (another version",
    ),
    "no plans": (lambda d: d.pop("plans"), "plans: the record lacks this key"),
    "plans in words": (lambda d: d.update(plans="two"), "plans: found 'two', expected a list"),
    "a plan in words": (lambda d: d.update(plans=["x"]), "plans[0]: expected a table"),
    "a cost in words": (
        lambda d: d["plans"][0].update(cost="much"),
        "plans[0].cost: found 'much', expected a whole number",
    ),
    "a truth for a number": (
        lambda d: d["plans"][0].update(rank=True),
        "plans[0].rank: found 'True', expected a whole number",
    ),
    "no figures": (
        lambda d: d["plans"][1]["channels"][0]["candidate"].pop("figures"),
        "plans[1].channels[0].candidate.figures: the record lacks this key",
    ),
    "a channel that is not there": (
        lambda d: d["plans"][0]["channels"][1].update(channel="levl"),
        "plans[0].channels[1].channel: found 'levl', the record holds nothing of that name",
    ),
    "a request that is not there": (
        lambda d: d["requests"].pop("channels/level.toml"),
        "plans[0].channels[1].request: found 'channels/level.toml'",
    ),
    "a level that is not there": (
        lambda d: d["plans"][0]["channels"][0].update(level="L9"),
        "plans[0].channels[0].level: found 'L9'",
    ),
    "a copy twice": (
        lambda d: d["plans"][0]["channels"][0].update(copies=[1, 1]),
        "expected each of the 2 copies of channel 'gate' once",
    ),
    "copies in words": (
        lambda d: d["plans"][0]["channels"][0].update(copies=["one", 2]),
        "plans[0].channels[0].copies[0]: found 'one', expected a whole number",
    ),
    "a place in a package of no channel": (
        lambda d: d["plans"][0]["packages"][0]["places"][0].update(channel="nowhere"),
        "plans[0].packages[0].places[0].channel: found 'nowhere'",
    ),
    "a negative quantity": (
        lambda d: d["board"].update(quantity=-3),
        "board.quantity: found '-3', expected a whole number from 1",
    ),
    "a limit in words": (
        lambda d: d["board"]["limits"].update(cost="low"),
        "board.limits.cost: found 'low', expected a whole number or a number",
    ),
    "pools in words": (lambda d: d["search"].update(pools=[1]), "search.pools[0]: expected a table"),
    "alone in words": (lambda d: d.update(alone="much"), "alone: found 'much', expected a table or null"),
    "a request without light": (
        lambda d: d["requests"]["channels/gate.toml"].pop("light"),
        "requests.channels/gate.toml.light: the record lacks this key",
    ),
}


@pytest.mark.parametrize("case", SPOILT)
def test_what_is_wrong_is_named(data: Document, tmp_path: Path, case: str) -> None:
    spoil, said = SPOILT[case]
    spoil(data)
    path = tmp_path / "board.json"
    path.write_text(json.dumps(data))
    with pytest.raises(InputError) as caught:
        read_any(path)
    assert said in str(caught.value)


NO_RECORDS = ("null", "[]", "{}", "7", '"text"', '{"format": 3}', '{"format": "luxsift-board/1"}', "{")


@pytest.mark.parametrize("text", NO_RECORDS)
def test_documents_that_are_no_records_are_refused_in_words(tmp_path: Path, text: str) -> None:
    path = tmp_path / "board.json"
    path.write_text(text)
    with pytest.raises(InputError, match=r"board\.json"):
        read_any(path)


def test_every_value_replaced_by_another_type_is_said_or_read(data: Document, tmp_path: Path) -> None:
    """No document ends in anything but a record or problems, whatever stands in its place."""
    path = tmp_path / "board.json"
    for where in _places(data):
        spoilt = copy.deepcopy(data)
        _put(spoilt, where, {"odd": [None]})
        path.write_text(json.dumps(spoilt))
        with suppress(InputError):
            read_any(path)


def _places(value: Any, at: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """The way to each of a document's values, of lists their first entry only."""
    found: list[tuple[Any, ...]] = [at] if at else []
    if isinstance(value, dict):
        for key in value:
            found += _places(value[key], (*at, key))
    elif isinstance(value, list) and value:
        found += _places(value[0], (*at, 0))
    return found


def _put(data: Any, where: tuple[Any, ...], value: Any) -> None:
    for key in where[:-1]:
        data = data[key]
    data[where[-1]] = value
