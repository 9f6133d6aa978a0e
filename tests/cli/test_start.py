"""`luxsift start`: what it writes is read without a word, and nothing is ever overwritten."""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from optimizer.cli import main
from optimizer.cli.start import STARTER
from optimizer.record import read
from optimizer.request import read_request
from optimizer.request.types import SPREADS
from optimizer.study import load


def test_what_start_writes_is_read_without_a_problem(tmp_path: Path) -> None:
    assert main(["start", str(tmp_path / "new" / "folder")]) == 0
    study = load(tmp_path / "new" / "folder" / "request.toml")
    assert study.catalogs.opamps.size == 8
    assert study.catalogs.photodiodes.size == 6
    assert sorted(os.listdir(tmp_path / "new" / "folder")) == sorted(STARTER)


def test_start_names_one_file_a_line_and_the_next_command(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    main(["start", "a folder"])
    first, *files, label, command = capsys.readouterr().out.splitlines()
    assert "invented" in first
    assert files == [f"  a folder/{name}" for name in STARTER]
    assert label == "Next, type:"
    assert command == "  luxsift shortlist 'a folder/request.toml'"
    assert max(map(len, (first, *files, label, command))) <= 60


def test_start_writes_here_when_no_folder_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(["start"]) == 0
    assert (tmp_path / "request.toml").is_file()


def test_every_conflict_is_named_and_nothing_is_written(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "opamps.csv").write_text("mine")
    (tmp_path / "request.toml").symlink_to(tmp_path / "dangling")
    assert main(["start", str(tmp_path)]) == 2
    said = capsys.readouterr().err
    assert f"{tmp_path}/opamps.csv: there is such a file already" in said
    assert f"{tmp_path}/request.toml: there is such a file already" in said
    assert sorted(os.listdir(tmp_path)) == ["opamps.csv", "request.toml"]
    assert (tmp_path / "opamps.csv").read_text() == "mine"


def test_a_file_is_no_folder(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "file").write_text("mine")
    assert main(["start", str(tmp_path / "file")]) == 2
    assert "expected a folder" in capsys.readouterr().err


def test_a_write_that_fails_half_way_leaves_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    opened = Path.open

    def fail(path: Path, mode: str = "r", *rest: object) -> object:
        if path.name == "photodiodes.csv" and mode == "xb":
            raise OSError(28, "No space left on device")
        return opened(path, mode)

    monkeypatch.setattr(Path, "open", fail)
    assert main(["start", str(tmp_path)]) == 2
    assert "No space left on device; nothing was written" in capsys.readouterr().err
    assert os.listdir(tmp_path) == []


def test_an_interrupt_half_way_leaves_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    opened = Path.open

    def stop(path: Path, mode: str = "r", *rest: object) -> object:
        if path.name == "photodiodes.csv" and mode == "xb":
            raise KeyboardInterrupt
        return opened(path, mode)

    monkeypatch.setattr(Path, "open", stop)
    assert main(["start", str(tmp_path)]) == 130
    assert "interrupted; nothing was decided or written" in capsys.readouterr().err
    assert os.listdir(tmp_path) == []


def test_lines_that_show_a_usual_value_do_hold_it(tmp_path: Path) -> None:
    """A newcomer may take the mark away from any such line of [space] and the request means the same."""
    main(["start", str(tmp_path)])
    path = tmp_path / "request.toml"
    before = read_request(path)
    text = path.read_text()
    space = text[text.index("[space]") : text.index("# [converter]")]
    bare = re.sub(r"^# ", "", space, flags=re.MULTILINE)
    assert bare.count("=") > 10
    path.write_text(text.replace(space, bare))
    assert read_request(path) == before


def test_the_added_examples_are_valid_too(tmp_path: Path) -> None:
    main(["start", str(tmp_path)])
    path = tmp_path / "request.toml"
    text = path.read_text()
    for mark in ("converter", "assume.opamps"):
        block = re.search(rf"# \[{re.escape(mark)}\](.*\n# )*.*\n", text)
        assert block is not None
        text = text.replace(block[0], re.sub(r"^# ", "", block[0], flags=re.MULTILINE))
    path.write_text(text)
    request = read_request(path)
    assert request.converter is not None
    assert request.assume == {("opamps", "output_low"): 0.05}


def test_the_starter_runs_at_once(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["start", str(tmp_path)])
    capsys.readouterr()
    assert main(["shortlist", str(tmp_path / "request.toml"), "--save", str(tmp_path / "r.json")]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    record = read(tmp_path / "r.json")
    assert "The ranking is proven" in " ".join(out.split())
    assert record.data["search"]["proven"] is True
    shown = len(record.candidates) + len(record.near_misses)
    assert shown + sum(record.data["search"]["dropped"].values()) == 8 * 6
    # a newcomer sees both kinds of row, and every column of the table filled
    assert record.candidates
    assert record.near_misses
    assert all(row["margin"] >= 0 for row in record.candidates)
    assert all(row["margin"] < 0 and row["missed"] for row in record.near_misses)


def test_the_order_of_catalog_rows_and_the_workers_do_not_matter(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["start", str(tmp_path)])
    words = ["shortlist", str(tmp_path / "request.toml"), "--quiet", "--save", str(tmp_path / "r.json")]
    assert main(words) == 0
    first = dict(read(tmp_path / "r.json").data)
    for name in ("opamps.csv", "photodiodes.csv", "resistors.csv", "capacitors.csv"):
        header, *rows = (tmp_path / name).read_text().splitlines()
        (tmp_path / name).write_text("\n".join([header, *reversed(rows)]) + "\n")
    assert main([*words, "--workers", "2"]) == 0
    second = dict(read(tmp_path / "r.json").data)
    for data in (first, second):
        data["search"] = {k: v for k, v in data["search"].items() if k not in ("seconds", "evaluated")}
        data["inputs"] = [(entry["file"], entry["rows"]) for entry in data["inputs"]]
        del data["created"]
    assert first == second


def test_the_tolerances_that_it_shows_are_understood_and_leave_something(tmp_path: Path) -> None:
    """A newcomer may take the marks away from the lines of [tolerance] too."""
    main(["start", str(tmp_path)])
    path = tmp_path / "request.toml"
    text = path.read_text()
    shown = text[text.index("# [tolerance]") : text.index("[catalogs]")]
    path.write_text(text.replace(shown, re.sub(r"^# ", "", shown, flags=re.MULTILINE)))
    tolerance = read_request(path).tolerance
    assert (tolerance.method, tolerance.yield_) == ("corners", 0.99)
    assert {name: spread for name, spread in tolerance.spreads.items() if spread} == {
        "gbw": 0.2,
        "voltage_noise": 0.1,
        "input_capacitance": 0.2,
        "diode_capacitance": 0.1,
        "responsivity": 0.05,
    }
    for name in SPREADS:
        assert name in shown
    assert main(["shortlist", str(path), "--show", "1", "--quiet"]) == 0
