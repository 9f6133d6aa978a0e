"""The last look at a plan: one that is right passes, and every kind of damage is refused."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache
from typing import Any

import pytest

from optimizer.planning.audit import audited
from optimizer.planning.outline import Costs, Limits, Outline, Rules
from optimizer.planning.plan import BoardPlan, LineItem, Package, Place
from optimizer.planning.plan_board import plan_board
from optimizer.planning.told import UnsoundBoardError
from tests.planning.test_rules import DUAL, SHARED, amplifier, asked, parts
from tests.planning.tiny import outline_of

Damage = Callable[[BoardPlan], BoardPlan]


@cache
def sound() -> tuple[Outline, BoardPlan]:
    """A board of five copies in duals, four of them on a shared level, one on a divider of its own."""
    held = parts(
        amplifier("YZA-1", 1.0, family="YZA", stock=500.0),
        amplifier("YZA-2", 1.2, **(DUAL | {"family": "YZA"})),
        amplifier("YZB-1", 1.4, maker="Maker E"),
    )
    bare = asked(space={"references": ("divider",), "wirings": ("rising-biased",)})
    outline = outline_of(
        [("level", 3, asked(space=SHARED), held), ("bare", 1, bare, held), ("ground", 1, asked(), held)],
        costs=Costs(2.5, 0.003),
        limits=Limits(cost=60.0, supply_current=9e-3, area=500e-6, line_items=9),
    )
    plan = plan_board(outline).plans[0]
    assert plan.levels
    assert any(b.candidate.reference.kind == "divider" and b.level is None for b in plan.builds)
    assert len(plan.packages) > 1
    return outline, plan


def line_of(plan: BoardPlan, role: str) -> LineItem:
    """The first line of a role."""
    return next(line for line in plan.bill if line.role == role)


def with_line(plan: BoardPlan, role: str, **changes: Any) -> BoardPlan:
    """`plan` with `changes` to the first line of a role."""
    old = line_of(plan, role)
    return replace(plan, bill=tuple(replace(x, **changes) if x is old else x for x in plan.bill))


def more(role: str, by: int) -> Damage:
    return lambda plan: with_line(plan, role, pieces=line_of(plan, role).pieces + by)


def with_first(name: str, **changes: Any) -> Damage:
    """The first of `builds`, `packages` or `levels` with `changes`."""

    def damage(plan: BoardPlan) -> BoardPlan:
        first, *rest = getattr(plan, name)
        return replace(plan, **{name: (replace(first, **changes), *rest)})

    return damage


def without_first(name: str) -> Damage:
    return lambda plan: replace(plan, **{name: getattr(plan, name)[1:]})


def twice(name: str) -> Damage:
    return lambda plan: replace(plan, **{name: (getattr(plan, name)[0], *getattr(plan, name))})


def misses(plan: BoardPlan) -> BoardPlan:
    build, *rest = plan.builds
    target, *others = build.candidate.targets
    wrong = replace(build.candidate, targets=(replace(target, margin=-1e-9), *others))
    return replace(plan, builds=(replace(build, candidate=wrong), *rest))


def own_divider(plan: BoardPlan) -> BoardPlan:
    """A copy said to use no level, though the level's parts are there once only."""
    builds = tuple(replace(b, level=None) if b.level else b for b in plan.builds)
    return replace(plan, builds=builds)


def unbuffered(plan: BoardPlan) -> BoardPlan:
    """A level without an amplifier."""
    packages = tuple(
        replace(p, places=tuple(place for place in p.places if place.level is None)) for p in plan.packages
    )
    return replace(plan, packages=packages)


def crowded(plan: BoardPlan) -> BoardPlan:
    """Everything in one package of the right number of pieces."""
    first, *rest = plan.packages
    places = tuple(place for package in plan.packages for place in package.places)
    empty = tuple(replace(package, places=()) for package in rest)
    return replace(plan, packages=(replace(first, places=places), *empty))


def twice_served(plan: BoardPlan) -> BoardPlan:
    """A copy that two amplifiers serve."""
    place = plan.packages[0].places[0]
    packages = tuple(
        replace(p, places=(*p.places, place)) if p.spare and place not in p.places else p
        for p in plan.packages
    )
    if packages == plan.packages:
        extra = Package("YZA-1", "Maker A", 1, (place,))
        packages = (*plan.packages, extra)
    return replace(plan, packages=packages)


def too_many_amplifiers(plan: BoardPlan) -> BoardPlan:
    """A package said to hold more than the catalog's part does, and all in it."""
    first, *rest = plan.packages
    places = tuple(place for package in plan.packages for place in package.places)
    empty = tuple(replace(package, places=()) for package in rest)
    return replace(plan, packages=(replace(first, places=places, amplifiers=len(places)), *empty))


