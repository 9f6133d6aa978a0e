"""`luxsift replace`: exit statuses, streams, files, refusals."""

from __future__ import annotations

import hashlib
import io
import json
import sys
from pathlib import Path

import pytest

from optimizer.cli import main
from optimizer.cli.options.replace import KEEPABLE
from optimizer.cli.steps import steps
from optimizer.record import read
from optimizer.search.locate import POSITIONS
from tests.review.catalog_edits import with_cells, with_copy, without
from tests.saved_record import saved_in

Captured = pytest.CaptureFixture[str]


@pytest.fixture
def saved(tmp_path: Path, capsys: Captured) -> Path:
    """A record whose op-amp has a twin with the same outline."""
    path = saved_in(tmp_path)
    with_cells(tmp_path / "opamps.csv", "YZA-21", package="SOT-23-5", pinout="single-5")
    with_copy(tmp_path / "opamps.csv", "YZA-21", part="YZA-29", price="1.50")
    capsys.readouterr()
    return path


def digest(path: Path) -> str:
    return hashlib.sha256(path.read_bytes()).hexdigest()


# Exit statuses and files


def test_a_substitute_is_found_printed_and_saved(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    out = tmp_path / "substitutes.json"
    assert main(["replace", str(saved), "--gone", "YZA-21", "--save", str(out)]) == 0
    printed, err = capsys.readouterr()
    assert "YZD-01 with YZA-29" in printed
    assert err == ""
    record = read(out)
    assert record.candidates[0]["opamp"] == "YZA-29"
    assert record.data["chosen"] == 1


def test_what_was_saved_is_read_again(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    out = tmp_path / "substitutes.json"
    main(["replace", str(saved), "--gone", "YZA-21", "--save", str(out)])
    capsys.readouterr()
    assert main(["replace", str(out), "--gone", "YZA-29"]) == 0
    printed = capsys.readouterr().out
    assert "Gone: op-amp YZA-29" in printed
    assert "YZA-29 (Yonderbeck Analog)" in printed
    assert main(["exposure", str(out)]) in (0, 1)
    assert "YZA-29" in capsys.readouterr().out


def test_no_substitute(saved: Path, capsys: Captured) -> None:
    for part in ("YZA-22", "YZA-29"):
        with_cells(saved.parent / "opamps.csv", part, stock="1")
    kept = ["--keep", "photodiode", "wiring"]
    status = main(["replace", str(saved), "--gone", "YZA-21", *kept])
    printed = capsys.readouterr().out
    assert status == 1
    assert "No substitute meets the request." in printed


def test_the_record_to_standard_output(saved: Path, capsys: Captured) -> None:
    assert main(["replace", str(saved), "--gone", "YZA-21", "--save", "-"]) == 0
    out, err = capsys.readouterr()
    assert json.loads(out)["format"] == "luxsift-shortlist/1"
    assert "drop-in:" in err


def test_another_row_and_fewer_rows(saved: Path, capsys: Captured) -> None:
    assert main(["replace", str(saved), "--gone", "YZD-03", "--rank", "2", "--show", "1"]) == 0
    printed = capsys.readouterr().out
    assert "Row 2 of the record" in printed
    assert "row 5" not in printed


def test_an_obsolete_part_needs_no_name(saved: Path, capsys: Captured) -> None:
    with_cells(saved.parent / "opamps.csv", "YZA-21", status="obsolete")
    assert main(["replace", str(saved)]) == 0
    assert "YZA-21 (Yonderbeck Analog), obsolete in the catalogs" in " ".join(capsys.readouterr().out.split())


def test_a_request_that_has_moved(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    moved = tmp_path / "moved.toml"
    (tmp_path / "request.toml").rename(moved)
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 2
    assert "--request" in capsys.readouterr().err
    assert main(["replace", str(saved), "--gone", "YZA-21", "--request", str(moved)]) == 0


@pytest.mark.parametrize("width", ["80", "120"])
def test_the_width_is_kept(
    saved: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch, width: str
) -> None:
    monkeypatch.setenv("COLUMNS", width)
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 0
    assert max(len(line) for line in capsys.readouterr().out.split("\n")) <= int(width)


# Refusals


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--gone", "YZA-2Z"], "did you mean"),
        (["--gone", "YZA-12"], "row 1 does not use it"),
        ([], "name what is gone"),
        (["--gone", "YZA-21", "--keep", "opamp"], "cannot be kept"),
        (["--gone", "YZA-21", "--keep", "op-amp"], "did you mean 'opamp'?"),
        (["--gone", "YZA-21", "--rank", "9"], "a rank from 1 to"),
        (["--gone", "YZA-21", "--rank", "none"], "expected a whole number"),
        (["--gone", "YZA-21", "--show", "0"], "expected a whole number"),
        (["--gone", "YZA-21", "--save", "nowhere/out.json"], "there is no folder"),
        (["--gon", "YZA-21"], "did you mean '--gone'?"),
    ],
)
def test_bad_input_is_refused(
    saved: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch, words: list[str], said: str
) -> None:
    monkeypatch.chdir(saved.parent)
    before = digest(saved)
    assert main(["replace", str(saved), *words]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert said in err
    assert "Traceback" not in err
    assert digest(saved) == before


@pytest.mark.parametrize("name", ["record.json", "request.toml", "opamps.csv"])
def test_no_input_is_overwritten(saved: Path, capsys: Captured, name: str) -> None:
    target = saved.parent / name
    before = digest(target)
    assert main(["replace", str(saved), "--gone", "YZA-21", "--save", str(target)]) == 2
    assert "that file is input of this run" in capsys.readouterr().err
    assert digest(target) == before


def test_all_problems_are_said_at_once(saved: Path, capsys: Captured) -> None:
    (saved.parent / "opamps.csv").unlink()
    words = ["--gone", "YZA-21", "--keep", "everything", "--save", "nowhere/out.json"]
    assert main(["replace", str(saved), *words]) == 2
    err = capsys.readouterr().err
    for said in ("everything", "opamps.csv", "nowhere/out.json", "3 problems"):
        assert said in err


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"format": "luxsift-shortlist/2"}, "another version of luxsift wrote it"),
        ({"format": "plan/1"}, "expected a record"),
        ({"replaces": {"out": 3}}, "replaces"),
        ({"replaces": {"candidate": {}, "gone": [], "out": [3], "keep": []}}, "replaces.out[0]"),
    ],
)
def test_another_kind_of_record_is_refused(
    saved: Path, capsys: Captured, change: dict[str, object], said: str
) -> None:
    saved.write_text(json.dumps(json.loads(saved.read_text("utf-8")) | change), "utf-8")
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 2
    assert said in capsys.readouterr().err


