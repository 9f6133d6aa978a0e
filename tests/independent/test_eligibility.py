"""The engine's first failed check held to one written apart from it, over the whole space."""

from __future__ import annotations

from collections import Counter

import numpy as np
import pytest

from tests.independent import eligibility
from tests.independent.adapter import engine_verdict
from tests.independent.cases import spoiled_case

pytestmark = pytest.mark.independent

CASES = 1500


def test_the_first_failed_check_is_the_same():
    rng = np.random.default_rng(21)
    seen: Counter[str | None] = Counter()
    for number in range(CASES):
        case = spoiled_case(rng)
        expected = eligibility.verdict(case)
        assert engine_verdict(case) == expected, f"case {number}\n{case}"
        seen[expected] += 1
    rare = {name: seen[name] for name in (*eligibility.CHECKS, None) if seen[name] < 5}
    assert not rare, f"checks hardly met: {rare} of {seen}"
