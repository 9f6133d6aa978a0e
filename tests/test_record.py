"""The record: what it says, that it is written whole or not at all, and what is refused on reading."""

from __future__ import annotations

import json
import os
from dataclasses import replace
from datetime import datetime
from pathlib import Path

import pandas as pd
import pytest

from optimizer.errors import InputError, OutputError
from optimizer.record import build, read, write, write_text
from optimizer.search.result import Outcome
from tests import made_up
from tests.made_up import CANDIDATE, DIVIDER, FIGURES, MISS, REQUEST, outcome, record, study

# The keys are those of the contract's page on the record.
TOP = {"format", "name", "created", "version", "request", "chosen", "inputs", "search"}
TOP |= {"candidates", "near_misses"}
CANDIDATE_KEYS = {"rank", "photodiode", "opamp", "photodiode_maker", "opamp_maker", "wiring", "reference"}
CANDIDATE_KEYS |= {"feedback_resistance", "resistor_family", "feedback_capacitance", "capacitor_family"}
CANDIDATE_KEYS |= {"low_pass", "figures", "targets", "limiting", "margin", "assumed"}


def test_record_has_the_contracts_keys() -> None:
    data = record(outcome(near_misses=(MISS,))).data
    assert set(data) >= TOP
    assert set(data["search"]) >= {"combinations", "evaluated", "seconds", "proven", "dropped"}
    assert set(data["candidates"][0]) >= CANDIDATE_KEYS
    assert set(data["near_misses"][0]) >= CANDIDATE_KEYS | {"missed"}
    assert set(data["candidates"][0]["figures"]) == set(FIGURES)
    assert set(data["candidates"][0]["targets"][0]) == {"name", "value", "limit", "margin"}
    reference = {"kind", "voltage", "top", "bottom", "buffered", "extra_package"}
    assert set(data["candidates"][0]["reference"]) == reference


def test_inputs_begin_with_the_request() -> None:
    inputs = record().data["inputs"]
    assert [entry["file"] for entry in inputs] == ["request.toml", "opamps.csv", "photodiodes.csv"]
    assert set(inputs[0]) == {"file", "sha256", "rows"}


def test_format_created_and_version() -> None:
    data = record().data
    assert data["format"] == "luxsift-shortlist/1"
    assert datetime.fromisoformat(data["created"]).tzinfo is not None
    assert data["version"]


def test_near_misses_go_on_in_rank() -> None:
    data = record(outcome((CANDIDATE, CANDIDATE), (MISS, MISS))).data
    assert [row["rank"] for row in data["candidates"] + data["near_misses"]] == [1, 2, 3, 4]


def test_figures_that_do_not_exist_are_null_and_json_has_no_infinity(tmp_path: Path) -> None:
    figures = {**FIGURES, "dynamic_range": None, "slew": float("inf"), "peaking": -0.0}
    data = record(outcome((replace(CANDIDATE, figures=figures),))).data
    write_text(tmp_path / "r.json", json.dumps(data, allow_nan=False))
    kept = data["candidates"][0]["figures"]
    assert kept["dynamic_range"] is None
    assert kept["slew"] is None
    assert str(kept["peaking"]) == "0.0"


def test_figures_are_not_rounded_again() -> None:
    figures = {**FIGURES, "snr": 48.12345678}
    kept = record(outcome((replace(CANDIDATE, figures=figures),))).data["candidates"][0]["figures"]
    assert kept["snr"] == 48.12345678


def test_nothing_is_chosen_without_candidates() -> None:
    assert record(outcome((), (MISS,))).data["chosen"] is None
    assert record().data["chosen"] == 1


def test_a_choice_beyond_the_candidates_is_refused() -> None:
    with pytest.raises(InputError, match="--choose: found '3', expected a rank from 1 to 2"):
        build(study(), outcome((CANDIDATE, CANDIDATE)), 3)


def test_write_and_read_give_the_same_record(tmp_path: Path) -> None:
    awkward = replace(CANDIDATE, photodiode='<b>"Ω"\n', opamp="=1+1", assumed=("opamp.gbw",))
    first = record(outcome((awkward,), (MISS,)))
    write(first, tmp_path / "record.json")
    assert read(tmp_path / "record.json").data == first.data
    assert sorted(os.listdir(tmp_path)) == ["record.json"]


