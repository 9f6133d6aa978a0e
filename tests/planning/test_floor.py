"""What gathering proves: no plan passes below the floor, and the cheapest uses nothing out of reach.

Pools begin with next to nothing, so that the floor rests on prices for parts and uses that they do not hold.
"""

from __future__ import annotations

import time
from collections import Counter
from functools import cache

import pytest

from optimizer.planning import gather
from optimizer.planning.amplifiers import amplifiers_of
from optimizer.planning.columns import Field
from optimizer.planning.gather import Gathering
from optimizer.planning.kinds import asked_of, kinds_of
from optimizer.planning.lone import cheapest_alone
from optimizer.planning.outline import Outline
from optimizer.planning.shelf import Shelf
from tests.planning.brute import Brute
from tests.planning.held import tiny_enough
from tests.planning.tiny import drawn

SEEDS = (
    1004, 1006, 1028, 1042, 1056, 1057, 1064, 1078, 1087, 1109, 1131, 1151, 1168, 1171, 1181, 1202, 1214,
)  # fmt: skip
SEEN: Counter[str] = Counter()


@cache
def board(seed: int) -> Brute:
    brute = Brute(drawn(seed))
    assert tiny_enough(brute)
    assert brute.cost is not None
    return brute


def gathered(outline: Outline, floors: list[float]) -> Gathering:
    """The pools of a board; `floors` takes what was said of the floor on the way."""
    shelf = Shelf()
    kinds = kinds_of(outline, shelf)
    limits = outline.limits
    names = [name for name in ("supply_current", "area") if getattr(limits, name) is not None]
    field = Field(outline, kinds, shelf, amplifiers_of(kinds, shelf, names))
    asked = [one for one in map(asked_of, kinds) if one is not None]
    made = Gathering(field, asked, time.monotonic() + 20.0, lambda _doing, _cost, floor: floors.append(floor))
    made.begin([cheapest_alone(kind) for kind in kinds])
    made.run()
    return made


@pytest.mark.parametrize("seed", SEEDS)
def test_no_plan_is_below_the_floor(seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("FIRST", "SIDE", "EACH", "CLOSE"):
        monkeypatch.setattr(gather, name, 1)
    monkeypatch.setattr(gather, "MOST", 2)
    brute, floors = board(seed), [0.0]
    made = gathered(brute.outline, floors)
    cost = brute.cost
    assert cost is not None
    assert max(floors) <= cost
    assert made.cost >= cost
    if made.complete:
        assert made.cost == cost
    SEEN["complete"] += made.complete
    SEEN["tight"] += made.floor > 0.9 * cost


def test_the_floors_are_worth_testing() -> None:
    assert min(SEEN["complete"], SEEN["tight"]) >= len(SEEDS) // 4, SEEN
