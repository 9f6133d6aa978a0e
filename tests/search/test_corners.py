"""Corners of the spreads: the search and its bounds against every combination at every corner."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache
from itertools import product

import numpy as np
import pytest
from numpy.typing import NDArray

from optimizer import margins, search
from optimizer.catalog.parts import Catalogs
from optimizer.figures import evaluate
from optimizer.request.types import Request, Tolerance
from optimizer.search import assemble, plain, split
from optimizer.search import space as spaces
from optimizer.search import view as views
from optimizer.search.bounds import Goals
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from optimizer.search.spread import corners, shifted
from optimizer.search.spread.spreads import AXES, PARTS, half_widths, moved, moved_checks
from tests.search.instances import KINDS, drawn, sampled, small, some, varied, with_targets
from tests.search.test_bounds import _holds, around
from tests.search.whole import Name, Row, _row, between, named, ranked

Floats = NDArray[np.float64]

MOST = 600_000
"""Evaluations of an instance (combinations times corners); larger ones are left out."""


def spread(rng: np.random.Generator, request: Request, most: int) -> Request:
    """`request` graded at corners, with a few spreads of parts."""
    stated = {}
    for axis in rng.choice(PARTS, int(rng.integers(0, most + 1)), replace=False):
        stated[str(axis)] = float(rng.choice([0.05, 0.3, 0.6]))
    return replace(request, tolerance=Tolerance(method="corners", stated=True, **stated))  # type: ignore[arg-type]


def tiny(seed: int) -> tuple[Request, Catalogs]:
    """An instance small enough for every corner of every combination."""
    rng = np.random.default_rng(seed)
    request, catalogs = small(seed)
    opamps = some(catalogs.opamps, np.sort(rng.choice(catalogs.opamps.size, 5, replace=False)))
    diodes = some(catalogs.photodiodes, np.sort(rng.choice(catalogs.photodiodes.size, 4, replace=False)))
    tolerance = rng.choice([0.0, 0.01, 0.05, 0.2, np.nan], catalogs.resistors.size)
    resistors = replace(catalogs.resistors, number={**catalogs.resistors.number, "tolerance": tolerance})
    request = spread(rng, request, 3)
    targets = request.targets
    if targets.cost is not None:
        targets = replace(targets, cost=2.0 * targets.cost)
    return replace(request, targets=targets), replace(
        catalogs, opamps=opamps, photodiodes=diodes, resistors=resistors
    )


def every_corner(space: Space, choice: Choice) -> list[dict[str, float]]:
    """All signs of all axes that spread for any of `choice`, and nominal."""
    widths = half_widths(space, choice)
    axes = [axis for axis in AXES if np.any(widths[axis] > 0.0)]
    return [{}, *(dict(zip(axes, signs, strict=True)) for signs in product((-1.0, 1.0), repeat=len(axes)))]


def at_worst(space: Space, choice: Choice) -> tuple[dict[str, Floats], Floats, NDArray[np.bool_]]:
    """Ranked figures and margins at their worst over every corner, and where all corners are eligible."""
    every = every_corner(space, choice)
    size = choice.opamp.size
    table = np.full((size, len(space.limits)), np.inf)
    snr, current, fine = np.full(size, np.inf), np.zeros(size), np.ones(size, dtype=bool)
    for begin in range(0, len(every), 64):
        some_corners = tuple(every[begin : begin + 64])
        repeated, deviation = corners.deviations(space, choice, some_corners)
        with np.errstate(all="ignore"):
            there = moved(space, repeated, deviation)
            result = evaluate(space.bench, there)
            outside = np.any(list(moved_checks(space, repeated, there).values()), axis=0)
        shape = (len(some_corners), size)
        found = margins.margins(result.figures, space.limits)
        table = np.minimum(table, found.reshape(*shape, -1).min(axis=0))
        there_snr = np.nan_to_num(result.figures["snr"], nan=-np.inf, neginf=-np.inf, posinf=np.inf)
        snr = np.minimum(snr, there_snr.reshape(shape).min(axis=0))
        there_current = np.where(
            np.isnan(result.figures["supply_current"]), np.inf, result.figures["supply_current"]
        )
        current = np.maximum(current, there_current.reshape(shape).max(axis=0))
        fine &= (result.eligible & ~outside).reshape(shape).all(axis=0)
        cost = result.figures["cost"][:size]
    return {"snr": snr, "supply_current": current, "cost": cost}, table, fine


def rows_of(space: Space, catalogs: Catalogs, pair: tuple[int, int]) -> list[Row]:
    rows = []
    for choice in plain.every_choice(space, *pair):
        judged = plain.judge(space, choice, "cost")
        good = choice.take(judged.reach == PASSES)
        if not good.opamp.size:
            continue
        figures, table, fine = at_worst(space, good)
        for i in np.flatnonzero(fine):
            one = {name: float(figures[name][i]) for name in ("cost", "snr", "supply_current")}
            rows.append(_row(space, catalogs, good, int(i), (one, tuple(table[i].tolist()))))
    return rows


def everything(request: Request, catalogs: Catalogs, space: Space) -> tuple[list[Name], list[Name]]:
    """Candidates and near misses by every corner of every combination."""
    by, show = request.ranking.by, request.ranking.show
    met, near = [], []
    for o in np.flatnonzero(space.opamp_verdicts.alone == PASSES):
        for d in np.flatnonzero(space.diode_verdicts.alone == PASSES):
            rows = rows_of(space, catalogs, (int(o), int(d)))
            good = [row for row in rows if min(row.margins) >= 0.0]
            pool, rule = (good, by) if good else (rows, "margin")
            if pool:
                best = min(pool, key=lambda row: (*ranked(row, rule, space), *row.ties))
                (met if good else near).append(best)
    met.sort(key=lambda row: between(row, by, space))
    near.sort(key=lambda row: between(row, "margin", space))
    shown = [row.name for row in met[:show]]
    return shown, [row.name for row in near[: show - len(shown)]]


def small_enough(space: Space) -> bool:
    if not (space.contexts.size and space.resistors.size and space.capacitors.size):
        return False
    pairs = (space.opamp_verdicts.alone == PASSES).sum() * (space.diode_verdicts.alone == PASSES).sum()
    per_pair = space.contexts.size * space.resistors.size * space.capacitors.size * space.low_passes.size
    return bool(pairs * per_pair * 2 ** len(corners.active(space)) <= MOST)


KINDS_SEEN: Counter[str] = Counter()


@cache
def differences(seed: int) -> list[str]:
    request, catalogs = tiny(seed)
    space = spaces.build(request, catalogs)
    if not small_enough(space):
        return []
    outcome = search.shortlist(request, catalogs)
    met, near = everything(request, catalogs, space)
    if outcome.impossible:
        return ["called impossible, yet something meets"] if met else []
    KINDS_SEEN["met" if met else "none"] += 1
    KINDS_SEEN["near"] += bool(near)
    KINDS_SEEN["divider"] += any(c.reference.kind == "divider" for c in outcome.candidates)
    wrong = []
    if [named(c) for c in outcome.candidates] != met:
        wrong.append("candidates")
    if [named(c) for c in outcome.near_misses] != near:
        wrong.append("near misses")
    return wrong


@pytest.mark.parametrize("seed", range(45))
def test_equals_every_corner_of_every_combination(seed: int) -> None:
    assert differences(seed) == []


def test_the_instances_are_worth_testing() -> None:
    for seed in range(45):
        differences(seed)
    assert min(KINDS_SEEN[kind] for kind in ("met", "none", "near", "divider")) >= 5, KINDS_SEEN


@cache
def wrongly_excluded(seed: int) -> Counter[str]:
    """How often a bound over the likely corners says less than a setting has at its worst."""
    rng = np.random.default_rng(seed)
    request, catalogs = drawn(seed % 4, KINDS[seed % 3], 300, 200)
    request = spread(rng, varied(rng, request), len(PARTS))
    request = with_targets(rng, request, catalogs, keep=0.9)
    space = spaces.build(request, catalogs)
    judged = plain.judge(space, sampled(rng, space, 60_000), "snr")
    judged = judged.take(np.flatnonzero(judged.admitted)[:1500])
    judged = corners.judged_whole(space, judged, "snr")
    judged = judged.take(judged.admitted)
    index = views.lay_out(space)
    comfort = space.comfort
    goals = Goals(space.bench, space.limits, comfort)
    worst = np.minimum(judged.margin_columns, comfort)
    counts = Counter(settings=judged.reach.size)
    for boxes in around(rng, index, judged):
        v = views.view(index, boxes)
        level = worst.min(axis=1)
        said = shifted.bounded(index, boxes, v, goals, (level, level))
        left = split.narrowed(index, boxes, said.left, v)
        counts["excluded"] += int((~said.possible).sum())
        counts["margin"] += int((said.margin_columns < worst).any(axis=1).sum())
        counts["cut away"] += int((~_holds(index, left, judged)).sum())
        counts["snr"] += int((said.snr < -judged.primary).sum())
        counts["cost"] += int((said.cost > judged.cost).sum())
    return counts


@pytest.mark.parametrize("seed", range(6))
def test_no_setting_is_excluded_at_its_own_worst_margin(seed: int) -> None:
    counts = wrongly_excluded(seed)
    assert not sum(counts.values()) - counts["settings"], counts


def test_there_were_settings_to_exclude() -> None:
    assert sum(wrongly_excluded(seed)["settings"] for seed in range(6)) >= 1500


@pytest.mark.parametrize("seed", range(8))
def test_the_directions_that_are_left_out_do_not_matter(seed: int) -> None:
    """The corners that decide give the worst of all corners, and the corner named gives the value named."""
    rng = np.random.default_rng(seed)
    request, catalogs = drawn(seed % 4, KINDS[seed % 3], 40, 30)
    request = replace(
        request, tolerance=Tolerance(method="corners", stated=True, **dict.fromkeys(PARTS, 0.2))
    )
    request = with_targets(rng, request, catalogs, keep=1.0)
    space = spaces.build(request, catalogs)
    judged = plain.judge(space, sampled(rng, space, 20_000), "cost")
    judged = judged.take(np.flatnonzero(judged.admitted)[:6])
    whole = corners.judged_whole(space, judged, "cost")
    _, table, fine = at_worst(space, judged.choice)
    assert (whole.margin_columns == table).all()
    assert (whole.admitted == fine).all()
    for row, candidate in enumerate(assemble.candidates(space, catalogs, judged.choice)):
        for k, target in enumerate(candidate.targets):
            assert target.margin == table[row, k]
            assert target.corner is not None
            one = judged.choice.take(np.array([row]))
            deviation = {axis: np.array([step]) for axis, step in target.corner.items()}
            with np.errstate(all="ignore"):
                figures = evaluate(space.bench, moved(space, one, deviation)).figures
            assert target.worst == pytest.approx(float(figures[target.name][0]), rel=1e-9, nan_ok=True)
