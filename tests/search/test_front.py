"""The front of cost against a target: every point against all combinations, and the steps between values."""

from __future__ import annotations

from collections import Counter

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import space as spaces
from optimizer.search import steps
from optimizer.search.front import AGAINST, Front, front
from tests.search import changed, made
from tests.search.changed import All, everything
from tests.search.instances import small
from tests.search.test_corners import small_enough, tiny
from tests.search.test_sources import sourced
from tests.search.test_tradeoff import is_small
from tests.search.whole import named


def picked(seed: int, request: Request, many: int) -> list[str]:
    """Some targets to hold cost against."""
    rng = np.random.default_rng(seed)
    names = [name for name in AGAINST if name != "slew" or request.targets.bandwidth is not None]
    return [str(name) for name in rng.choice(names, many, replace=False)]


def wrong_fronts(request: Request, catalogs: Catalogs, targets: list[str], seen: Counter[str]) -> list[str]:
    """The targets whose front is not that of evaluating every combination."""
    every = everything(request, catalogs)
    return [target for target in targets if is_wrong(every, front(request, catalogs, target), seen)]


def is_wrong(every: All, found: Front, seen: Counter[str]) -> bool:
    limits = dict(every.space.limits)
    rest = {name: limit for name, limit in limits.items() if name != found.target}
    met = bool(every.meets(limits).any())
    if every.space.sources > 1:
        expected = changed.sourced_front(every, rest, found.target)
        same = [(p.cost, p.value) for p in found.points] == expected
    else:
        points = changed.front(every, rest, found.target)
        expected = [(cost, value) for cost, value, _ in points]
        same = [(p.cost, p.value, named(p.candidate)) for p in found.points] == points
    seen.update({"points": len(expected), "met": met, "several": len(expected) > 1, "none": not expected})
    return not (same and found.meets == met and (found.conflicts is None) == bool(expected))


@settings(max_examples=30, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_point_equals_evaluating_every_combination(seed: int) -> None:
    for request, catalogs in (small(seed), made.awkward(seed)):
        if is_small(request, catalogs):
            assert wrong_fronts(request, catalogs, picked(seed, request, 3), Counter()) == []