def test_left_out_rows_are_counted_by_file() -> None:
    rows = tuple(made_up.LeftOut("opamps.csv", row, "bad") for row in (3, 9))
    data = build(study(left_out=rows), outcome()).data
    assert data["left_out"] == [{"file": "opamps.csv", "rows": 2}]


# Writing: whole or not at all


def test_a_missing_folder_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="there is no folder"):
        write(record(), tmp_path / "nowhere" / "record.json")


def test_a_folder_is_no_file(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="that is a folder"):
        write(record(), tmp_path)


@pytest.mark.parametrize("step", ["replace", "fsync"])
def test_a_failed_write_leaves_the_old_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, step: str
) -> None:
    target = tmp_path / "record.json"
    target.write_text("old")

    def fail(*_args: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, step, fail)
    with pytest.raises(OutputError, match=r"record\.json: cannot be written: No space left on device"):
        write(record(), target)
    assert target.read_text() == "old"
    assert os.listdir(tmp_path) == ["record.json"]


def test_an_interrupted_write_leaves_no_temporary_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def stop(*_args: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(os, "fsync", stop)
    with pytest.raises(KeyboardInterrupt):
        write_text(tmp_path / "x", "text")
    assert os.listdir(tmp_path) == []


def test_a_device_is_not_replaced() -> None:
    with pytest.raises(OutputError, match="no ordinary file"):
        write_text("/dev/null", "text")
    assert not Path("/dev/null").is_file()


def test_mode_and_link_of_the_old_file_stay(tmp_path: Path) -> None:
    real, link = tmp_path / "real.json", tmp_path / "link.json"
    real.write_text("old")
    real.chmod(0o640)
    link.symlink_to(real)
    write_text(link, "new")
    assert link.is_symlink()
    assert real.read_text() == "new"
    assert real.stat().st_mode & 0o777 == 0o640


# Reading: what is refused, and with which words


def changed(**changes: object) -> str:
    return json.dumps({**record(outcome(near_misses=(MISS,))).data, **changes})


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "line 1: expected a record in JSON"),
        ('{"format": 1,\n "x" 2}', "line 2: expected a record in JSON"),
        ("[]", "expected a record, 'luxsift-shortlist/1'"),
        ("{}", "expected a record, 'luxsift-shortlist/1'"),
        ('{"format": "other/1"}', "found 'other/1', expected a record"),
        ('{"format": "luxsift-shortlist/2"}', "another version of luxsift wrote it"),
        ('{"format": NaN}', "NaN is not a number in JSON"),
        ("[" * 100_000, "expected a record in JSON"),
        (changed(candidates=3), "candidates: found '3', expected a list"),
        (changed(candidates=[{}]), "candidates[0].rank: the record lacks this key"),
        (changed(near_misses=["x"]), "near_misses[0]: expected a table"),
        (changed(request={}), "request.light: the record lacks this key"),
        (changed(request={"quantity": 1, "light": {}, "space": {}, "ranking": {}}), "request.ranking.by"),
        (changed(chosen=True), "chosen: found 'True', expected a whole number or null"),
    ],
)
def test_what_is_no_record_is_refused(tmp_path: Path, text: str, said: str) -> None:
    path = tmp_path / "record.json"
    path.write_text(text)
    with pytest.raises(InputError) as caught:
        read(path)
    assert said in str(caught.value)
    assert "record.json" in str(caught.value)


