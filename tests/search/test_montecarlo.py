"""Monte Carlo: yields against exact probabilities, stacks against their worst case, whose draws are whose."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import inf, sqrt
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import integrate, stats

from optimizer import margins, statistics
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import WIRINGS, Ambient, Tolerance
from optimizer.search.result import Simulated
from optimizer.search.space import Choice, Space, build
from optimizer.search.spread import montecarlo
from optimizer.search.spread.montecarlo import monte_carlo, samples
from optimizer.search.spread.spreads import AXES, half_widths, moved
from optimizer.vocabulary import VOCABULARY
from tests.search import made
from tests.search.drawn import (
    WIDE,
    Floats,
    asked,
    catalogs,
    choose,
    nominal,
    simulate,
    with_tolerance,
)


def holds(simulated: Simulated, share: float, confidence: float = 0.999) -> bool:
    """Whether the interval around the yield, at this confidence, holds the exact probability."""
    low, high = statistics.wilson(simulated.passed, simulated.draws, confidence)
    return low <= share <= high


# Yields with an exact answer


def responsive(distribution: str, *, to_spare: float, seed: int = 1, draws: int = 10_000) -> Simulated:
    """Full scale goes with 1/responsivity and nothing else deviates; `to_spare` of it is left at nominal."""
    parts = catalogs(resistor=0.0, capacitor=0.0)
    tolerance = Tolerance(responsivity=0.1, distribution=distribution, seed=seed, draws=draws, stated=True)
    space = build(asked(), parts)
    strongest = nominal(space, choose(space), "full_scale") / (1.0 + to_spare)
    request = asked(light={"strongest": strongest}, tolerance=tolerance)
    return simulate(request, parts)


@pytest.mark.parametrize("to_spare", [-0.05, 0.0, 0.03, 0.08])
def test_yield_over_one_uniform_spread_is_its_share_below_the_limit(to_spare: float) -> None:
    assert holds(responsive("uniform", to_spare=to_spare), (to_spare + 0.1) / 0.2)


@pytest.mark.parametrize("to_spare", [-0.05, 0.0, 0.03, 0.08])
def test_yield_over_one_normal_spread_is_its_share_below_the_limit(to_spare: float) -> None:
    found = responsive("normal", to_spare=to_spare)
    assert holds(found, float(stats.norm.cdf(3 * to_spare / 0.1)))
    assert found.failures == {"full_scale": found.draws - found.passed}


def test_intervals_of_many_seeds_hold_the_exact_share_about_as_often_as_they_say() -> None:
    """95 % of 200 seeds are 190, with a standard deviation of 3.1: four of them are allowed."""
    found = [responsive("uniform", to_spare=0.03, seed=seed, draws=200) for seed in range(200)]
    held = sum(one.low <= 0.65 <= one.high for one in found if one.low is not None and one.high is not None)
    assert held == pytest.approx(190, abs=12.4)


@pytest.mark.parametrize("spread", [0.02, 0.2])
def test_yield_over_the_bias_current_is_its_share_below_the_limit(spread: float) -> None:
    """The error goes linearly with the bias current: Vos (1 + Rf/Rsh) + Ib Rf."""
    parts = catalogs(resistor=0.0, capacitor=0.0, opamps=[made.opamp(bias_current=1e-9)])
    space = build(asked(), parts)
    choice = choose(space)
    slope = 1e-9 * float(space.resistors.value[choice.resistor][0])
    limit = nominal(space, choice, "offset") + slope * spread * 0.4
    tolerance = Tolerance(bias_current=spread, stated=True)
    found = simulate(asked(targets={"offset": limit}, tolerance=tolerance), parts)
    assert holds(found, 0.7)


def share(inside: Callable[[Floats, Floats], NDArray[np.bool_]], spread: float) -> float:
    """The probability over two independent uniform deviations, by midpoints on a fine grid."""
    steps = (np.arange(2000) + 0.5) / 1000 - 1
    a, b = np.meshgrid(spread * steps, spread * steps)
    return float(np.mean(inside(a, b)))


def test_yield_over_two_spreads_is_the_area_below_the_limit() -> None:
    """Full scale goes with 1/(responsivity Rf) where no current but the photocurrent flows in Rf."""
    silent = made.opamp(bias_current=0.0, bias_doubling=inf)
    parts = catalogs(
        resistor=0.1, capacitor=0.0, opamps=[silent], photodiodes=[made.diode(shunt_resistance=inf)]
    )
    space = build(asked(), parts)
    strongest = nominal(space, choose(space), "full_scale") / 1.05
    tolerance = Tolerance(responsivity=0.1, stated=True)
    found = simulate(asked(light={"strongest": strongest}, tolerance=tolerance), parts)

    exact, _ = integrate.quad(lambda a: np.clip(1.05 / (1 + a) - 0.9, 0.0, 0.2), -0.1, 0.1, points=[-0.0455])
    assert exact / 0.04 == pytest.approx(share(lambda a, b: (1 + a) * (1 + b) <= 1.05, 0.1), abs=1e-3)
    assert holds(found, exact / 0.04)


def test_a_divider_that_leaves_the_input_range_fails_there_as_often_as_its_ratio_does() -> None:
    """Two resistors alike at 5 V: Vref up to 2.55 V is admitted, so R2/R1 may be up to 0.51/0.49."""
    parts = catalogs(resistor=0.05, opamps=[made.opamp(input_high=2.45)])
    request = made.request(tolerance=Tolerance(stated=True))
    space = build(request, parts)
    alike = np.flatnonzero(
        (space.contexts.top == space.contexts.bottom)
        & (space.contexts.wiring == WIRINGS.index("falling-biased"))
    )
    found = monte_carlo(space, parts, choose(space, context=int(alike[0])))[0]
    outside = share(lambda top, bottom: 0.49 * (1 + bottom) > 0.51 * (1 + top), 0.05)
    assert 0.05 < outside < 0.5
    assert stats.binomtest(found.failures["input_range"], found.draws, outside).pvalue > 0.05
    assert found.failures["input_range"] <= found.draws - found.passed


# What is counted


@pytest.fixture(scope="module", params=["uniform", "normal"])
def wide(request: pytest.FixtureRequest) -> tuple[Space, Catalogs, Choice]:
    """A setting that meets its targets at nominal by little, so that several are missed by some draws."""
    parts = catalogs(resistor=0.05, capacitor=0.1)
    tolerance = with_tolerance(distribution=request.param)
    chosen = {"wiring": "rising-biased", "divided": True, "capacitor": 2}
    space = build(asked(tolerance=tolerance), parts)
    choice = choose(space, **chosen)
    targets = {
        "bandwidth": 0.95 * nominal(space, choice, "bandwidth"),
        "snr": nominal(space, choice, "snr") - 0.5,
        "dynamic_range": nominal(space, choice, "dynamic_range") - 0.5,
        "phase_margin": nominal(space, choice, "phase_margin") - 1.0,
        "offset": 1.2 * nominal(space, choice, "offset"),
        "supply_current": 1.01 * nominal(space, choice, "supply_current"),
    }
    light = {"strongest": 0.95 * nominal(space, choice, "full_scale")}
    space = build(asked(tolerance=tolerance, targets=targets, light=light), parts)
    return space, parts, choose(space, **chosen)


def test_counts_and_extremes_are_those_of_the_draws(wide: tuple[Space, Catalogs, Choice]) -> None:
    space, parts, choice = wide
    (found,) = monte_carlo(space, parts, choice)
    drawn = samples(space, parts, choice)
    assert list(drawn) == list(space.limits)
    assert {values.size for values in drawn.values()} == {found.draws} == {2000}
    for name, limit in space.limits.items():
        missed = int(np.sum(margins.margin(name, drawn[name], limit) < 0.0))
        assert found.failures.get(name, 0) == missed
        low, high = float(np.min(drawn[name])), float(np.max(drawn[name]))
        ends = (low, high) if VOCABULARY[name].better == "higher" else (high, low)
        assert (found.worst[name], found.best[name]) == pytest.approx(ends, rel=1e-8)
    assert max(found.failures.values()) <= found.draws - found.passed <= sum(found.failures.values())
    assert found.yield_ == found.passed / found.draws
    assert 0 < found.passed < found.draws
    assert len(found.failures) > 1


def test_every_axis_that_spreads_is_drawn_over_its_own_width(wide: tuple[Space, Catalogs, Choice]) -> None:
    space, parts, choice = wide
    kept: list[dict[str, Floats]] = []

    def keep(space: Space, every: Choice, deviation: dict[str, Floats]) -> Any:
        kept.append(deviation)
        return moved(space, every, deviation)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(montecarlo, "moved", keep)
        monte_carlo(space, parts, choice)
    (deviations,) = kept
    widths = half_widths(space, choice)
    assert tuple(deviations) == AXES
    uniform = space.request.tolerance.distribution == "uniform"
    for name, values in deviations.items():
        width = float(widths[name][0])
        assert width > 0.0
        assert values.std() == pytest.approx(width / (sqrt(3) if uniform else 3), rel=0.06)
        assert np.abs(values).max() <= width * (1.0 if uniform else 2.0)
    table = np.corrcoef(list(deviations.values()))
    assert np.abs(table - np.eye(len(AXES))).max() < 0.1


def test_a_figure_that_does_not_exist_in_some_draw_has_no_worst_value() -> None:
    """A bias current that drives the output to its limit leaves no full scale, so no dynamic range."""
    parts = catalogs(resistor=0.0, capacitor=0.0, opamps=[made.opamp(bias_current=48e-6)])
    request = asked(targets={"dynamic_range": 1.0}, tolerance=Tolerance(bias_current=0.1, stated=True))
    found = simulate(request, parts)
    assert (found.worst["full_scale"], found.worst["dynamic_range"]) == (0.0, None)
    assert found.best["dynamic_range"] is not None
    assert 0 < found.failures["dynamic_range"] < found.draws
    assert found.failures["dynamic_range"] >= found.failures["dark_output"] > 0


def test_what_is_exactly_met_and_does_not_spread_always_passes() -> None:
    parts = catalogs(resistor=0.0, capacitor=0.0)
    space = build(asked(), parts)
    strongest = nominal(space, choose(space), "full_scale")
    found = simulate(asked(light={"strongest": strongest}, tolerance=Tolerance(stated=True, draws=50)), parts)
    assert (found.passed, found.yield_, found.high) == (50, 1.0, 1.0)
    assert found.failures == {}
    assert found.worst == found.best == {"full_scale": strongest}


def test_a_target_that_must_be_met_without_being_graded_counts_too() -> None:
    parts = catalogs(resistor=0.0, capacitor=0.0)
    space = build(asked(tolerance=Tolerance(bias_current=0.1, stated=True)), parts)
    bound = replace(space, musts={"offset": nominal(space, choose(space), "offset")})
    (free,), (found,) = (monte_carlo(s, parts, choose(s)) for s in (space, bound))
    assert free.failures == {}
    assert holds(found, 0.5)
    assert found.failures == {"offset": found.draws - found.passed}
    assert list(found.worst) == ["full_scale"]


# What is unknown


@pytest.mark.parametrize(
    ("blank", "columns"),
    [
        ({"resistor": None}, ("resistor.tolerance",)),
        ({"capacitor": None}, ("capacitor.tolerance",)),
        ({"resistor": None, "capacitor": None}, ("resistor.tolerance", "capacitor.tolerance")),
    ],
)
def test_a_blank_tolerance_leaves_the_yield_unknown(blank: dict[str, None], columns: tuple[str, ...]) -> None:
    parts = catalogs(**blank)
    space = build(asked(tolerance=WIDE), parts)
    choice = choose(space, capacitor=1)
    assert monte_carlo(space, parts, choice) == (Simulated(draws=0, unknown=columns),)
    assert samples(space, parts, choice) == {}


def test_a_blank_tolerance_of_the_family_of_the_divider_alone_counts_where_there_is_one() -> None:
    feedback = made.resistor(**made.listed(100e3), tolerance=0.01)
    divider = made.resistor(family="YZR-2", **{"from": 10e3, "to": 50e3})
    parts = catalogs(resistors=[feedback, divider])
    space = build(asked(tolerance=with_tolerance(draws=10)), parts)
    assert monte_carlo(space, parts, choose(space, divided=True))[0].unknown == ("resistor.tolerance",)
    assert monte_carlo(space, parts, choose(space, divided=False))[0].draws == 10


def test_a_capacitor_that_is_not_placed_may_have_any_tolerance() -> None:
    parts = catalogs(capacitor=None)
    space = build(asked(tolerance=WIDE), parts)
    assert space.capacitors.value[0] == 0.0
    (found,) = monte_carlo(space, parts, choose(space, capacitor=0))
    assert (found.draws, found.unknown) == (2000, ())


def test_a_blank_tempco_counts_only_where_the_ambient_leaves_25_c() -> None:
    parts = catalogs(resistor=0.01)
    warm = asked(tolerance=WIDE, ambient=Ambient(25.0, 60.0, stated=True))
    assert simulate(warm, parts).unknown == ("resistor.tempco",)
    assert simulate(asked(tolerance=WIDE), parts).unknown == ()
