"""What each target costs: every step against every combination under the limits so changed."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from optimizer import margins
from optimizer.catalog.parts import Catalogs
from optimizer.request.types import Request
from optimizer.search import space as spaces
from optimizer.search import steps
from optimizer.search.tradeoff import Row, Step, Tradeoff, differences, tradeoff
from tests.search import made
from tests.search.changed import All, everything
from tests.search.instances import small
from tests.search.test_corners import small_enough, tiny
from tests.search.test_exact import size_of
from tests.search.test_sources import sourced
from tests.search.whole import named

MOST = 60_000
"""Combinations of an instance; larger ones are left out."""


def changed(limits: dict[str, float], name: str, step: Step) -> dict[str, float]:
    return {
        n: v if n != name else step.limit for n, v in limits.items() if n != name or step.limit is not None
    }


def wrong_steps(every: All, found: Tradeoff) -> list[tuple[str, float | None]]:
    """Steps whose answer is not that of evaluating every combination."""
    limits = dict(every.space.limits)
    wrong: list[tuple[str, float | None]] = []
    base = None if found.base is None else named(found.base)
    if base != every.cheapest(limits):
        wrong.append(("as it stands", 0.0))
    for row in found.rows:
        for step in row.steps:
            expected = every.cheapest(changed(limits, row.target, step))
            if (None if step.candidate is None else named(step.candidate)) != expected:
                wrong.append((row.target, step.step))
    return wrong


def is_small(request: Request, catalogs: Catalogs) -> bool:
    space = spaces.build(request, catalogs)
    return (
        bool(space.contexts.size and space.resistors.size and space.capacitors.size) and size_of(space) < MOST
    )


@settings(max_examples=40, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_equals_evaluating_every_combination(seed: int) -> None:
    request, catalogs = small(seed)
    if is_small(request, catalogs):
        assert wrong_steps(everything(request, catalogs), tradeoff(request, catalogs)) == []


@settings(max_examples=40, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_is_exact_where_costs_tie(seed: int) -> None:
    request, catalogs = made.awkward(seed)
    if is_small(request, catalogs):
        assert wrong_steps(everything(request, catalogs), tradeoff(request, catalogs)) == []


@settings(max_examples=25, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_is_exact_at_the_worst_corner(seed: int) -> None:
    request, catalogs = tiny(seed)
    space = spaces.build(request, catalogs)
    if small_enough(space):
        assert wrong_steps(everything(request, catalogs), tradeoff(request, catalogs)) == []


@settings(max_examples=25, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6))
def test_every_step_is_exact_with_second_sources(seed: int) -> None:
    request, catalogs = sourced(seed)
    if is_small(request, catalogs):
        assert wrong_steps(everything(request, catalogs), tradeoff(request, catalogs)) == []
