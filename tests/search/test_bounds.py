"""No bound excludes a setting at its own margin: random settings of full spaces, inside random boxes.

And the test bites: every bound made a little too tight is caught.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from numpy.typing import NDArray

from optimizer.figures import evaluate
from optimizer.request.types import Targets
from optimizer.search import bounds, split, upper
from optimizer.search import space as spaces
from optimizer.search import view as views
from optimizer.search.bounds import Goals
from optimizer.search.boxes import Boxes
from optimizer.search.plain import Judged, judge
from optimizer.search.space import Space
from optimizer.search.view import Index
from tests.search.instances import KINDS, drawn, sampled, varied, with_targets

COMFORT = 1.0
SEEDS = range(12)
COUNT = 40_000


@cache
def eligible(seed: int) -> tuple[Index, Judged] | None:
    """Eligible random settings of one full space, targets near the figures of one of them."""
    rng = np.random.default_rng(seed)
    request, catalogs = drawn(seed % 4, KINDS[seed % 3], 300, 200)
    request = varied(rng, request)
    low_passes = ((None,), (float(10.0 ** rng.uniform(3.0, 7.0)), None))[seed % 2]
    rail = bool(rng.random() < 0.3)
    space = replace(request.space, low_pass=low_passes, dark_on_rail=rail)
    request = with_targets(rng, replace(request, space=space, targets=Targets()), catalogs, keep=0.9)
    compiled = spaces.build(request, catalogs)
    judged = judge(compiled, sampled(rng, compiled, COUNT), "cost")
    judged = judged.take(judged.admitted)
    return (views.lay_out(compiled), judged) if judged.reach.size else None


def around(rng: np.random.Generator, index: Index, judged: Judged) -> list[Boxes]:
    """Boxes that hold each setting: everything, random ranges, the setting alone."""
    space, choice = index.space, judged.choice
    places = (
        choice.context,
        np.argsort(index.resistors.index)[choice.resistor],
        np.argsort(index.capacitors.index)[choice.capacitor],
        choice.low_pass,
    )
    sizes = (space.contexts.size, space.resistors.size, space.capacitors.size, space.low_passes.size)
    made = []
    for reach in (1.0, 0.3, 0.05, 0.01, 0.0):
        rows = np.zeros((choice.opamp.size, 10), dtype=np.int64)
        rows[:, Boxes.OPAMP], rows[:, Boxes.DIODE] = choice.opamp, choice.diode
        for axis, (place, size) in enumerate(zip(places, sizes, strict=True)):
            down, up = (rng.integers(0, int(reach * size) + 1, size=place.size) for _ in range(2))
            rows[:, 2 + 2 * axis] = np.maximum(place - down, 0)
            rows[:, 3 + 2 * axis] = np.minimum(place + up + 1, size)
        made.append(Boxes(rows))
    return made


def wrongly_excluded(seed: int, *, only_meeting: bool = False) -> dict[str, int]:
    """How often a bound says less than a setting has, at that setting's own margin."""
    found = eligible(seed)
    if found is None:
        return {}
    index, judged = found
    if only_meeting:
        judged = judged.take(judged.meets)
    rng = np.random.default_rng(seed)
    goals = Goals(index.space.bench, index.space.limits, COMFORT)
    with np.errstate(all="ignore"):
        figures = evaluate(index.space.bench, spaces.settings(index.space, judged.choice)).figures
    margins = np.minimum(judged.margin_columns, COMFORT)
    counts = {"excluded": 0, "margin": 0, "cut away": 0, "snr": 0, "cost": 0, "supply_current": 0}
    for boxes in around(rng, index, judged):
        v = views.view(index, boxes)
        said = upper.bound(v, goals, margins.min(axis=1))
        left = split.narrowed(index, boxes, said.left, v)
        counts["excluded"] += int((~said.possible).sum())
        counts["margin"] += int((said.margin_columns < margins).any(axis=1).sum())
        counts["cut away"] += int((~_holds(index, left, judged)).sum())
        counts["snr"] += int((said.snr < figures["snr"]).sum())
        counts["cost"] += int((said.cost > figures["cost"]).sum())
        counts["supply_current"] += int((said.supply_current > figures["supply_current"]).sum())
    return counts


def _holds(index: Index, boxes: Boxes, judged: Judged) -> NDArray[np.bool_]:
    resistor = np.argsort(index.resistors.index)[judged.choice.resistor]
    capacitor = np.argsort(index.capacitors.index)[judged.choice.capacitor]
    rows = boxes.rows
    inside = (rows[:, Boxes.R0] <= resistor) & (resistor < rows[:, Boxes.R1])
    return np.asarray(inside & (rows[:, Boxes.C0] <= capacitor) & (capacitor < rows[:, Boxes.C1]))


@pytest.mark.parametrize("seed", SEEDS)
def test_no_setting_is_excluded_at_its_own_margin(seed: int) -> None:
    counts = wrongly_excluded(seed)
    assert not any(counts.values()), counts


def test_there_are_settings_to_exclude() -> None:
    sizes = [found[1].reach.size for seed in SEEDS if (found := eligible(seed)) is not None]
    meeting = [int(found[1].meets.sum()) for seed in SEEDS if (found := eligible(seed)) is not None]
    assert len(sizes) >= 8, sizes
    assert sum(sizes) >= 50_000, sizes
    assert sum(meeting) >= 100, meeting


