"""`luxsift exposure`: exit statuses, streams, files, refusals."""

from __future__ import annotations

import csv
import hashlib
import io
import json
from pathlib import Path

import pytest

from optimizer.cli import main
from tests.review.catalog_edits import with_cells, with_copy
from tests.saved_record import saved_in

Captured = pytest.CaptureFixture[str]


@pytest.fixture
def saved(tmp_path: Path, capsys: Captured) -> Path:
    path = saved_in(tmp_path)
    capsys.readouterr()
    return path


@pytest.fixture
def safe(saved: Path) -> Path:
    """A record of which every part has a twin."""
    folder = saved.parent
    with_cells(folder / "opamps.csv", "YZA-21", pinout="single-5")
    with_cells(folder / "photodiodes.csv", "YZD-01", pinout="smd-2")
    for file, part, twin in (
        ("opamps.csv", "YZA-21", {"part": "YZA-T"}),
        ("photodiodes.csv", "YZD-01", {"part": "YZD-T"}),
        ("resistors.csv", "YZR-K", {"family": "YZR-T"}),
        ("capacitors.csv", "YZC-G", {"family": "YZC-T"}),
        ("capacitors.csv", "YZC-X", {"family": "YZC-Y"}),
    ):
        with_copy(folder / file, part, **twin)
    return saved


def test_a_part_without_a_substitute_ends_with_1(saved: Path, capsys: Captured) -> None:
    assert main(["exposure", str(saved)]) == 1
    out, err = capsys.readouterr()
    assert "NO SUBSTITUTE" in out
    assert err == ""


def test_a_substitute_for_every_part_ends_with_0(safe: Path, capsys: Captured) -> None:
    assert main(["exposure", str(safe)]) == 0
    assert "Every part has a substitute in its footprint" in capsys.readouterr().out


def test_an_obsolete_part_ends_with_1(safe: Path, capsys: Captured) -> None:
    with_cells(safe.parent / "opamps.csv", "YZA-21", status="obsolete")
    assert main(["exposure", str(safe)]) == 1
    out = capsys.readouterr().out
    assert "1 is obsolete or no longer in the catalogs" in out
    assert "no longer holds as it stands (status)" in " ".join(out.split())


def test_the_csv_holds_every_part(safe: Path, tmp_path: Path, capsys: Captured) -> None:
    path = tmp_path / "parts.csv"
    assert main(["exposure", str(safe), "--csv", str(path)]) == 0
    rows = list(csv.DictReader(io.StringIO(path.read_text("utf-8"), newline="")))
    assert {row["part"] for row in rows} == {"YZA-21", "YZD-01", "YZR-K", "YZC-G", "YZC-X"}
    assert {row["drop_ins"] for row in rows} == {"1"}
    capsys.readouterr()
    assert main(["exposure", str(safe), "--csv", "-"]) == 0
    out, err = capsys.readouterr()
    assert out.startswith('"part"')
    assert "5 parts in 1 record" in err


def test_several_records_are_summed(saved: Path, capsys: Captured) -> None:
    other = saved.with_name("other.json")
    other.write_bytes(saved.read_bytes())
    main(["exposure", str(saved), str(other)])
    out = capsys.readouterr().out
    assert "5 parts in 2 records" in out
    assert "400" in out


@pytest.mark.parametrize("width", ["80", "120"])
def test_the_width_is_kept(safe: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch, width: str) -> None:
    monkeypatch.chdir(safe.parent)
    monkeypatch.setenv("COLUMNS", width)
    assert main(["exposure", safe.name]) == 0
    assert max(len(line) for line in capsys.readouterr().out.split("\n")) <= int(width)


# Refusals


def test_every_problem_is_said_at_once(saved: Path, tmp_path: Path, capsys: Captured) -> None:
    other = tmp_path / "other.json"
    other.write_text(json.dumps({"format": "something/1"}), "utf-8")
    words = [str(saved), str(other), str(tmp_path / "gone.json"), "--csv", str(tmp_path / "no" / "parts.csv")]
    assert main(["exposure", *words]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    for said in ("3 problems", "other.json", "gone.json", "there is no folder"):
        assert said in err


def test_a_vanished_catalog_is_named(saved: Path, capsys: Captured) -> None:
    (saved.parent / "photodiodes.csv").unlink()
    assert main(["exposure", str(saved)]) == 2
    err = capsys.readouterr().err
    assert "photodiodes.csv" in err
    assert "put it back" in err
    assert "Traceback" not in err


@pytest.mark.parametrize("name", ["record.json", "request.toml", "resistors.csv"])
def test_no_input_is_overwritten(saved: Path, capsys: Captured, name: str) -> None:
    target = saved.parent / name
    before = hashlib.sha256(target.read_bytes()).hexdigest()
    assert main(["exposure", str(saved), "--csv", str(target)]) == 2
    assert "that file is input of this run" in capsys.readouterr().err
    assert hashlib.sha256(target.read_bytes()).hexdigest() == before


def test_a_record_without_a_chosen_row_is_named(saved: Path, capsys: Captured) -> None:
    data = json.loads(saved.read_text("utf-8")) | {"chosen": None}
    saved.write_text(json.dumps(data), "utf-8")
    assert main(["exposure", str(saved)]) == 2
    assert "marks no candidate as chosen" in capsys.readouterr().err


def test_nothing_to_look_at(capsys: Captured) -> None:
    assert main(["exposure"]) == 2
    assert "RECORD" in capsys.readouterr().err
