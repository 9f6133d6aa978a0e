"""What is left within reach: all that settings up to a cost use, found or still in open boxes."""

from __future__ import annotations

import numpy as np
import pytest

from optimizer.planning.kinds import NONE
from optimizer.planning.reach import Reach, everything, left_by
from optimizer.search.collect import collect
from optimizer.search.query import Query, query
from optimizer.search.space import Choice
from tests.planning.test_tariff import SEEDS, Whole, whole


def pairs_of(made: Whole, i: int, asked: Query) -> tuple[np.ndarray, np.ndarray]:
    """All pairs of a kind."""
    _, diodes = asked.eligible
    rows = made.field.amplifiers.rows[i]
    return np.repeat(rows, diodes.size), np.tile(diodes, rows.size)


def uncovered(made: Whole, i: int, choice: Choice, reach: Reach) -> list[str]:
    """What some setting uses that is not within reach."""
    kind, group = made.field.kinds[i], made.field.amplifiers.group[i]
    wrong = [] if reach.pairs[choice.opamp, choice.diode].all() else ["pairs"]
    own = [kind.diode_part[choice.diode], kind.resistor_part[choice.resistor]]
    own.append(kind.capacitor_part[choice.capacitor])
    used = np.concatenate(own)
    wrong += [] if reach.own[used[used != NONE]].all() else ["own parts"]
    divider = kind.divider[choice.context].reshape(-1)
    wrong += [] if reach.divider[divider[divider != NONE]].all() else ["dividers"]
    wrong += [] if reach.groups[group[choice.opamp]].all() else ["groups"]
    buffered = kind.space.contexts.buffered[choice.context]
    wrong += [] if reach.buffers[group[choice.opamp[buffered]]].all() else ["buffers"]
    return wrong


@pytest.mark.parametrize("cap", [1, 3, 10**6])
def test_nothing_that_settings_within_the_cost_use_is_out_of_reach(cap: int) -> None:
    tried = left = 0
    for made in filter(None, map(whole, SEEDS)):
        for i, kind in enumerate(made.field.kinds):
            asked = query(kind.space)
            pairs = pairs_of(made, i, asked)
            costs = np.unique(collect(asked, pairs, np.inf, 10**6).cost)
            for most in costs[[0, costs.size // 4, costs.size // 2]] if costs.size else []:
                every = collect(asked, pairs, float(most), 10**6)
                found = collect(asked, pairs, float(most), cap)
                reach = left_by(made.field, i, asked, found)
                assert uncovered(made, i, every.choice, reach) == []
                tried += 1
                left += not found.complete
    assert tried >= 30
    assert left >= 10 or cap > 3


def test_what_is_not_used_goes() -> None:
    gone = 0
    for made in filter(None, map(whole, SEEDS)):
        for i, kind in enumerate(made.field.kinds):
            asked = query(kind.space)
            pairs = pairs_of(made, i, asked)
            every = collect(asked, pairs, np.inf, 10**6)
            if every.cost.size:
                cheapest = collect(asked, pairs, float(every.cost.min()), 10**6)
                reach = left_by(made.field, i, asked, cheapest)
                whole_reach = everything(made.field, i, np.ones_like(reach.pairs))
                gone += int(whole_reach.own.sum()) > int((reach & whole_reach).own.sum())
    assert gone >= 10
