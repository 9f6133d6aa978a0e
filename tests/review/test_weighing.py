"""A choice weighed against all else: the same as the searches that find each thing by themselves."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from optimizer.cli import main
from optimizer.record.whynot import as_record
from optimizer.review.dossier import Dossier, gather, place_of
from optimizer.review.exposure import exposed
from optimizer.review.findings import Cloud
from optimizer.review.reopen import reopen
from optimizer.review.weighing import cloud, compared, steps, unknown_parts, weigh
from optimizer.search.inquiry.whynot import whynot


def dossier_of(record: Path) -> Dossier:
    found = reopen(record)
    return gather(found, place_of(record, found, "review.html"))


def every_row(record: Path) -> list[dict[str, Any]]:
    """Everything that meets the request, by cost, as the shortlist finds it."""
    request, whole = record.parent / "request.toml", record.parent / "whole.json"
    words = ["shortlist", str(request), "--by", "cost", "--show", "500", "--quiet", "--save", str(whole)]
    assert main(words) == 0
    rows: list[dict[str, Any]] = json.loads(whole.read_text("utf-8"))["candidates"]
    return rows


def test_the_cloud_is_everything_that_the_shortlist_finds(saved: Path) -> None:
    found, rows = cloud(reopen(saved).study), every_row(saved)
    assert found is not None
    assert found.complete
    assert list(found.names) == [f"{row['photodiode']} with {row['opamp']}" for row in rows]
    assert found.cost == pytest.approx([row["figures"]["cost"] for row in rows], rel=1e-9)
    assert found.margin == pytest.approx([row["margin"] for row in rows], rel=1e-9)


@pytest.mark.parametrize(("most", "complete"), [(3, False), (4, False), (5, True)])
def test_a_cloud_that_is_cut_short_says_so(saved: Path, most: int, *, complete: bool) -> None:
    rows, found = every_row(saved), cloud(reopen(saved).study, most)
    assert len(rows) == 4
    assert found is not None
    assert found.complete == complete
    assert found.cost == pytest.approx([row["figures"]["cost"] for row in rows[:most]], rel=1e-9)


def test_the_front_is_what_no_other_matches_or_beats() -> None:
    rng = np.random.default_rng(3)
    cost, margin = np.sort(rng.integers(0, 8, 60)).astype(float), rng.integers(0, 8, 60).astype(float)
    front = Cloud(("",) * 60, cost, margin, complete=True).front
    pairs = list(zip(cost.tolist(), margin.tolist(), strict=True))
    beaten = [any(c <= a and m >= b and (c, m) != (a, b) for c, m in pairs) for a, b in pairs]
    first = [pairs.index(pair) == index for index, pair in enumerate(pairs)]
    assert front.tolist() == [f and not b for f, b in zip(first, beaten, strict=True)]


def test_weighing_adds_what_each_search_finds(saved: Path) -> None:
    dossier, told = dossier_of(saved), []
    weighed = weigh(dossier, ["YZA-31", "YZA-41"], told.append)
    assert tuple(told) == steps(["YZA-31", "YZA-41"])
    found, study = weighed.findings, dossier.study
    assert found.drawn is dossier.findings.drawn
    assert found.exposure == exposed(reopen(saved), dossier.candidate)
    assert {part.part for part in found.exposure} >= {
        dossier.candidate[name] for name in ("photodiode", "opamp", "resistor_family", "capacitor_family")
    }
    assert [one.name for one in found.compared] == ["YZA-31", "YZA-41"]
    for one in found.compared:
        alone = whynot(study.request, study.catalogs, [one.name])
        assert one.finding == alone
        for key in ("candidates", "near_misses", "request"):
            assert one.data[key] == as_record(study, alone).data[key]


def test_the_base_of_the_prices_is_the_cheapest_row(saved: Path) -> None:
    prices = weigh(dossier_of(saved)).findings.prices
    assert prices is not None
    assert prices.base is not None
    row = every_row(saved)[0]
    assert (prices.base.photodiode, prices.base.opamp) == (row["photodiode"], row["opamp"])
    assert prices.base.figures["cost"] == row["figures"]["cost"]


def test_what_is_unknown_or_means_several_cannot_be_compared(saved: Path) -> None:
    catalogs = reopen(saved).study.catalogs
    assert not list(unknown_parts(catalogs, ["YZA-31", "YZR-K"]))
    problems = list(unknown_parts(catalogs, ["YZA-3l", "YZA-41", "YZD-0l"]))
    assert [problem.cell for problem in problems] == ["YZA-3l", "YZD-0l"]
    assert {problem.column for problem in problems} == {"--compare"}
    assert "YZA-31" in problems[0].remedy


def test_a_part_that_is_compared_meets_where_it_is_the_chosen_one(saved: Path) -> None:
    dossier = dossier_of(saved)
    one = compared(dossier.study, dossier.candidate["opamp"])
    assert one.finding.meets
    assert one.data["candidates"][0]["figures"] == dossier.candidate["figures"]
