"""Collecting settings: all that meet up to a cost, against evaluating every combination."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from numpy.typing import NDArray

from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import plain
from optimizer.search import space as spaces
from optimizer.search.boxes import Boxes
from optimizer.search.collect import Collected, collect
from optimizer.search.query import Query, is_empty, query
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from tests.search import test_corners, test_sources
from tests.search.instances import small
from tests.search.test_sources import admitted, serving

Ints = NDArray[np.int64]
Key = tuple[int, ...]
Whole = dict[Key, tuple[float, float]]
"""Setting by index: cost and smallest margin."""

MOST = 50_000
SEEN: set[tuple[str, int]] = set()


@cache
def instance(seed: int, kind: str) -> tuple[Query, Whole] | None:
    """A question of `kind`, and all that meets it by evaluating everything; None where it is too large."""
    made = {"plain": small, "corners": test_corners.tiny, "sources": test_sources.sourced}
    request, catalogs = made[kind](seed)
    space = spaces.build(request, catalogs)
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    opamps, diodes = (np.flatnonzero(v.alone == PASSES) for v in (space.opamp_verdicts, space.diode_verdicts))
    if is_empty(space) or not 0 < int(np.prod(sizes)) * opamps.size * diodes.size <= MOST:
        return None
    if kind == "corners" and not test_corners.small_enough(space):
        return None
    return query(space), WHOLE[kind](request, catalogs, space)


def eligible(space: Space) -> tuple[Ints, Ints]:
    """All pairs of parts that pass alone."""
    opamps, diodes = (np.flatnonzero(v.alone == PASSES) for v in (space.opamp_verdicts, space.diode_verdicts))
    return np.repeat(opamps, diodes.size), np.tile(diodes, opamps.size)


def every(space: Space) -> list[Choice]:
    """All settings of all pairs that pass alone, in blocks."""
    o, d = eligible(space)
    return [c for pair in zip(o.tolist(), d.tolist(), strict=True) for c in plain.every_choice(space, *pair)]


def rows(choice: Choice) -> list[Key]:
    """Settings by index."""
    return [tuple(row) for row in np.column_stack(choice.columns()).tolist()]


def whole_plain(_request: Request, _catalogs: Catalogs, space: Space) -> Whole:
    found: Whole = {}
    for choice in every(space):
        judged = plain.judge(space, choice, "cost")
        good = judged.take(judged.meets)
        values = zip(good.cost.tolist(), good.vector[:, 0].tolist(), strict=True)
        found |= dict(zip(rows(good.choice), values, strict=True))
    return found


def whole_corners(_request: Request, _catalogs: Catalogs, space: Space) -> Whole:
    found: Whole = {}
    for choice in every(space):
        judged = plain.judge(space, choice, "cost")
        good = choice.take(judged.reach == PASSES)
        if not good.opamp.size:
            continue
        figures, table, fine = test_corners.at_worst(space, good)
        least = np.round(table.min(axis=1), 9)
        for row in np.flatnonzero(fine & (least >= 0.0)):
            found[rows(good)[row]] = (float(figures["cost"][row]), float(least[row]))
    return found


def whole_sources(request: Request, catalogs: Catalogs, space: Space) -> Whole:
    found = whole_plain(request, catalogs, space)
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    ok = {
        d: admitted(space, catalogs, request.resilience.opamp_sources, serving(space, d))
        for d in {key[1] for key in found}
    }
    return {k: v for k, v in found.items() if ok[k[1]][k[0], np.ravel_multi_index(k[2:], sizes)]}


WHOLE = {"plain": whole_plain, "corners": whole_corners, "sources": whole_sources}


def limits(found: Whole) -> list[float]:
    """Costs to collect up to: nothing, one that is just met, some, all."""
    costs = sorted({cost for cost, _ in found.values()}) or [1.0]
    return [costs[0] * 0.999, costs[0], costs[len(costs) // 3], np.inf]


def collected(asked: Query, most: float, cap: int) -> Collected:
    return collect(asked, eligible(asked.space), most, cap)


def in_boxes(asked: Query, boxes: Boxes) -> set[Key]:
    """Every setting that lies in a box."""
    found: set[Key] = set()
    resistors, capacitors = asked.index.resistors.index, asked.index.capacitors.index
    for o, d, *ends in boxes.rows.tolist():
        x, r, c, low = (range(ends[k], ends[k + 1]) for k in (0, 2, 4, 6))
        found |= {
            (o, d, i, int(resistors[j]), int(capacitors[k]), m) for i in x for j in r for k in c for m in low
        }
    return found


def differences(seed: int, kind: str) -> list[str]:
    made = instance(seed, kind)
    if made is None:
        return []
    asked, whole = made
    if whole:
        SEEN.add((kind, seed))
    wrong = []
    for most in limits(whole):
        expected = {key: value for key, value in whole.items() if value[0] <= most}
        found = collected(asked, most, 10**9)
        values = zip(found.cost.tolist(), found.margin.tolist(), strict=True)
        got = dict(zip(rows(found.choice), values, strict=True))
        if not found.complete or len(got) != found.cost.size:
            wrong.append(f"up to {most}: not complete, or something twice")
        if got.keys() != expected.keys():
            wrong.append(f"up to {most}: {len(expected.keys() ^ got.keys())} settings differ")
        elif any(got[key][0] != expected[key][0] for key in got):
            wrong.append(f"up to {most}: costs differ")
        elif any(min(got[key][1], 0.05) != pytest.approx(min(expected[key][1], 0.05)) for key in got):
            wrong.append(f"up to {most}: margins differ")
    return wrong


@pytest.mark.parametrize("seed", range(14))
@pytest.mark.parametrize("kind", WHOLE)
def test_collects_every_setting_that_meets_up_to_a_cost(kind: str, seed: int) -> None:
    assert differences(seed, kind) == []


@pytest.mark.parametrize("kind", WHOLE)
def test_the_instances_are_worth_testing(kind: str) -> None:
    for seed in range(14):
        differences(seed, kind)
    assert len([one for one in SEEN if one[0] == kind]) >= 3, SEEN


def test_what_a_cap_leaves_out_lies_in_the_open_boxes() -> None:
    tried = 0
    for made in filter(None, (instance(seed, "plain") for seed in range(14))):
        asked, whole = made
        tried += bool(whole)
        for most in limits(whole)[1:] if whole else []:
            expected = {key for key, (cost, _) in whole.items() if cost <= most}
            for cap in (1, 5, max(1, len(expected) // 2)):
                found = collected(asked, most, cap)
                taken = set(rows(found.choice))
                assert taken <= expected
                assert expected <= taken | in_boxes(asked, found.open)
    assert tried >= 3


def test_no_pairs_give_nothing() -> None:
    made = next(one for seed in range(14) if (one := instance(seed, "plain")) is not None)
    none = np.zeros(0, dtype=np.int64)
    found = collect(made[0], (none, none), np.inf, 10)
    assert found.complete
    assert not found.cost.size
