"""One candidate under the glass: what is shown must be what the figures and checks say, and add up."""

from __future__ import annotations

from dataclasses import fields, replace
from functools import cache
from math import inf, isnan, log10, pi, sqrt
from typing import Any

import numpy as np
import pytest

from optimizer.figures import evaluate
from optimizer.physics import loop as loops
from optimizer.request.types import Ambient, Converter
from optimizer.search import space as spaces
from optimizer.search.examine import Glass, examine
from optimizer.search.plain import judge
from optimizer.search.roles import PASSES
from optimizer.search.space import Choice, Space
from tests.search.instances import sampled, small
from tests.search.made import catalogs, diode, opamp, request

ROUNDED = 5.1e-9  # figures hold nine digits


def made(asked: dict[str, Any] | None = None, **rows: Any) -> Space:
    return spaces.build(request(**(asked or {})), catalogs(**rows))


def first(space: Space, **where: Any) -> Choice:
    """The first setting, at the given indices."""
    names = [field.name for field in fields(Choice)]
    return Choice(*(np.array([where.get(name, 0)]) for name in names))


def context(space: Space, wiring: int, divided: bool) -> int:
    x = space.contexts
    return int(np.flatnonzero((x.wiring == wiring) & (x.divided == divided))[0])


def figures_of(space: Space, choice: Choice) -> dict[str, float]:
    with np.errstate(all="ignore"):
        result = evaluate(space.bench, spaces.settings(space, choice))
    return {name: float(np.ravel(value)[0]) for name, value in result.figures.items()}


def eligible(seed: int, count: int = 4) -> tuple[Space, Choice]:
    """Random eligible settings of the first random space from `seed` on that has some."""
    while True:
        asked, parts = small(seed)
        space = spaces.build(asked, parts)
        if space.contexts.size and space.resistors.size and space.capacitors.size:
            choice = sampled(np.random.default_rng(seed), space, 800)
            good = np.flatnonzero(judge(space, choice, "cost").reach == PASSES)
            if good.size:
                return space, choice.take(good[:count])
        seed += 1000


SEEDS = range(12)


@cache
def each(seed: int) -> list[tuple[Space, Choice, Glass, dict[str, float]]]:
    space, choice = eligible(seed)
    rows = [choice.take(np.array([k])) for k in range(choice.opamp.size)]
    return [(space, row, examine(space, row), figures_of(space, row)) for row in rows]


@pytest.mark.parametrize("seed", SEEDS)
def test_noise_adds_up_to_the_figures(seed: int) -> None:
    for _, _, glass, figures in each(seed):
        budget = glass.noise.budget
        weak = sum(budget.values())
        assert sqrt(weak) == pytest.approx(figures["output_noise_weak"], rel=ROUNDED)
        dark = weak - budget["signal_shot"]
        assert sqrt(dark) == pytest.approx(figures["output_noise_dark"], rel=ROUNDED)
        squares = [density**2 for density in glass.noise.density.values()]
        np.testing.assert_allclose(glass.noise.total, np.sqrt(np.sum(squares, axis=0)), rtol=1e-12)


@pytest.mark.parametrize("seed", SEEDS)
def test_curves_pass_through_the_figures(seed: int) -> None:
    for _, _, glass, figures in each(seed):
        c, f = glass.curves, glass.curves.frequency
        assert (np.diff(f) > 0).all()
        assert f.size >= 400
        assert c.bandwidth == pytest.approx(figures["bandwidth"], rel=ROUNDED)
        at = float(np.interp(c.bandwidth, f, c.transresistance))
        assert at == pytest.approx(figures["transresistance"] / sqrt(2), rel=1e-8)
        assert float(np.interp(c.crossover, f, c.loop_gain)) == pytest.approx(1.0, rel=1e-8)
        assert float(np.interp(c.crossover, f, c.loop_phase)) == pytest.approx(
            figures["phase_margin"], rel=1e-8
        )
        highest = 20 * log10(float(c.loop_transresistance.max()) / figures["transresistance"])
        assert max(highest, 0.0) == pytest.approx(figures["peaking"], abs=1e-3)
        assert f[0] <= 0.1 * min(c.bandwidth, c.crossover)
        assert f[-1] >= 10 * max(c.bandwidth, c.crossover)


