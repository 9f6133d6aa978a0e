"""`luxsift tradeoff` as a user meets it: the table, a front, CSV, and what is wrong with a command."""

from __future__ import annotations

import csv
from dataclasses import replace
from io import StringIO
from pathlib import Path

import pytest

import optimizer as lux
from optimizer.cli import main
from optimizer.cli.options import tradeoff as options
from optimizer.search.weigh.front import AGAINST

Capture = pytest.CaptureFixture[str]


def edited(request_file: Path, old: str, new: str) -> str:
    """A request beside `request_file` in which `old` reads `new`."""
    path = request_file.with_name("edited.toml")
    text = request_file.read_text("utf-8")
    assert old in text
    path.write_text(text.replace(old, new), "utf-8")
    return str(path)


def rows_of(table: Path) -> list[dict[str, str]]:
    return list(csv.DictReader(StringIO(table.read_text("utf-8"))))


def test_the_table_names_the_cheapest_and_every_target(request_file: Path, capsys: Capture) -> None:
    assert main(["tradeoff", str(request_file)]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    best = lux.shortlist(replace(lux.read_request(request_file))).candidates[0]
    words = " ".join(out.split())
    assert f"{best['photodiode']} ({best['photodiode_maker']}) with {best['opamp']}" in words
    for target in best["targets"]:
        assert f"\n{target['name']} " in out
    assert max(len(line) for line in out.splitlines()) <= 80


def test_a_step_costs_what_a_shortlist_of_the_moved_request_says(
    request_file: Path, tmp_path: Path, capsys: Capture
) -> None:
    table = tmp_path / "steps.csv"
    assert main(["tradeoff", str(request_file), "--csv", str(table)]) == 0
    capsys.readouterr()
    rows = rows_of(table)
    request = lux.read_request(request_file)
    compared = 0
    for row in rows[::3]:
        name, limit = row["target"], row["limit"]
        if name in ("full_scale", "bandwidth", "slew") or not limit:
            continue  # a request cannot move the first alone; the others move the slew figure too
        moved = replace(request, targets=replace(request.targets, **{name: float(limit)}))
        found = lux.shortlist(replace(moved, ranking=replace(moved.ranking, by="cost", show=1)))
        if not row["cost"]:
            assert not found.candidates
            continue
        best = found.candidates[0]
        assert float(row["cost"]) == best["figures"]["cost"]
        assert float(row["margin"]) == pytest.approx(best["margin"], abs=1e-9)
        assert (row["photodiode"], row["opamp"]) == (best["photodiode"], best["opamp"])
        compared += 1
    assert compared >= 8


def test_a_front_rises_in_both_and_is_written_whole(
    request_file: Path, tmp_path: Path, capsys: Capture
) -> None:
    table = tmp_path / "front.csv"
    assert main(["tradeoff", str(request_file), "--against", "snr", "--csv", str(table)]) == 0
    out = capsys.readouterr().out
    rows = rows_of(table)
    assert f"{len(rows)} receivers that none beats in both" in " ".join(out.split())
    costs, values = ([float(row[name]) for row in rows] for name in ("cost", "value"))
    assert len(rows) >= 3
    assert costs == sorted(set(costs))
    assert values == sorted(set(values))
    assert "* meets the stated limit too" in out
    assert max(len(line) for line in out.splitlines()) <= 80


def test_where_nothing_meets_it_says_what_cannot_hold_together(request_file: Path, capsys: Capture) -> None:
    hard = edited(request_file, "\nsnr =", "\nsnr = 56 #")
    status = main(["tradeoff", hard])
    out = capsys.readouterr().out
    assert status == 1
    assert "Nothing meets the request as it stands." in out
    assert "Targets that cannot hold together" in out
    assert "The smallest relaxation of one target alone" in out


def test_csv_on_standard_output_sends_the_words_to_standard_error(
    request_file: Path, capsys: Capture
) -> None:
    assert main(["tradeoff", str(request_file), "--against", "offset", "--csv", "-"]) == 0
    out, err = capsys.readouterr()
    assert out.startswith('"target","value","cost"')
    assert "Cost in EUR against offset" in " ".join(err.split())


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--against", "snrr"], "did you mean 'snr'"),
        (["--against", "cost"], "expected a target"),
        (["--csv", "no/such/folder/x.csv"], "cannot be written"),
    ],
)
def test_a_bad_option_is_named_before_any_work(
    request_file: Path, capsys: Capture, words: list[str], said: str
) -> None:
    assert main(["tradeoff", str(request_file), *words]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert said in err


def test_slew_is_no_figure_without_a_bandwidth_target(request_file: Path, capsys: Capture) -> None:
    text = request_file.read_text("utf-8")
    kept = [line for line in text.splitlines() if not line.startswith(("bandwidth =", "slew ="))]
    path = request_file.with_name("edited.toml")
    path.write_text("\n".join(kept), "utf-8")
    assert main(["tradeoff", str(path), "--against", "slew"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert "slew needs a bandwidth target" in err


def test_the_targets_offered_are_those_of_the_search() -> None:
    assert options.AGAINST == AGAINST


def test_a_request_that_is_not_there(tmp_path: Path, capsys: Capture) -> None:
    assert main(["tradeoff", str(tmp_path / "none.toml")]) == 2
    assert "none.toml" in capsys.readouterr().err


def test_an_unwritable_file_leaves_the_old_one(request_file: Path, tmp_path: Path, capsys: Capture) -> None:
    assert main(["tradeoff", str(request_file), "--csv", str(request_file)]) == 2
    assert "that file is input of this run" in capsys.readouterr().err
    assert request_file.read_text("utf-8").startswith("#")
