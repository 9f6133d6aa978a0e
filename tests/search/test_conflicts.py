"""Why nothing meets: conflicting sets and least relaxations, against every combination."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from functools import cache
from itertools import combinations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import space as spaces
from optimizer.search.conflicts import MOST_SETS, Conflicts, Names, Relaxation, minimal
from optimizer.search.result import SOURCES
from optimizer.search.tradeoff import Tradeoff, tradeoff
from tests.search import changed, made
from tests.search.changed import HIGHER, All, everything
from tests.search.instances import small
from tests.search.test_corners import small_enough, tiny
from tests.search.test_sources import sourced
from tests.search.test_tradeoff import is_small
from tests.search.whole import named


def wrong(request: Request, catalogs: Catalogs, seen: Counter[str]) -> list[str]:
    """What is said of a request that nothing meets otherwise than evaluating every combination would."""
    every, found = everything(request, catalogs), tradeoff(request, catalogs)
    limits = dict(every.space.limits)
    meets = bool(every.meets(limits).any())
    if meets or found.conflicts is None:
        return [] if meets == (found.conflicts is None) else ["whether anything meets"]
    return [*_wrong_sets(every, found.conflicts, seen), *_wrong_relaxations(every, found.conflicts, seen)]


def _wrong_sets(every: All, found: Conflicts, seen: Counter[str]) -> list[str]:
    limits = every.space.limits
    names = [*limits, SOURCES] if every.space.sources > 1 else list(limits)
    expected = changed.minimal_conflicts(names, lambda some: every.can_meet(some))
    seen["ineligible"] += expected == {frozenset()}
    if expected == {frozenset()}:
        return ["eligible"] * (found.eligible or bool(found.sets))
    seen[f"sets of {min(map(len, expected))}"] += 1
    seen["several sets"] += len(expected) > 1
    same = {frozenset(one) for one in found.sets} == expected and found.complete and found.eligible
    sizes = [len(one) for one in found.sets]
    return [] if same and sizes == sorted(sizes) else ["sets"]


def _wrong_relaxations(every: All, found: Conflicts, seen: Counter[str]) -> list[str]:
    limits = dict(every.space.limits)
    return [one.target for one in found.relaxations if _is_wrong(every, limits, one, seen)]


def _is_wrong(every: All, limits: dict[str, float], one: Relaxation, seen: Counter[str]) -> bool:
    rest = {name: limit for name, limit in limits.items() if name != one.target}
    if every.space.sources > 1:
        front = changed.sourced_front(every, rest, one.target)
        best, name = (front[-1][1] if front else None), None
    else:
        points = changed.best(every, rest, one.target)
        best, name = (None, None) if points is None else points
    seen["helped" if best is not None else "not even dropped"] += 1
    if best is None or one.candidate is None or one.value is None:
        return (best is None) != (one.candidate is None)
    margin = round(float(margins.raw_margin(one.target, np.array(one.value), one.limit)), 9)
    seen["beyond -1"] += margin < -1.0
    return not (one.value == best and one.margin == margin < 0.0 and name in (None, named(one.candidate)))