@pytest.mark.parametrize("seed", SEEDS)
def test_levels_tell_what_the_checks_and_full_scale_tell(seed: int) -> None:
    for space, row, glass, figures in each(seed):
        bench = space.bench
        assert [level.end for level in glass.levels] == [*bench.ends[:1], 1.0, *bench.ends[1:]]
        rising = bool(spaces.settings(space, row).sign[0] > 0)
        spare = []
        for level in glass.levels:
            assert level.rail_high == pytest.approx(bench.high * level.end)
            assert level.guard_high == pytest.approx(level.limit_high - bench.guard)
            assert level.guard_low == pytest.approx(level.limit_low + bench.guard)
            end = level.guard_high - level.strongest if rising else level.strongest - level.guard_low
            spare.append(end)
            if not (bench.dark_on_rail and bench.low == 0.0):
                assert level.guard_low - 1e-8 <= level.dark_low <= level.dark_high <= level.guard_high + 1e-8
            signal = (level.weakest - level.background) * (1 if rising else -1)
            per_light = figures["transresistance"] * glass.values["responsivity"]
            assert signal == pytest.approx(per_light * bench.weakest, rel=1e-6)
        left = (figures["full_scale"] - bench.strongest) * per_light
        if figures["full_scale"] > 0:
            assert min(spare) == pytest.approx(left, rel=1e-8, abs=1e-7)
        else:
            assert min(spare) <= left + 1e-7


@pytest.mark.parametrize("seed", SEEDS)
def test_the_step_settles_and_what_is_read_off_it_is_there(seed: int) -> None:
    for _, _, glass, figures in each(seed):
        step = glass.step
        assert step.time[0] == step.value[0] == 0.0
        assert (np.diff(step.time) > 0).all()
        assert step.time.size <= 5000
        assert step.rise_time > 0
        assert 0 <= step.overshoot < 1
        assert max(float(step.value.max()) - 1.0, 0.0) == pytest.approx(step.overshoot, abs=2e-3)
        late = step.value[step.time > step.settling_time]
        assert (np.abs(late - 1.0) <= 0.0101).all()
        # what rises fast is wide: within a factor for every all-pole response
        assert 0.2 < step.rise_time * figures["bandwidth"] < 0.6


@pytest.mark.parametrize("seed", SEEDS)
def test_values_make_up_cost_and_supply_current(seed: int) -> None:
    for _, _, glass, figures in each(seed):
        v = glass.values
        assert all(isinstance(value, float) for value in v.values())
        prices = ("price_photodiode", "price_opamps", "price_resistor", "price_capacitor", "price_divider")
        assert sum(v[name] for name in prices) == pytest.approx(figures["cost"], rel=ROUNDED)
        current = v["packages"] * v["package_current"] + v["divider_current"]
        if not isnan(figures["supply_current"]):
            assert current == pytest.approx(figures["supply_current"], rel=ROUNDED)
        assert v["placed_capacitance"] + v["parasitic_capacitance"] == v["feedback_capacitance"]


CONVERTED = {"converter": Converter(12, 0.0, 4.0)}
HOT = {"ambient": Ambient(-20.0, 60.0, stated=True)}
BACKGROUND = {"light": {"background": 5e-9}}


@pytest.mark.parametrize(
    ("wiring", "divided", "asked", "rows", "names"),
    [
        (0, False, {}, {}, {"shunt", "amplifier_flicker"}),
        (0, False, {}, {"photodiodes": [diode(shunt_resistance=inf)]}, {"amplifier_flicker"}),
        (0, False, {}, {"opamps": [opamp(noise_corner=0.0)]}, {"shunt"}),
        (
            0,
            True,
            CONVERTED | BACKGROUND,
            {},
            {"shunt", "amplifier_flicker", "reference_divider", "reference_buffer"}
            | {"background_shot", "converter"},
        ),
        (1, True, HOT, {}, {"dark_shot", "amplifier_flicker", "reference_divider"}),
        (3, False, {}, {}, {"dark_shot", "amplifier_flicker"}),
    ],
)
def test_only_what_exists_contributes(
    wiring: int, divided: bool, asked: dict[str, Any], rows: dict[str, Any], names: set[str]
) -> None:
    space = made(asked, **rows)
    glass = examine(space, first(space, context=context(space, wiring, divided), capacitor=2))
    always = {"feedback_resistor", "signal_shot", "amplifier_current", "amplifier_voltage"}
    assert set(glass.noise.budget) == always | names
    assert set(glass.noise.density) == (always | names) - {"converter"}
    assert all(square > 0 for square in glass.noise.budget.values())


