"""Best values: what is not proven is bounded."""

from __future__ import annotations

from math import isnan

import numpy as np
import pytest

from optimizer.search import space as spaces
from optimizer.search.inquiry import best as bests
from optimizer.search.inquiry.best import best, ground
from optimizer.search.query import query
from optimizer.search.space import Choice
from tests.search.looked_at import best_of, every_setting, instance, is_small, partners, same


@pytest.mark.parametrize("steps", [0, 1, 3, 1000])
def test_an_unproven_value_is_bounded(steps: int, monkeypatch: pytest.MonkeyPatch) -> None:
    """From two settings without a climb: with hardly any steps for the search, the best of all settings lies

    between value and bound; with enough, the value is that best.
    """
    monkeypatch.setattr(bests, "STEPS", steps)
    monkeypatch.setattr(bests, "SWEEPS", 0)
    monkeypatch.setattr(bests, "DRAWN", 2)
    unproven = 0
    for seed in range(0, 24, 2):
        request, catalogs = instance(seed)
        space = spaces.build(request, catalogs)
        opamps, diodes = (np.array(rows, dtype=np.int64) for rows in partners(space, ()))
        if not (opamps.size and diodes.size and is_small(space, opamps.size * diodes.size)):
            continue
        none = np.zeros(0, dtype=np.int64)
        on = ground(query(space), opamps, diodes, Choice(none, none, none, none, none, none))
        pairs = [(int(o), int(d)) for o in opamps for d in diodes]
        found = [one for pair in pairs for one in every_setting(space, catalogs, pair)]
        for name in space.limits:
            said, expected = best(on, name, {}), best_of(found, name)
            if said.bound is None:
                assert same(said, expected, name)
                continue
            unproven += 1
            assert said.value is not None
            assert expected is not None
            low, high = sorted((said.value, said.bound))
            assert isnan(said.value) or low - 1e-6 * abs(low) <= expected <= high + 1e-6 * abs(high), name
    assert unproven >= 10 if not steps else unproven == 0 or steps < 1000
