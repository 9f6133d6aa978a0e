"""The ranking's keys: what comes first within a pair and between pairs, and the numbers behind it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer.search import keys
from optimizer.search import space as spaces
from tests.search.made import capacitor, catalogs, listed, request, resistor

numbers = st.sampled_from([-1.0, 0.0, 0.5, 2.0])
rows = st.lists(st.tuples(numbers, numbers, numbers), min_size=1, max_size=8)


@settings(max_examples=200, deadline=None, derandomize=True)
@given(rows)
def test_order_is_that_of_python_tuples(found: list[tuple[float, float, float]]) -> None:
    order = keys.order(np.array(found))
    assert order.tolist() == sorted(range(len(found)), key=lambda i: found[i])


@settings(max_examples=200, deadline=None, derandomize=True)
@given(rows, st.tuples(numbers, numbers, numbers))
def test_less_is_that_of_python_tuples(
    found: list[tuple[float, float, float]], bar: tuple[float, ...]
) -> None:
    assert keys.less(np.array(found), np.array([bar])).tolist() == [row < bar for row in found]
    assert keys.less(np.array([bar]), np.array(found)).tolist() == [bar < row for row in found]


def test_infinite_figures_come_last_and_equal_one_another() -> None:
    key = np.array([[np.inf, 1.0], [1.0, 5.0], [np.inf, 0.0]])
    assert keys.order(key).tolist() == [1, 2, 0]
    assert not keys.less(key[:1], key[:1])[0]


@pytest.mark.parametrize("comfort", [0.1, 0.5, 1.0])
def test_margins_are_cut_at_comfort_and_sorted(comfort: float) -> None:
    space = spaces.build(request(ranking={"comfort": comfort}), catalogs())
    table = np.array([[0.7, -0.2, 0.4], [2.0, 1.0, 1000.0]])
    cut = [sorted(min(m, comfort) for m in row) for row in table.tolist()]
    assert keys.comfortable(space, table).tolist() == cut


def test_the_ranked_figure_is_turned_so_that_smaller_is_better() -> None:
    figures = {
        "snr": np.array([40.0, np.nan]),
        "cost": np.array([3.0, 4.0]),
        "supply_current": np.array([np.nan, 1e-3]),
    }
    least = np.array([0.2, -0.1])
    assert keys.primary("snr", figures, least).tolist() == [-40.0, np.inf]
    assert keys.primary("cost", figures, least).tolist() == [3.0, 4.0]
    assert keys.primary("supply_current", figures, least).tolist() == [np.inf, 1e-3]
    assert keys.primary("margin", figures, least).tolist() == [-0.2, 0.1]


TIES = ("Rf", "Cf", "context", "low-pass", "resistor family")


@pytest.mark.parametrize("decides", range(len(TIES)))
def test_last_ties_are_in_the_contracts_order(decides: int) -> None:
    """Two settings alike up to one place, the first better there and worse in every place after."""
    families = [resistor(family=f"YZR-{k}", **listed(220e3, 470e3)) for k in range(2)]
    placed = [capacitor(**listed(1e-12, 2e-12))]
    asked = request(space={"low_pass": (1e6, 2e6)})
    space = spaces.build(asked, catalogs(resistors=families, capacitors=placed))
    first, second = (
        [1 if place < decides else int((place == decides) != better) for place in range(len(TIES))]
        for better in (True, False)
    )
    by_value = np.lexsort((space.resistors.family, space.resistors.value)).reshape(2, 2)
    resistors = np.array([by_value[row[0], row[4]] for row in (first, second)])
    capacitors = np.array([1 + first[1], 1 + second[1]])
    contexts, lags = np.array([first[2], second[2]]), np.array([first[3], second[3]])
    zero = np.zeros(2, dtype=np.int64)
    choice = spaces.Choice(zero, zero, contexts, resistors, capacitors, lags)
    assert keys.less(keys.ties(space, choice.take(zero[:1])), keys.ties(space, choice.take(zero[:1] + 1)))[0]