def test_bounds_do_exclude() -> None:
    """At margin 0 the bounds drop most pairs of a tight request whole, without evaluating anything."""
    found = eligible(0)
    assert found is not None
    index, _ = found
    space: Space = index.space
    goals = Goals(space.bench, {**space.limits, "cost": 0.5}, COMFORT)
    pairs = sampled(np.random.default_rng(0), space, 2000)
    from optimizer.search.boxes import whole

    v = views.view(index, whole(space, pairs.opamp, pairs.diode))
    assert upper.bound(v, goals, np.zeros(2000)).possible.mean() < 0.5


def tighter_narrow(name: str, factor: float) -> Callable[[pytest.MonkeyPatch], None]:
    """Mutate one field of what `narrow` leaves."""

    def apply(patch: pytest.MonkeyPatch) -> None:
        real = bounds.narrow

        def mutated(v: views.View, goals: Goals, level: NDArray[np.float64]) -> bounds.Narrow:
            left = real(v, goals, level)
            field = getattr(left, name) * factor
            return replace(left, **{name: field}, possible=left.possible & (left.rf_high * 1.0 >= 0))

        patch.setattr(upper, "narrow", mutated)

    return apply


def scaled(module: object, name: str, factor: float) -> Callable[[pytest.MonkeyPatch], None]:
    """Mutate a function of the bounds that returns one array, by a factor."""

    def apply(patch: pytest.MonkeyPatch) -> None:
        real = getattr(module, name)
        patch.setattr(module, name, lambda *args: real(*args) * factor)

    return apply


def shifted(module: object, name: str, amount: float) -> Callable[[pytest.MonkeyPatch], None]:
    """Mutate a function of the bounds that returns one array, by adding."""

    def apply(patch: pytest.MonkeyPatch) -> None:
        real = getattr(module, name)
        patch.setattr(module, name, lambda *args: real(*args) + amount)

    return apply


def swapped(module: object, name: str, value: object) -> Callable[[pytest.MonkeyPatch], None]:
    """Mutate a constant of the bounds."""
    return lambda patch: patch.setattr(module, name, value)


def louder(name: str, factor: float) -> Callable[[pytest.MonkeyPatch], None]:
    """Mutate one field of the noise floor."""

    def apply(patch: pytest.MonkeyPatch) -> None:
        real = bounds.noise_floor

        def mutated(*args: object) -> bounds.Floor:
            floor = real(*args)  # type: ignore[arg-type]
            return replace(floor, **{name: getattr(floor, name) * factor})

        patch.setattr(upper, "noise_floor", mutated)

    return apply


MUTANTS = {
    "Cf upper bound 30 % too tight": tighter_narrow("cf_high", 0.7),
    "Rf upper bound 10 % too tight": tighter_narrow("rf_high", 0.9),
    "swing 5 % too small": scaled(bounds, "swing", 0.95),
    "roof from e2 20 % too low": scaled(bounds, "_rf_from_e2", 0.8),
    "roof from e1 20 % too low": scaled(bounds, "_rf_from_e1", 0.8),
    "Cf from e1 10 % too low": scaled(bounds, "_cf_from_e1", 0.9),
    "noise at the weakest light 3 % too loud": louder("weak", 1.06),
    "noise in the dark 3 % too loud": louder("dark", 1.06),
    "flicker four times too loud": scaled(bounds, "flicker_flat", 4.0),
    "flicker of fast noise half as loud again": scaled(bounds, "flicker_span", 1.5),
    "noise at the output 3 % too loud": scaled(upper, "output_floor", 1.06),
    "lead of the network 1 deg too small": shifted(upper, "_lead", -0.0175),
    "crossover whatever Rf half as high again": scaled(upper, "_slowest", 1.5),
    "phase margin 1 deg too low": shifted(upper, "_phase_margin", -1.0),
    "crossover half as high again": scaled(upper, "_crossover", 1.5),
    "peaking 0.05 dB too high": shifted(upper, "_peaking", 0.05),
    "full scale 2 % too small": scaled(upper, "_full_scale", 0.98),
    "slew ratio 2 % too small": scaled(upper, "_slew", 0.98),
    "bandwidth margin 0.03 too small": shifted(upper, "_bandwidth", -0.03),
    "error slope twice too steep": scaled(upper, "error_slope", 2.0),
    "error that does not grow doubled": scaled(upper, "error_offset", 2.0),
    "gain 2 % too low": scaled(upper, "_gain_low", 1.02),
    "response looked at above the bandwidth": swapped(upper, "EARLIER", (1.0, 1.4)),
    "slack forgotten, and more": shifted(upper, "_decibels", -0.05),
}


@pytest.mark.parametrize("name", MUTANTS)
def test_a_bound_made_too_tight_is_caught(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    MUTANTS[name](monkeypatch)
    caught = 0
    for seed in SEEDS:
        caught += sum(wrongly_excluded(seed).values())
        if caught:
            return
    pytest.fail(f"{name}: no setting was excluded")
