"""The dossier: what is computed again agrees with the record, or is refused with what has changed."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from optimizer.cli import main
from optimizer.errors import InputError
from optimizer.review.dossier import Dossier, differences, gather, place_of
from optimizer.review.reopen import reopen


def dossier_of(record: Path, rank: int | None = None) -> Dossier:
    found = reopen(record)
    return gather(found, place_of(record, found, "review.html"), rank)


def refused(record: Path) -> str:
    with pytest.raises(InputError) as caught:
        dossier_of(record)
    return "\n".join(str(problem) for problem in caught.value.problems)


def edit(path: Path, old: str, new: str) -> None:
    text = path.read_text("utf-8")
    assert old in text
    path.write_text(text.replace(old, new), "utf-8")


def best(record: Path) -> dict[str, Any]:
    found: dict[str, Any] = json.loads(record.read_text("utf-8"))["candidates"][0]
    return found


def priced(catalog: Path, part: str, factor: float) -> None:
    """Multiply every price of one part."""
    lines = catalog.read_text("utf-8").splitlines()
    column = lines[0].split(",").index("price")
    for index, line in enumerate(lines):
        cells = line.split(",")
        if cells[0] == part:
            pairs = [pair.split(":") for pair in cells[column].split("; ")]
            cells[column] = "; ".join(f"{count}:{float(price) * factor}" for count, price in pairs)
            lines[index] = ",".join(cells)
    catalog.write_text("\n".join(lines) + "\n", "utf-8")


def test_the_chosen_row_with_its_glass(saved: Path) -> None:
    dossier = dossier_of(saved)
    assert dossier.candidate == best(saved)
    assert dossier.changed == ()
    bandwidth = dossier.candidate["figures"]["bandwidth"]
    assert dossier.glass.curves.bandwidth == pytest.approx(bandwidth, rel=1e-8)


def test_every_row_agrees_with_its_record(saved: Path) -> None:
    for row in json.loads(saved.read_text("utf-8"))["candidates"]:
        assert dossier_of(saved, row["rank"]).candidate == row


def test_the_draws_are_those_that_the_record_counts(saved: Path, tmp_path: Path) -> None:
    assert dossier_of(saved).findings.drawn == {}
    request = tmp_path / "request.toml"
    request.write_text(request.read_text("utf-8") + '\n[tolerance]\ngbw = "20 %"\ndraws = 500\n', "utf-8")
    assert dossier_of(saved).findings.drawn == {}  # the record knows of no draws
    assert main(["shortlist", str(request), "--quiet", "--save", str(saved)]) == 0
    dossier = dossier_of(saved)
    assert {values.size for values in dossier.findings.drawn.values()} == {500}
    assert dossier.findings.drawn.keys() == {target["name"] for target in dossier.candidate["targets"]}


def test_a_change_that_leaves_the_candidate_alone_is_only_named(saved: Path, tmp_path: Path) -> None:
    row = best(saved)
    other = next(
        line.split(",")[0]
        for line in (tmp_path / "opamps.csv").read_text("utf-8").splitlines()[1:]
        if line.split(",")[0] != row["opamp"]
    )
    priced(tmp_path / "opamps.csv", other, 2.0)
    assert [change.file for change in dossier_of(saved).changed] == ["opamps.csv"]


def test_a_change_that_moves_a_figure_is_refused_with_both_values(saved: Path, tmp_path: Path) -> None:
    row = best(saved)
    priced(tmp_path / "opamps.csv", row["opamp"], 2.0)
    said = refused(saved)
    assert "row 1, cost" in said
    assert f"found '{row['figures']['cost']:.9g}', it is " in said
    assert "opamps.csv: this input is changed since the record was made" in said
    assert "run luxsift shortlist again" in said


def test_a_changed_limit_is_refused(saved: Path, tmp_path: Path) -> None:
    edit(tmp_path / "request.toml", 'snr = "46 dB"', 'snr = "45 dB"')
    said = refused(saved)
    assert "row 1, limit of snr: found '46', it is 45 now" in said
    assert "request.toml: this input is changed" in said


def test_a_part_that_is_not_in_the_catalogs_any_more_is_refused_by_name(saved: Path, tmp_path: Path) -> None:
    row = best(saved)
    catalog = tmp_path / "photodiodes.csv"
    lines = catalog.read_text("utf-8").splitlines(keepends=True)
    catalog.write_text(
        "".join(line for line in lines if not line.startswith(row["photodiode"] + ",")), "utf-8"
    )
    said = refused(saved)
    assert f"{row['photodiode']} of {row['photodiode_maker']} is not in the catalogs" in said
    assert "photodiodes.csv: this input is changed" in said


def test_figures_that_somebody_typed_into_the_record_are_refused(saved: Path) -> None:
    data = json.loads(saved.read_text("utf-8"))
    data["candidates"][0]["figures"]["snr"] += 1.0
    data["candidates"][0]["targets"][1]["margin"] = 0.9
    saved.write_text(json.dumps(data), "utf-8")
    said = refused(saved)
    assert "row 1, snr" in said
    assert "row 1, margin of snr" in said


@pytest.mark.parametrize(
    ("then", "now", "named"),
    [
        (1.0, 1.0, []),
        (1.0, 1.0 + 1e-9, []),
        (1.0, 1.0 + 1e-6, ["snr"]),
        (None, None, []),
        (None, 1.0, ["snr"]),
        (1.0, None, ["snr"]),
        (0.0, 0.0, []),
    ],
)
def test_differences(then: float | None, now: float | None, named: list[str]) -> None:
    before, after = ({"figures": {"snr": value}, "targets": []} for value in (then, now))
    assert [name for name, _then, _now in differences(before, after)] == named


def test_a_target_that_is_new_or_gone_is_a_difference() -> None:
    target = {"name": "snr", "limit": 40.0, "margin": 0.1}
    with_it, without = {"figures": {}, "targets": [target]}, {"figures": {}, "targets": []}
    for before, after in ((with_it, without), (without, with_it)):
        assert [name for name, _then, _now in differences(before, after)] == ["limit of snr", "margin of snr"]
