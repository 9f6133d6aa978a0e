"""`luxsift justify` on the command line: what it writes, what it refuses, and what it leaves alone."""

from __future__ import annotations

import json
import os
import sys
from pathlib import Path
from typing import Any

import pytest

from optimizer.cli import main

Captured = pytest.CaptureFixture[str]
OLD = "an older page\n"


@pytest.fixture
def saved(request_file: Path, capsys: Captured) -> Path:
    record = request_file.parent / "record.json"
    assert main(["shortlist", str(request_file), "--quiet", "--save", str(record)]) == 0
    capsys.readouterr()
    return record


@pytest.fixture
def page(tmp_path: Path) -> Path:
    """A page from an earlier run."""
    path = tmp_path / "review.html"
    path.write_text(OLD, "utf-8")
    return path


def refused(capsys: Captured, *words: object) -> str:
    assert main(["justify", *map(str, words)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    return err


def rewrite(path: Path, **changes: Any) -> None:
    path.write_text(json.dumps(json.loads(path.read_text("utf-8")) | changes), "utf-8")


def test_html_by_name(saved: Path, page: Path, capsys: Captured) -> None:
    assert main(["justify", str(saved), "-o", str(page)]) == 0
    assert capsys.readouterr() == ("", "")
    assert page.read_text("utf-8").startswith("<!DOCTYPE html>")


def test_markdown_by_name(saved: Path, tmp_path: Path) -> None:
    path = tmp_path / "review.md"
    assert main(["justify", str(saved), "--output", str(path)]) == 0
    assert path.read_text("utf-8").startswith("# light gate, receive channel\n")


def test_another_row(saved: Path, tmp_path: Path) -> None:
    path, row = tmp_path / "second.md", json.loads(saved.read_text("utf-8"))["candidates"][1]
    assert main(["justify", str(saved), "--rank", "2", "-o", str(path)]) == 0
    assert f"{row['photodiode']} with {row['opamp']}" in path.read_text("utf-8")


def test_the_commands_that_a_page_names_make_it_again(
    saved: Path, tmp_path: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "review.md"
    assert main(["justify", str(saved), "-o", str(path)]) == 0
    first = path.read_text("utf-8")
    commands = [line.split()[1:] for line in first.splitlines() if line.startswith("luxsift ")]
    assert len(commands) == 2
    path.unlink()
    for words in commands:
        assert main(words) == 0
    varying = ("record made", "Covered")
    lines = [
        [line for line in text.splitlines() if not any(word in line for word in varying)]
        for text in (first, path.read_text("utf-8"))
    ]
    assert lines[0] == lines[1]


def test_a_moved_request_is_found_by_the_option(
    saved: Path, page: Path, tmp_path: Path, capsys: Captured
) -> None:
    moved = (tmp_path / "request.toml").rename(tmp_path / "moved.toml")
    assert "--request" in refused(capsys, saved, "-o", page)
    assert page.read_text("utf-8") == OLD
    assert main(["justify", str(saved), "--request", str(moved), "-o", str(page)]) == 0


def test_a_change_elsewhere_is_said_on_standard_error(
    saved: Path, page: Path, tmp_path: Path, capsys: Captured
) -> None:
    catalog = tmp_path / "capacitors.csv"
    catalog.write_bytes(catalog.read_bytes() + b"\n")
    assert main(["justify", str(saved), "-o", str(page)]) == 0
    assert capsys.readouterr().err == "luxsift: capacitors.csv is not what it was when the record was made\n"
    assert "Inputs have changed" in page.read_text("utf-8")


def test_a_change_that_moves_the_candidate_is_refused(
    saved: Path, page: Path, tmp_path: Path, capsys: Captured
) -> None:
    request = tmp_path / "request.toml"
    request.write_text(request.read_text("utf-8").replace('weakest = "20 nW"', 'weakest = "21 nW"'), "utf-8")
    said = refused(capsys, saved, "-o", page)
    assert "row 1, snr" in said
    assert "request.toml: this input is changed since the record was made" in said
    assert page.read_text("utf-8") == OLD


def test_a_vanished_catalog_is_refused_by_name(
    saved: Path, page: Path, tmp_path: Path, capsys: Captured
) -> None:
    (tmp_path / "opamps.csv").unlink()
    said = refused(capsys, saved, "-o", page)
    assert "opamps.csv" in said
    assert "put it back" in said
    assert f"as seen from the folder {tmp_path}" in said
    assert page.read_text("utf-8") == OLD


def test_a_part_that_has_left_the_catalogs_is_refused_by_name(
    saved: Path, page: Path, tmp_path: Path, capsys: Captured
) -> None:
    row = json.loads(saved.read_text("utf-8"))["candidates"][0]
    catalog = tmp_path / "opamps.csv"
    lines = catalog.read_text("utf-8").splitlines(keepends=True)
    catalog.write_text("".join(line for line in lines if not line.startswith(f"{row['opamp']},")), "utf-8")
    assert f"{row['opamp']} of {row['opamp_maker']} is not in the catalogs" in refused(
        capsys, saved, "-o", page
    )
    assert page.read_text("utf-8") == OLD


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"format": "luxsift-shortlist/2"}, "another version of luxsift wrote it"),
        ({"format": "parts-list/1"}, "expected a record"),
        ({"candidates": [], "chosen": None}, "nothing met its request"),
        ({"chosen": None}, "give --rank"),
    ],
)
def test_a_record_that_will_not_do(
    saved: Path, page: Path, capsys: Captured, change: dict[str, Any], said: str
) -> None:
    rewrite(saved, **change)
    assert said in refused(capsys, saved, "-o", page)
    assert page.read_text("utf-8") == OLD


