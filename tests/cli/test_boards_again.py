"""`luxsift replace`, `exposure` and `justify` on a board's record: statuses, streams, files, refusals."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from optimizer.cli import main
from optimizer.record import read_board
from tests.review.catalog_edits import with_cells
from tests.review.made_board import saved_board

Captured = pytest.CaptureFixture[str]


@pytest.fixture
def saved(tmp_path: Path, capsys: Captured) -> Path:
    path = saved_board(tmp_path / "board")
    capsys.readouterr()
    return path


def squeezed(text: str) -> str:
    return " ".join(text.split())


# replace


def test_a_board_that_does_without_ends_with_0(saved: Path, capsys: Captured) -> None:
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 0
    out, err = capsys.readouterr()
    said = squeezed(out)
    assert "Gone: op-amp YZA-21 (Yonderbeck Analog), named as gone" in said
    assert "Proven, keeping every channel that does not use what is gone: no board changes fewer" in said
    assert "> 1 2 positions change packages 2 YZA-21 (Yonderbeck Analog) -> 1 YZA-22" in said
    assert "less for 200 built" in said
    assert "No input file has changed" in said
    assert "laser and LED sources can injure eyes" in said
    assert err == ""


def test_targets_before_and_after_are_shown_for_channels_that_change(saved: Path, capsys: Captured) -> None:
    assert main(["replace", str(saved), "--gone", "YZD-01"]) == 0
    said = squeezed(capsys.readouterr().out)
    assert "gate x2: targets before, and in row 1" in said
    assert "level: targets before, and in row 1" in said
    assert "gate x2 photodiode YZD-01 (Zellmarsh Photonics)" in said
    assert "line_items" in said


def test_no_board_ends_with_1(saved: Path, capsys: Captured) -> None:
    assert main(["replace", str(saved), "--gone", "YZR-K"]) == 1
    said = squeezed(capsys.readouterr().out)
    assert "No board without it meets everything" in said
    assert "gate: nothing meets its request, whatever changes. The nearest" in said
    assert "snr misses by" in said


def test_the_record_is_saved_and_piped(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    path = tmp_path / "again.json"
    assert main(["replace", str(saved), "--gone", "YZA-21", "--save", str(path), "--show", "1"]) == 0
    assert len(read_board(path).plans) == 1
    capsys.readouterr()
    assert main(["replace", str(saved), "--gone", "YZA-21", "--save", "-", "--show", "1"]) == 0
    out, err = capsys.readouterr()
    assert json.loads(out)["plans"][0]["changes"] == 2
    assert "2 positions change" in err


def test_the_board_file_may_have_moved(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    lone = tmp_path / "lone"
    lone.mkdir()
    record = lone / "board.json"
    record.write_text(json.dumps(json.loads(saved.read_text("utf-8")) | {"board_file": "nowhere.toml"}))
    assert main(["replace", str(record), "--gone", "YZA-21"]) == 2
    assert "the board file that the record names is neither" in capsys.readouterr().err
    file = str(saved.parent / "board.toml")
    assert main(["replace", str(record), "--gone", "YZA-21", "--request", file]) == 0


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--gone", "YZA-2x"], "neither the catalogs nor the record hold such a part"),
        (["--gone", "YZD-07"], "plan 1 does not use it"),
        ([], "no part of plan 1 is obsolete"),
        (["--gone", "YZA-21", "--rank", "9"], "expected the rank of a plan, from 1 to 2"),
        (["--gone", "YZA-21", "--keep", "opamp"], "cannot be kept, for its YZA-21 is gone"),
        (["--gone", "YZA-21", "--keep", "opam"], "did you mean 'opamp'"),
        (["--gone", "YZA-21", "--save", "nowhere/x.json"], "there is no folder"),
    ],
)
def test_what_cannot_be_is_refused(saved: Path, words: list[str], said: str, capsys: Captured) -> None:
    assert main(["replace", str(saved), *words]) == 2
    out, err = capsys.readouterr()
    assert said in err
    assert out == ""


def test_inputs_are_not_written_over(saved: Path, capsys: Captured) -> None:
    for name in ("board.toml", "board.json", "opamps.csv", "channels/gate.toml"):
        path = saved.parent / name
        before = path.read_bytes()
        assert main(["replace", str(saved), "--gone", "YZA-21", "--save", str(path)]) == 2
        assert "that file is input of this run" in capsys.readouterr().err
        assert path.read_bytes() == before


def test_a_spoilt_board_record_is_named(saved: Path, capsys: Captured) -> None:
    data = json.loads(saved.read_text("utf-8"))
    saved.write_text(json.dumps(data | {"format": "luxsift-board/7"}))
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 2
    assert "expected 'luxsift-board/1' (another version of luxsift wrote it" in capsys.readouterr().err
    saved.write_text(json.dumps(data | {"plans": 3}))
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 2
    assert "plans: found '3', expected a list" in capsys.readouterr().err


# exposure


def test_exposure_names_the_board_and_its_channels(
    saved: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(saved.parent)
    with_cells(Path("photodiodes.csv"), "YZD-01", status="obsolete")
    assert main(["exposure", saved.name]) == 1
    out, err = capsys.readouterr()
    said = squeezed(out)
    assert "6 parts in 1 record" in said
    assert "obsolete" in said
    assert "board.json (gate, level)" in said
    assert "board.json (gate) no longer holds as it stands (status)" in said
    assert err == ""


def test_exposure_does_not_write_over_a_board_file(saved: Path, capsys: Captured) -> None:
    path = saved.parent / "board.toml"
    assert main(["exposure", str(saved), "--csv", str(path)]) == 2
    assert "that file is input of this run" in capsys.readouterr().err


# justify


@pytest.mark.parametrize("name", ["review.html", "review.md"])
def test_a_page_is_written(saved: Path, tmp_path: Path, name: str, capsys: Captured) -> None:
    path = tmp_path / name
    assert main(["justify", str(saved), "-o", str(path)]) == 0
    text = path.read_text("utf-8")
    assert "two gates and a level" in text
    assert "as plan 1" in text
    out, err = capsys.readouterr()
    assert (out, err) == ("", "")


def test_a_page_on_another_plan(saved: Path, tmp_path: Path) -> None:
    path = tmp_path / "review.md"
    assert main(["justify", str(saved), "--rank", "2", "-o", str(path)]) == 0
    assert "as plan 2" in path.read_text("utf-8")


def test_a_page_that_would_not_be_true_is_not_written(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    with_cells(saved.parent / "opamps.csv", "YZA-21", voltage_noise="9 nV/rtHz")
    path = tmp_path / "review.md"
    path.write_text("old")
    assert main(["justify", str(saved), "-o", str(path)]) == 2
    assert "plan 1, gate, snr" in capsys.readouterr().err
    assert path.read_text() == "old"


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--rank", "7"], "expected the rank of a plan, from 1 to 2"),
        (["--compare", "YZA-41"], "a board's record takes no part to compare with"),
        (["--request", "nowhere.toml"], "nowhere.toml"),
    ],
)
def test_what_a_page_cannot_be_is_refused(
    saved: Path, tmp_path: Path, words: list[str], said: str, capsys: Captured
) -> None:
    assert main(["justify", str(saved), *words, "-o", str(tmp_path / "review.md")]) == 2
    assert said in capsys.readouterr().err
    assert not (tmp_path / "review.md").exists()


def test_a_page_is_not_written_over_an_input(saved: Path, capsys: Captured) -> None:
    path = saved.parent / "channels" / "notes.md"
    gate = saved.parent / "channels" / "gate.toml"
    gate.rename(path)
    file = saved.parent / "board.toml"
    file.write_text(file.read_text("utf-8").replace("channels/gate.toml", "channels/notes.md"), "utf-8")
    assert main(["justify", str(saved), "-o", str(path)]) == 2
    assert "that file is input of this run" in capsys.readouterr().err
