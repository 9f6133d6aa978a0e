"""Which settings a board may use: the cost target of a request holds for each, not for its pair only."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from optimizer.planning.columns import Field
from optimizer.planning.fit import usable
from optimizer.planning.kinds import NONE
from optimizer.search.collect import collect
from optimizer.search.plain import judge
from tests.planning.test_reach import pairs_of
from tests.planning.test_tariff import SEEDS, Whole, whole


def with_cost(made: Whole, i: int, limit: float) -> Field:
    """The board with another cost target in the request of kind `i`."""
    kind = made.field.kinds[i]
    kind = replace(kind, space=replace(kind.space, limits={**kind.space.limits, "cost": limit}))
    kinds = tuple(kind if k == i else other for k, other in enumerate(made.field.kinds))
    return replace(made.field, kinds=kinds)


def test_a_dear_passive_on_an_affordable_pair_is_refused() -> None:
    split = 0
    for made in filter(None, map(whole, SEEDS)):
        for i, kind in enumerate(made.field.kinds):
            found = collect(made.asked[i], pairs_of(made, i, made.asked[i]), np.inf, 10**6)
            cost = judge(kind.space, found.choice, "cost").cost
            current = judge(kind.space, found.choice, "supply_current").primary
            kept = current <= kind.space.limits.get("supply_current", np.inf)
            kept &= made.field.amplifiers.group[i][found.choice.opamp] != NONE
            pair = found.choice.opamp * kind.space.diodes.price.size + found.choice.diode
            for limit in np.unique(cost)[:-1]:
                fit = usable(with_cost(made, i, float(limit)), i, found.choice)
                assert not (fit & (cost > limit)).any()
                assert np.array_equal(fit, fit & kept & (cost <= limit))
                split += sum(0 < fit[pair == one].sum() < (pair == one).sum() for one in np.unique(pair))
    assert split >= 30