def test_flicker_counts_from_where_the_request_says() -> None:
    space = made({"space": {"noise_from": 50.0}})
    noise = examine(space, first(space, capacitor=2)).noise
    flicker = noise.density["amplifier_flicker"]
    assert 50.0 in noise.frequency
    assert (flicker[noise.frequency < 50.0] == 0).all()
    assert (flicker[noise.frequency >= 50.0] > 0).all()


def test_an_unknown_rise_time_leaves_open_what_needs_it_and_nothing_else() -> None:
    space = made(photodiodes=[diode(rise_time=None)])
    glass = examine(space, first(space, capacitor=2))
    assert np.isnan(glass.curves.transresistance).all()
    assert isnan(glass.curves.bandwidth)
    assert np.isfinite(glass.curves.loop_transresistance).all()
    assert isnan(glass.step.rise_time)
    assert np.isnan(glass.step.value).all()
    assert np.isfinite(list(glass.noise.budget.values())).all()


def test_an_unstable_loop_has_curves_but_neither_noise_nor_step() -> None:
    space = made(opamps=[opamp(second_pole=5e3)], photodiodes=[diode(capacitance=[(0.0, 4e-9)])])
    choice = first(space)
    assert evaluate(space.bench, spaces.settings(space, choice)).fails["unstable"].all()
    glass = examine(space, choice)
    assert np.isfinite(glass.curves.open_loop).all()
    assert np.isnan(list(glass.noise.budget.values())).all()
    assert np.isnan(glass.noise.total).all()
    assert isnan(glass.step.settling_time)


def test_a_loop_without_gain_has_no_crossover() -> None:
    space = made(opamps=[opamp(open_loop_gain=1.5)], photodiodes=[diode(shunt_resistance=1e4)])
    choice = first(space, capacitor=2)
    assert evaluate(space.bench, spaces.settings(space, choice)).fails["gain"].all()
    glass = examine(space, choice)
    assert isnan(glass.curves.crossover)
    assert glass.curves.frequency.size >= 400


def test_a_hardly_damped_loop_is_drawn_with_few_points() -> None:
    space = made(opamps=[opamp(second_pole=30e6)], photodiodes=[diode(capacitance=[(0.0, 4e-9)])])
    cf = replace(space.capacitors, value=np.array([0.0]), family=np.array([-1]))
    space = replace(space, capacitors=replace(cf, parasitic=np.array([0.0]), price=np.array([0.0])))
    glass = examine(space, first(space, resistor=2))
    assert figures_of(space, first(space, resistor=2))["peaking"] > 20.0
    assert 0.8 < glass.step.overshoot < 1.0
    assert glass.step.time.size <= 5000


@pytest.mark.parametrize(
    ("e1", "e2", "e3"),
    [(1.0, 0.2, 0.0), (1.0, 1.0, 0.3), (1.4, 1.2, 0.9), (2.0, 1.9, 1.5), (0.3, 1.0, 0.05), (3.0, 1.2, 1.9)],
)
def test_the_response_is_level_at_its_peak_frequency(e1: float, e2: float, e3: float) -> None:
    one = np.array([1.0])
    loop = loops.Loop(one, one, e1 * one, e2 * one, e3 * one, one, one)
    w = np.geomspace(1e-3, 1e3, 400_001)
    response = 1 / np.hypot(1 - e2 * w**2, e1 * w - e3 * w**3)
    inner = (response[1:-1] > response[:-2]) & (response[1:-1] >= response[2:])
    expected = w[1:-1][inner]
    found = 2 * pi * float(loops.peak_frequency(loop)[0])
    assert found == pytest.approx(float(expected[0]), rel=1e-4) if expected.size else found == 0.0