def test_outlines_must_be_text(saved: Path, capsys: Captured) -> None:
    data = json.loads(saved.read_text("utf-8"))
    data["candidates"][0]["opamp_package"] = 8
    saved.write_text(json.dumps(data), "utf-8")
    assert main(["replace", str(saved), "--gone", "YZA-21"]) == 2
    assert "candidates[0].opamp_package" in capsys.readouterr().err


def test_an_old_file_stays_where_writing_fails(
    saved: Path, tmp_path: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    out = tmp_path / "substitutes.json"
    out.write_text("old", "utf-8")
    monkeypatch.setattr("os.fsync", full)
    assert main(["replace", str(saved), "--gone", "YZA-21", "--save", str(out)]) == 2
    printed, err = capsys.readouterr()
    assert "YZA-29" in printed
    assert "No space left on device" in err
    assert out.read_text("utf-8") == "old"


def test_a_part_that_vanished_is_not_kept_in_silence(saved: Path, capsys: Captured) -> None:
    without(saved.parent / "opamps.csv", "YZA-21")
    assert main(["replace", str(saved), "--keep", "opamp"]) == 2
    assert "no longer in the catalogs" in capsys.readouterr().err


def test_what_can_be_kept_are_positions() -> None:
    assert set(KEEPABLE) == set(POSITIONS) - {"low_pass"}


# Steps


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_steps_are_shown_on_a_terminal_only(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.setenv("COLUMNS", "100")
    shown = Terminal()
    monkeypatch.setattr(sys, "stderr", shown)
    with steps("records", total=3) as step:
        step("a.json")
        step("b.json")
    assert "1 of 3 records done" in shown.getvalue()
    assert "b.json" in shown.getvalue()
    hidden = io.StringIO()
    monkeypatch.setattr(sys, "stderr", hidden)
    with steps("records", total=3) as step:
        step("a.json")
    assert hidden.getvalue() == ""