def fewer_packages(plan: BoardPlan) -> BoardPlan:
    """A package that holds more than it can, and one fewer of them, in the bill and the cost too."""
    whole = too_many_amplifiers(plan)
    package = whole.packages[0]
    line = next(x for x in plan.bill if x.part == package.opamp)
    saved = line.pieces - 1
    changed = replace(line, pieces=1, buy=10, cost=10 * line.unit_price)
    cents = round((line.cost - changed.cost) * 100) + 3 * saved
    others = tuple(x for x in plan.bill if x.role != "opamp" or x is line)
    return replace(
        whole,
        packages=(package,),
        bill=tuple(changed if x is line else x for x in others),
        cost=plan.cost - cents,
    )


def other_amplifier(plan: BoardPlan) -> BoardPlan:
    """Copies served by an op-amp that they were not graded with, with a bill that agrees."""
    packages = tuple(replace(p, opamp="YZB-1", maker="Maker E", amplifiers=1) for p in plan.packages)
    return replace(plan, packages=packages)


def over(name: str) -> Damage:
    def damage(plan: BoardPlan) -> BoardPlan:
        totals = tuple(
            replace(t, value=(t.limit or 0.0) * 1.001) if t.name == name else t for t in plan.totals
        )
        return replace(plan, totals=totals)

    return damage


def understated(name: str) -> Damage:
    """A total that says less than what is built uses."""

    def damage(plan: BoardPlan) -> BoardPlan:
        totals = tuple(replace(t, value=(t.value or 0.0) * 0.9) if t.name == name else t for t in plan.totals)
        return replace(plan, totals=totals)

    return damage


DAMAGE: dict[str, Damage] = {
    "a diode too few": more("photodiode", -1),
    "a diode too many": more("photodiode", 1),
    "a package too few": more("opamp", -1),
    "a resistor too few": more("resistor", -1),
    "a capacitor too many": more("capacitor", 1),
    "a line left out": without_first("bill"),
    "bought for less": lambda plan: with_line(plan, "opamp", cost=line_of(plan, "opamp").cost - 0.01),
    "bought for more": lambda plan: with_line(plan, "photodiode", cost=line_of(plan, "photodiode").cost + 1),
    "bought too few": lambda plan: with_line(plan, "photodiode", buy=line_of(plan, "photodiode").buy - 1),
    "another value": lambda plan: with_line(plan, "resistor", value=11e3),
    "another maker": lambda plan: with_line(plan, "opamp", maker="Maker Z"),
    "a cent less": lambda plan: replace(plan, cost=plan.cost - 1),
    "a cent more": lambda plan: replace(plan, cost=plan.cost + 1),
    "a copy built twice": with_first("builds", copies=(1, 1)),
    "a copy that is not wanted": with_first("builds", copies=(9,)),
    "a channel not built": without_first("builds"),
    "a build twice": twice("builds"),
    "a target missed": misses,
    "a package left out": without_first("packages"),
    "a package twice": twice("packages"),
    "a package that serves nobody": with_first("packages", places=()),
    "a package over-full": crowded,
    "a package of more amplifiers than the part has": too_many_amplifiers,
    "the same, with a bill that agrees": fewer_packages,
    "a copy served twice": twice_served,
    "a stranger served": with_first("packages", places=(Place("nobody", 1),)),
    "a level without buffer": unbuffered,
    "a level left out": without_first("levels"),
    "a level twice": twice("levels"),
    "a level of other resistors": with_first("levels", top=11e3),
    "a level of no channel": with_first("levels", channels=()),
    "no level though shared": own_divider,
    "another amplifier": other_amplifier,
    "over its cost": over("cost"),
    "over its supply current": over("supply_current"),
    "over its area": over("area"),
    "over its line items": over("line_items"),
    "a cost understated": understated("cost"),
    "an area understated": understated("area"),
    "line items understated": understated("line_items"),
    "a supply current understated": understated("supply_current"),
}


def test_a_sound_plan_passes() -> None:
    outline, plan = sound()
    audited(outline, plan)


@pytest.mark.parametrize("name", DAMAGE)
def test_damage_is_refused(name: str) -> None:
    outline, plan = sound()
    damaged = DAMAGE[name](plan)
    assert damaged != plan
    with pytest.raises(UnsoundBoardError):
        audited(outline, damaged)


def test_everything_that_is_wrong_is_said_at_once() -> None:
    outline, plan = sound()
    damaged = with_first("packages", places=())(misses(replace(plan, cost=plan.cost + 1)))
    with pytest.raises(UnsoundBoardError, match=r"misses a target.*do not serve the copies.*cents") as caught:
        audited(outline, damaged)
    assert "\n" not in str(caught.value)


def test_second_sources_are_looked_at_package_by_package() -> None:
    held = parts(amplifier("YZA-1", 1.0), amplifier("YZB-1", 1.4, maker="Maker E"))
    outline = outline_of([("one", 2, asked(), held)], rules=Rules(opamp_sources=2))
    plan = plan_board(outline).plans[0]
    audited(outline, plan)
    builds = tuple(replace(b, candidate=replace(b.candidate, alternates=())) for b in plan.builds)
    with pytest.raises(UnsoundBoardError, match="another maker"):
        audited(outline, replace(plan, builds=builds))
