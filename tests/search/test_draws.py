"""The draws themselves: sums against worst case and root sum of squares, and whose draws are whose."""

from __future__ import annotations

from itertools import product
from math import sqrt

import numpy as np
import pytest

from optimizer.catalog.parts import Catalogs
from optimizer.figures import evaluate
from optimizer.request.types import Tolerance
from optimizer.search.result import Simulated
from optimizer.search.space import Choice, Space, build
from optimizer.search.spread import montecarlo
from optimizer.search.spread.montecarlo import monte_carlo, samples
from optimizer.search.spread.spreads import moved
from tests.search import made
from tests.search.drawn import (
    TARGETS,
    WIDE,
    Floats,
    asked,
    catalogs,
    choose,
    joined,
    simulate,
    with_tolerance,
)

# Stacks: worst case and root sum of squares


def stack() -> tuple[Space, Choice, dict[str, float]]:
    """The input capacitance as the sum of three parts that spread: diode, op-amp, board."""
    parts = catalogs(
        opamps=[made.opamp(input_capacitance_common=45e-12, input_capacitance_differential=30e-12)],
        photodiodes=[made.diode(capacitance=[(0.0, 37e-12)])],
    )
    space = build(asked(space={"stray": 50e-12}), parts)
    return space, choose(space), {"diode_capacitance": 37e-12, "input_capacitance": 75e-12, "stray": 50e-12}


def input_capacitance(space: Space, choice: Choice, deviations: dict[str, Floats]) -> Floats:
    size = next(iter(deviations.values())).size
    every = choice.take(np.zeros(size, dtype=np.int64))
    return evaluate(space.bench, moved(space, every, deviations)).figures["input_capacitance"]


@pytest.mark.parametrize(
    ("distribution", "sigmas"), [("uniform", sqrt(3)), ("normal", 3.0)], ids=["uniform", "normal"]
)
def test_a_drawn_stack_spreads_by_the_root_of_the_sum_of_squares(distribution: str, sigmas: float) -> None:
    space, choice, terms = stack()
    width = 0.05
    shares = np.random.default_rng(7).random((40_000, len(terms)))
    deviate = montecarlo.DISTRIBUTIONS[distribution]
    drawn = input_capacitance(
        space, choice, {name: deviate(width, shares[:, k]) for k, name in enumerate(terms)}
    )
    rss = sqrt(sum((width * value / sigmas) ** 2 for value in terms.values()))
    assert drawn.mean() == pytest.approx(sum(terms.values()), rel=1e-3)
    assert drawn.std() == pytest.approx(rss, rel=0.02)


def test_no_uniform_draw_of_a_stack_leaves_its_worst_case_and_some_come_near() -> None:
    space, choice, terms = stack()
    corners = np.array(list(product((-0.05, 0.05), repeat=3))).T
    ends = input_capacitance(space, choice, dict(zip(terms, corners, strict=True)))
    assert ends.max() == pytest.approx(162e-12 * 1.05)
    assert ends.min() == pytest.approx(162e-12 * 0.95)
    shares = np.random.default_rng(8).random((40_000, 3))
    deviations = {
        name: montecarlo.DISTRIBUTIONS["uniform"](0.05, shares[:, k]) for k, name in enumerate(terms)
    }
    drawn = input_capacitance(space, choice, deviations)
    assert ends.min() <= drawn.min() <= 162e-12 * 0.955
    assert ends.max() >= drawn.max() >= 162e-12 * 1.045


# Whose draws


def two() -> tuple[Space, Catalogs, Choice, Choice]:
    parts = catalogs(opamps=[made.opamp(), made.opamp(part="YZA-2")])
    space = build(asked(targets=TARGETS, tolerance=WIDE), parts)
    return space, parts, choose(space, opamp=0, capacitor=3), choose(space, opamp=1, capacitor=3)


def test_the_draws_of_a_candidate_do_not_depend_on_the_other_rows() -> None:
    space, parts, first, second = two()
    (alone,), (other,) = monte_carlo(space, parts, first), monte_carlo(space, parts, second)
    assert monte_carlo(space, parts, joined(first, second, first)) == (alone, other, alone)


def test_the_draws_of_a_candidate_do_not_depend_on_what_else_the_catalogs_hold() -> None:
    space, parts, first, _ = two()
    more = catalogs(
        opamps=[made.opamp(part="YZA-0"), made.opamp()],
        photodiodes=[made.diode(part="YZD-0"), made.diode()],
        resistors=[made.resistor(family="YZR-0", tolerance=0.1), made.resistor(tolerance=0.01)],
    )
    larger = build(asked(targets=TARGETS, tolerance=WIDE, space={"low_pass": (1e6, None)}), more)
    same = choose(larger, opamp=1, diode=1, low_pass=1, capacitor=3, resistor=larger.resistors.size // 2)
    assert larger.resistors.value[same.resistor] == space.resistors.value[first.resistor]
    assert monte_carlo(larger, more, same) == monte_carlo(space, parts, first)


def test_candidates_that_differ_in_a_name_alone_have_draws_of_their_own() -> None:
    space, parts, first, second = two()
    one, other = (samples(space, parts, c)["snr"] for c in (first, second))
    assert abs(np.corrcoef(one, other)[0, 1]) < 0.1


def test_the_seed_decides_the_draws() -> None:
    parts = catalogs()

    def run(seed: int) -> Simulated:
        tolerance = with_tolerance(seed=seed)
        return simulate(asked(targets=TARGETS, tolerance=tolerance), parts)

    assert run(3) == run(3)
    assert run(3).worst != run(4).worst


def test_fewer_draws_are_the_first_of_more_however_they_are_cut_into_blocks(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    space, parts, first, _ = two()
    whole = samples(space, parts, first)
    summary = monte_carlo(space, parts, first)
    assert 0 < summary[0].passed < summary[0].draws
    monkeypatch.setattr(montecarlo, "BLOCK", 300)
    assert monte_carlo(space, parts, first) == summary
    short = with_tolerance(draws=700)
    few = samples(build(asked(targets=TARGETS, tolerance=short), parts), parts, first)
    for name, values in whole.items():
        assert np.array_equal(few[name], values[:700])


def test_a_spread_that_is_added_leaves_the_draws_of_the_others() -> None:
    """So what one spread costs in yield shows without noise from other draws."""
    parts = catalogs(resistor=0.0, capacitor=0.0)

    def full_scale(**spreads: float) -> Floats:
        request = asked(tolerance=Tolerance(draws=100, stated=True, **spreads))
        space = build(request, parts)
        return samples(space, parts, choose(space))["full_scale"]

    assert np.array_equal(full_scale(responsivity=0.1), full_scale(responsivity=0.1, gbw=0.3))