def test_a_missing_file_and_stray_bytes_are_refused(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be read: No such file"):
        read(tmp_path / "record.json")
    (tmp_path / "record.json").write_bytes(b"{\xff}")
    with pytest.raises(InputError, match="expected a record in UTF-8; byte 1 is not"):
        read(tmp_path / "record.json")


def test_unknown_keys_are_ignored(tmp_path: Path) -> None:
    (tmp_path / "record.json").write_text(changed(added={"later": 1}))
    assert len(read(tmp_path / "record.json").candidates) == 1


# Tables for a notebook


def test_table_has_one_row_a_candidate_in_si() -> None:
    divided = replace(CANDIDATE, reference=DIVIDER, capacitor_family=None, feedback_capacitance=0.0)
    table = record(outcome((CANDIDATE, divided), (MISS,))).table
    assert list(table["rank"]) == [1, 2]
    assert table["bandwidth"].iloc[0] == FIGURES["bandwidth"]
    assert table["divider_top"].isna().tolist() == [True, False]
    assert table["buffered"].tolist() == [False, True]
    assert table["snr_margin"].iloc[0] == 0.277
    assert pd.api.types.is_float_dtype(table["low_pass"])


def test_table_without_candidates_keeps_its_columns() -> None:
    empty = record(outcome((), (MISS,)))
    assert len(empty.table) == 0
    assert list(empty.table.columns) == list(record().table.columns)
    assert empty.near_miss_table["missed"].iloc[0] == "snr; dynamic_range; cost"


def test_targets_not_stated_have_no_margin_column() -> None:
    columns = record().table.columns
    assert "full_scale_margin" in columns
    assert "peaking_margin" not in columns
    assert REQUEST.targets.peaking is None


def test_notebook_table_escapes_names_and_shows_units() -> None:
    html = record(outcome((replace(CANDIDATE, photodiode="<script>x</script>"),)))._repr_html_()
    assert "<script>" not in html
    assert "&lt;script&gt;" in html
    assert "24.1 kHz" in html
    assert "48.1 dB" in html


def test_notebook_shows_near_misses_where_nothing_meets() -> None:
    html = record(outcome((), (MISS,)))._repr_html_()
    assert "nothing meets the request; 1 near miss" in html
    assert "YZD-30" in html


# At a prompt


@pytest.mark.parametrize(
    ("result", "said"),
    [
        (outcome(), "1 meets the request, the first limited by full_scale"),
        (outcome((CANDIDATE,) * 3, (MISS,)), "3 meet the request, the first limited by full_scale"),
        (outcome(proven=False), "1 meets the request, the first limited by full_scale, not proven"),
        (
            outcome((), (MISS, MISS)),
            "nothing meets the request; 2 near misses, the nearest limited by dynamic_range",
        ),
        (outcome((), ()), "nothing meets the request, no pair is eligible"),
        (outcome((), (), impossible=("snr: shot noise",)), "no part could meet the request"),
    ],
)
def test_repr_is_one_line(result: Outcome, said: str) -> None:
    assert repr(record(result)) == f"<Record {REQUEST.name}: {said}>"


def test_repr_stays_short_and_on_one_line_whatever_the_name() -> None:
    awkward = replace(REQUEST, name="a\n\x1b[31m" + "b" * 5000)
    assert repr(record(request=awkward)).isprintable()
    assert len(repr(record(request=awkward))) < 160


def test_print_shows_the_summary_over_a_table_that_fits_a_prompt() -> None:
    bare = replace(CANDIDATE, photodiode="YZD\x1b[31m", feedback_capacitance=0.0, capacitor_family=None)
    first, head, *rows = str(record(outcome((CANDIDATE, bare), (MISS,)))).split("\n")
    assert first.endswith("2 meet the request, the first limited by full_scale")
    assert head.split() == ["rank", "photodiode", "op-amp", "Rf", "Cf", "bandwidth", "SNR", "cost",
                            "limiting", "margin"]  # fmt: skip
    said = ["1", "YZD-21", "YZA-14", "1", "Mohm", "4.7", "pF", "24.1", "kHz", "48.1", "dB", "3.21"]
    assert rows[0].split() == [*said, "full_scale", "10", "%"]
    assert "none" in rows[1].split()
    assert all(line.isprintable() for line in rows)
    assert max(len(line) for line in (head, *rows)) <= 100


def test_print_shows_near_misses_where_nothing_meets_and_no_table_without_rows() -> None:
    assert "YZD-30" in str(record(outcome((), (MISS,))))
    none = record(outcome((), ()))
    assert f"<Record {none}>" == repr(none)
    assert "<table" not in none._repr_html_()