@pytest.mark.parametrize("rank", ["0", "x", "99", "-1"])
def test_a_rank_that_is_none(saved: Path, page: Path, capsys: Captured, rank: str) -> None:
    assert rank in refused(capsys, saved, f"--rank={rank}", "-o", page)
    assert page.read_text("utf-8") == OLD


def test_a_near_miss_is_no_candidate(saved: Path, page: Path, capsys: Captured) -> None:
    missed = json.loads(saved.read_text("utf-8"))["near_misses"][0]["rank"]
    assert "near miss" in refused(capsys, saved, "--rank", missed, "-o", page)


@pytest.mark.parametrize("name", ["review.pdf", "review", "html"])
def test_a_name_that_is_neither(saved: Path, tmp_path: Path, capsys: Captured, name: str) -> None:
    assert "ends in .html or .md" in refused(capsys, saved, "-o", tmp_path / name)
    assert not (tmp_path / name).exists()


def test_no_output_is_a_bad_command_line(saved: Path, capsys: Captured) -> None:
    assert "--output" in refused(capsys, saved)


@pytest.mark.parametrize("place", ["nowhere/review.html", "folder.html"])
def test_a_place_that_cannot_be_written(saved: Path, tmp_path: Path, capsys: Captured, place: str) -> None:
    (tmp_path / "folder.html").mkdir()
    assert "cannot be written" in refused(capsys, saved, "-o", tmp_path / place)


def test_an_input_is_never_overwritten(saved: Path, capsys: Captured) -> None:
    named = saved.rename(saved.with_name("record.md"))
    before = named.read_bytes()
    assert "input of this run" in refused(capsys, named, "-o", named)
    assert named.read_bytes() == before


@pytest.mark.parametrize("missing", ["jinja2", "matplotlib"])
def test_without_the_extra_html_says_what_to_install_and_markdown_works(
    saved: Path, page: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch, missing: str
) -> None:
    monkeypatch.setitem(sys.modules, missing, None)
    assert 'pip install "luxsift[report]"' in refused(capsys, saved, "-o", page)
    assert page.read_text("utf-8") == OLD
    assert main(["justify", str(saved), "-o", str(page.with_suffix(".md"))]) == 0


def test_what_goes_wrong_while_writing_leaves_the_old_page(
    saved: Path, page: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_words: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", full)
    assert "No space left on device" in refused(capsys, saved, "-o", page)
    assert page.read_text("utf-8") == OLD
    assert not list(page.parent.glob(".luxsift-*"))


def test_parts_are_compared_and_the_command_for_it_is_named(saved: Path, tmp_path: Path) -> None:
    path = tmp_path / "review.md"
    words = ["--compare", "YZA-31", "--compare", "Yonderbeck Analog/YZA-22", "--compare", "YZA-31"]
    assert main(["justify", str(saved), *words, "-o", str(path)]) == 0
    text = path.read_text("utf-8")
    assert text.count("### Why not YZA-31\n") == 1
    assert "### Why not Yonderbeck Analog/YZA-22\n" in text
    assert "--compare YZA-31 --compare 'Yonderbeck Analog/YZA-22' -o" in text


def test_a_part_that_is_unknown_is_refused_before_any_work(
    saved: Path, page: Path, capsys: Captured, monkeypatch: pytest.MonkeyPatch
) -> None:
    def worked(*_words: object) -> None:
        raise AssertionError

    monkeypatch.setattr("optimizer.review.dossier.gather", worked)
    monkeypatch.setattr("optimizer.review.weighing.weigh", worked)
    said = refused(capsys, saved, "--compare", "YZA-3l", "--compare", "YZD-O1", "-o", page)
    assert (
        "--compare: found 'YZA-3l', the catalogs hold no such part or family (did you mean 'YZA-31'?)" in said
    )
    assert "found 'YZD-O1'" in said
    assert page.read_text("utf-8") == OLD
