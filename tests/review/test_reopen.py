"""A record taken up again: where its request is found, what has changed since, what is refused."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest

from optimizer.errors import InputError, Problem
from optimizer.record import Record, read
from optimizer.review.reopen import Changed, ReopenError, chosen_of, reopen
from tests import made_up
from tests.made_up import CANDIDATE, MISS


def edit(path: Path, old: str, new: str) -> None:
    text = path.read_text("utf-8")
    assert old in text
    path.write_text(text.replace(old, new), "utf-8")


def rewrite(path: Path, **changes: Any) -> None:
    path.write_text(json.dumps(json.loads(path.read_text("utf-8")) | changes), "utf-8")


def refused(path: Path, request: Path | None = None) -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        reopen(path, request)
    return caught.value.problems


# Where the request is


def test_unchanged_inputs_are_found_beside_the_record(saved: Path) -> None:
    found = reopen(saved)
    assert found.changed == ()
    assert found.record.data == read(saved).data
    assert found.study.request.path == saved.parent / "request.toml"


def test_a_record_elsewhere_finds_its_request_where_it_was(saved: Path, tmp_path: Path) -> None:
    away = tmp_path / "away"
    away.mkdir()
    moved = saved.rename(away / "record.json")
    assert reopen(moved).study.request.path == tmp_path / "request.toml"


def test_of_two_requests_the_one_with_the_recorded_hash_is_taken(saved: Path, tmp_path: Path) -> None:
    away = tmp_path / "away"
    away.mkdir()
    moved = saved.rename(away / "record.json")
    (away / "request.toml").write_text("another = 1\n", "utf-8")
    found = reopen(moved)
    assert found.study.request.path == tmp_path / "request.toml"
    assert found.changed == ()


def test_with_neither_hash_right_the_request_beside_the_record_is_taken(saved: Path, tmp_path: Path) -> None:
    away = tmp_path / "away"
    away.mkdir()
    text = (tmp_path / "request.toml").read_text("utf-8")
    moved = saved.rename(away / "record.json")
    for catalog in (*tmp_path.glob("*.csv"), tmp_path / "source.toml"):
        (away / catalog.name).write_bytes(catalog.read_bytes())
    (away / "request.toml").write_text(f"# here\n{text}", "utf-8")
    edit(tmp_path / "request.toml", text, f"# there\n{text}")
    found = reopen(moved)
    assert found.study.request.path == away / "request.toml"
    assert [change.file for change in found.changed] == ["request.toml"]


def test_the_request_is_where_the_option_says(saved: Path, tmp_path: Path) -> None:
    renamed = (tmp_path / "request.toml").rename(tmp_path / "other.toml")
    found = reopen(saved, renamed)
    assert found.study.request.path == renamed
    assert found.changed == ()


def test_an_older_record_without_the_path_is_read_beside_its_request(saved: Path) -> None:
    data = json.loads(saved.read_text("utf-8"))
    del data["request_file"]
    saved.write_text(json.dumps(data), "utf-8")
    assert reopen(saved).changed == ()


def test_the_ranking_in_force_is_the_records(saved: Path) -> None:
    data = json.loads(saved.read_text("utf-8"))
    data["request"]["ranking"] |= {"by": "snr", "show": 7}
    rewrite(saved, request=data["request"])
    ranking = reopen(saved).study.request.ranking
    assert (ranking.by, ranking.show) == ("snr", 7)


# What has changed


def test_a_changed_catalog_is_named_with_both_hashes(saved: Path, tmp_path: Path) -> None:
    catalog = tmp_path / "opamps.csv"
    before = hashlib.sha256(catalog.read_bytes()).hexdigest()
    catalog.write_bytes(catalog.read_bytes() + b"\n")
    after = hashlib.sha256(catalog.read_bytes()).hexdigest()
    assert reopen(saved).changed == (Changed("opamps.csv", before, after),)


def test_a_changed_request_is_named(saved: Path, tmp_path: Path) -> None:
    request = tmp_path / "request.toml"
    request.write_bytes(request.read_bytes() + b"\n")
    assert [change.file for change in reopen(saved).changed] == ["request.toml"]


def test_new_and_gone_inputs_are_named(saved: Path, tmp_path: Path) -> None:
    (tmp_path / "opamps.csv").rename(tmp_path / "amplifiers.csv")
    edit(tmp_path / "request.toml", "opamps.csv", "amplifiers.csv")
    edit(tmp_path / "source.toml", 'file."opamps.csv"', 'file."amplifiers.csv"')
    changed = {change.file: (change.then, change.now) for change in reopen(saved).changed}
    assert changed["opamps.csv"][1] is None
    assert changed["amplifiers.csv"][0] is None


# What is refused


def test_a_vanished_request_is_named_with_what_to_do(saved: Path, tmp_path: Path) -> None:
    (tmp_path / "request.toml").unlink()
    (problem,) = refused(saved)
    assert problem.file == str(saved)
    assert problem.cell == "request.toml"
    assert str(tmp_path / "request.toml") in problem.rule
    assert "--request" in problem.remedy


def test_a_request_that_the_option_names_in_vain(saved: Path, tmp_path: Path) -> None:
    (problem,) = refused(saved, tmp_path / "nowhere.toml")
    assert problem.file == str(tmp_path / "nowhere.toml")
    assert "--request" in problem.remedy


def test_a_vanished_catalog_is_named_with_what_to_do(saved: Path, tmp_path: Path) -> None:
    (tmp_path / "photodiodes.csv").unlink()
    with pytest.raises(ReopenError) as caught:
        reopen(saved)
    assert caught.value.request == tmp_path / "request.toml"
    problems = [problem for problem in caught.value.problems if problem.file == "photodiodes.csv"]
    assert problems
    assert "put it back" in problems[0].remedy


def test_a_broken_catalog_keeps_its_own_remedy(saved: Path, tmp_path: Path) -> None:
    edit(tmp_path / "opamps.csv", "gbw", "gain_bandwith")
    assert all("put it back" not in problem.remedy for problem in refused(saved))


@pytest.mark.parametrize(
    ("change", "column"),
    [
        ({"inputs": []}, "inputs"),
        ({"inputs": ["request.toml"]}, "inputs[0]"),
        ({"inputs": [{"file": "request.toml"}]}, "inputs[0]"),
        ({"format": "luxsift-shortlist/2"}, "format"),
        ({"format": "something/1"}, "format"),
    ],
)
def test_what_is_no_record_is_refused(saved: Path, change: Mapping[str, Any], column: str) -> None:
    rewrite(saved, **change)
    assert [problem.column for problem in refused(saved)] == [column]


@pytest.mark.parametrize(("key", "value"), [("by", "beauty"), ("show", 0)])
def test_a_ranking_that_cannot_be_is_refused(saved: Path, key: str, value: object) -> None:
    data = json.loads(saved.read_text("utf-8"))
    data["request"]["ranking"][key] = value
    rewrite(saved, request=data["request"])
    assert [problem.column for problem in refused(saved)] == [f"request.ranking.{key}"]


# Which candidate is meant


def two_rows() -> Record:
    return made_up.record(made_up.outcome((CANDIDATE, CANDIDATE), (MISS,)), chosen=2)


def test_the_chosen_row_is_meant_unless_a_rank_is_given() -> None:
    assert chosen_of(two_rows())["rank"] == 2
    assert chosen_of(two_rows(), 1)["rank"] == 1


@pytest.mark.parametrize(
    ("record", "rank", "said"),
    [
        (two_rows(), 4, "rank from 1 to 2"),
        (two_rows(), 3, "near miss"),
        (made_up.record(chosen=None), None, "give --rank"),
        (made_up.record(made_up.outcome((), (MISS,))), None, "nothing met its request"),
        (made_up.record(), 2, "the one row"),
    ],
)
def test_a_row_that_is_none_is_refused(record: Record, rank: int | None, said: str) -> None:
    with pytest.raises(InputError, match=said):
        chosen_of(record, rank)
