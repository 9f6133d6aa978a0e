"""The same outcome for any number of workers and any order of catalog rows."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from optimizer import search
from optimizer.catalog.parts import Catalogs, Parts
from optimizer.request.types import RANKINGS, Divider, Request
from optimizer.search.result import Outcome, Progress
from tests.search.instances import drawn, some
from tests.search.made import awkward, catalogs, opamp, request

ROLES = ("opamps", "photodiodes", "resistors", "capacitors")


@cache
def instance(by: str) -> tuple[Request, Catalogs]:
    """40 x 30 synthetic parts with every family; a divider of E3 and Rf in two decades, to stay quick."""
    asked, made = drawn(3, "easy-by-cost", 40, 30)
    space = replace(
        asked.space,
        divider=Divider("E3", 10e3, 100e3, asked.space.divider.bypass),
        resistance=(100e3, 10e6),
        capacitance=(0.5e-12, 20e-12),
        low_pass=(None, 100e3),
    )
    return replace(asked, space=space, ranking=replace(asked.ranking, by=by, show=6)), made


def fixed(outcome: Outcome) -> Outcome:
    """What must not differ between runs."""
    return replace(outcome, seconds=0.0, evaluated=0)


@cache
def alone(by: str) -> Outcome:
    return fixed(search.shortlist(*instance(by)))


@pytest.mark.parametrize("by", RANKINGS)
def test_the_instance_is_worth_comparing(by: str) -> None:
    outcome = alone(by)
    assert len(outcome.candidates) == 6
    assert len(outcome.dropped) >= 5


@pytest.mark.parametrize("workers", [2, 3])
@pytest.mark.parametrize("by", RANKINGS)
def test_any_number_of_workers_finds_the_same(by: str, workers: int) -> None:
    asked, made = instance(by)
    assert fixed(search.shortlist(asked, made, workers=workers)) == alone(by)


def shuffled(parts: Parts, rng: np.random.Generator) -> Parts:
    order: NDArray[np.int64] = rng.permutation(parts.size)
    return some(parts, order)


def mixed_up(made: Catalogs, rng: np.random.Generator) -> Catalogs:
    """The same catalogs with the rows of every role in another order."""
    roles: dict[str, Any] = {role: shuffled(getattr(made, role), rng) for role in ROLES}
    return replace(made, **roles)


@pytest.mark.parametrize("seed", [1, 2])
@pytest.mark.parametrize("by", RANKINGS)
def test_any_order_of_catalog_rows_finds_the_same(by: str, seed: int) -> None:
    asked, made = instance(by)
    rng = np.random.default_rng(seed)
    mixed = mixed_up(made, rng)
    assert fixed(search.shortlist(asked, mixed)) == alone(by)


@pytest.mark.parametrize("seed", range(8))
def test_awkward_parts_in_any_order_and_by_any_workers(seed: int) -> None:
    """Near misses, blocking targets and every reason among them."""
    asked, made = awkward(300 + seed)
    rng = np.random.default_rng(seed)
    mixed = mixed_up(made, rng)
    one = fixed(search.shortlist(asked, made))
    assert fixed(search.shortlist(asked, mixed)) == one
    if seed % 4 == 0:
        assert fixed(search.shortlist(asked, mixed, workers=2)) == one


def test_twins_of_another_name_do_not_depend_on_their_rows_either() -> None:
    rows = [opamp(part=f"YZA-{k % 5}", maker=f"Maker {'AB'[k // 5]}") for k in range(10)]
    asked = request(ranking={"show": 4})
    one = fixed(search.shortlist(asked, catalogs(rows)))
    assert [(c.opamp, c.opamp_maker[-1]) for c in one.candidates] == [
        ("YZA-0", "A"), ("YZA-0", "B"), ("YZA-1", "A"), ("YZA-1", "B"),
    ]  # fmt: skip
    for seed in range(4):
        mixed = [rows[i] for i in np.random.default_rng(seed).permutation(10)]
        assert fixed(search.shortlist(asked, catalogs(mixed), workers=1 + seed % 2)) == one


def test_more_workers_than_pairs() -> None:
    asked = request()
    assert fixed(search.shortlist(asked, catalogs(), workers=5)) == fixed(search.shortlist(asked, catalogs()))


@pytest.mark.parametrize("workers", [1, 2])
def test_progress_only_rises_and_never_passes_the_pairs(workers: int) -> None:
    told: list[Progress] = []
    asked, made = instance("margin")
    search.shortlist(asked, made, workers=workers, progress=told.append)
    assert told
    for progress in told:
        assert 0 <= progress.decided <= progress.pairs <= made.opamps.size * made.photodiodes.size
        assert progress.evaluated >= 0
