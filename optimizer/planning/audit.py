"""A plan by name looked at anew, from its receivers and the catalogs alone.

What the receivers, packages and levels need is counted and priced again, by code that shares nothing with
the pools, the model, or the tables behind them.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from fractions import Fraction

from optimizer.catalog.parts import Parts
from optimizer.planning.counted import amplifier_of, recounted, row_of
from optimizer.planning.outline import Outline, Wanted
from optimizer.planning.plan import BoardPlan, Build, Level
from optimizer.planning.told import UnsoundBoardError

Item = tuple[str, str, str, float | None]
"""Role, maker, part or family, value."""


def audited(outline: Outline, plan: BoardPlan) -> None:
    """Raises UnsoundBoardError with everything that is wrong with `plan`."""
    faults = [*_channels(outline, plan), *_places(plan)]
    # who serves whom is looked into only where everybody is there
    if not faults:
        faults = [*_sources(outline, plan), *_amplifiers(outline, plan), *recounted(outline, plan)]
    faults += [*_pieces(outline, plan), *_money(outline, plan)]
    if faults:
        raise UnsoundBoardError("; ".join(faults))


def _channels(outline: Outline, plan: BoardPlan) -> Iterator[str]:
    """Every copy of every channel is built once, and meets its request."""
    for channel in outline.channels:
        copies = [copy for build in plan.builds if build.channel == channel.name for copy in build.copies]
        if sorted(copies) != list(range(1, channel.count + 1)):
            yield f"{channel.name} is built as copies {copies}, of {channel.count}"
    for build in plan.builds:
        if any(target.margin < 0.0 for target in build.candidate.targets):
            yield f"{build.channel} misses a target"
    for level in plan.levels:
        users = {build.channel for build in plan.builds if build.level == level.name}
        if not users or users != set(level.channels):
            yield f"{level.name} serves {', '.join(sorted(users)) or 'no channel'}"


def _places(plan: BoardPlan) -> Iterator[str]:
    """Every copy and every level has an amplifier, in a package that holds so many."""
    served = Counter(place for package in plan.packages for place in package.places)
    copies = {(build.channel, copy) for build in plan.builds for copy in build.copies}
    if {(p.channel, p.copy) for p in served if p.channel is not None} != copies:
        yield "the packages do not serve the copies"
    if {p.level for p in served if p.level is not None} != {level.name for level in plan.levels}:
        yield "the packages do not serve the levels"
    if any(count > 1 for count in served.values()) or any(package.spare < 0 for package in plan.packages):
        yield "an amplifier serves twice"


def _sources(outline: Outline, plan: BoardPlan) -> Iterator[str]:
    """Op-amps of enough makers fit in the place of each package, for all that it serves at once."""
    builds = {(build.channel, copy): build for build in plan.builds for copy in build.copies}
    wanted = {channel.name: makers_of(outline, channel) for channel in outline.channels}
    users = {
        level.name: [key for key, build in builds.items() if build.level == level.name]
        for level in plan.levels
    }
    for package in plan.packages:
        served = [(p.channel, p.copy) for p in package.places if p.channel is not None]
        served += [key for p in package.places if p.level is not None for key in users[p.level]]
        least = max((wanted[str(channel)] for channel, _ in served), default=1)
        if least == 1:
            continue
        others = [{(a.opamp_maker, a.opamp) for a in builds[key].candidate.alternates} for key in served]
        makers = {maker for maker, _ in set.intersection(*others)} | {package.maker}
        if len(makers) < least:
            yield f"no op-amp of another maker serves all that {package.opamp} serves in one package"


def _amplifiers(outline: Outline, plan: BoardPlan) -> Iterator[str]:
    """Every package holds what its part does, and is of the amplifier that its copies were graded with."""
    builds = {(build.channel, copy): build for build in plan.builds for copy in build.copies}
    for package in plan.packages:
        family, amplifiers = amplifier_of(outline, package.opamp, package.maker)
        if amplifiers != package.amplifiers:
            yield f"{package.opamp} holds {amplifiers} amplifiers, not {package.amplifiers}"
        for place in package.places:
            if place.channel is None:
                continue
            one = builds[place.channel, place.copy].candidate
            if (family, package.maker) != (
                amplifier_of(outline, one.opamp, one.opamp_maker)[0],
                one.opamp_maker,
            ):
                yield f"{place.channel} was graded with {one.opamp}, not with {package.opamp}"


def makers_of(outline: Outline, channel: Wanted) -> int:
    """From how many makers the op-amps of a channel must be had."""
    return max(outline.rules.opamp_sources, channel.study.request.resilience.opamp_sources)


def _pieces(outline: Outline, plan: BoardPlan) -> Iterator[str]:
    """The bill holds what is built, no more and no less."""
    need: Counter[Item] = Counter()
    for build in plan.builds:
        need.update({item: len(build.copies) * n for item, n in Counter(_used(outline, build)).items()})
    for package in plan.packages:
        need["opamp", package.maker, package.opamp, None] += 1
    bill = {(line.role, line.maker, line.part, line.value): line.pieces for line in plan.bill}
    for level in plan.levels:
        need.update(_of_level(level, bill))
    if bill != dict(need):
        wrong = sorted({item[2] for item, _ in need.items() ^ bill.items()})
        yield f"the bill does not hold what is built: {', '.join(wrong)}"


def _used(outline: Outline, build: Build) -> Iterator[Item]:
    """What one copy takes besides its amplifiers and what it shares."""
    one = build.candidate
    said: Mapping[str, str | None] = one.outlines
    yield "photodiode", one.photodiode_maker, one.photodiode, None
    yield "resistor", said["resistor_maker"] or "", one.resistor_family, one.feedback_resistance
    if one.capacitor_family is not None:
        yield "capacitor", said["capacitor_maker"] or "", one.capacitor_family, one.feedback_capacitance
    if one.reference.kind == "divider" and build.level is None:
        bypass = _bypass(outline, build.channel)
        yield "resistor", said["divider_maker"] or "", said["divider_family"] or "", one.reference.top
        yield "resistor", said["divider_maker"] or "", said["divider_family"] or "", one.reference.bottom
        yield "capacitor", said["bypass_maker"] or "", said["bypass_family"] or "", bypass


def _bypass(outline: Outline, channel: str) -> float:
    wanted = next(one for one in outline.channels if one.name == channel)
    return wanted.study.request.space.divider.bypass


def _of_level(level: Level, bill: Mapping[Item, int]) -> Counter[Item]:
    """What a shared level takes; its families' makers are those of the bill."""
    wanted = [
        ("resistor", level.resistor_family, level.top),
        ("resistor", level.resistor_family, level.bottom),
        ("capacitor", level.capacitor_family, level.bypass),
    ]
    found: Counter[Item] = Counter()
    for role, family, value in wanted:
        makers = [item[1] for item in bill if (item[0], item[2], item[3]) == (role, family, value)]
        found[role, makers[0] if makers else "", family, value] += 1
    return found


def _money(outline: Outline, plan: BoardPlan) -> Iterator[str]:
    """Every line is the cheapest way to buy its pieces, in stock; the sum is the plan's cost."""
    cents = Fraction(0)
    for line in plan.bill:
        need = line.pieces * outline.quantity
        least = _cheapest(row_of(outline, line.role, line.part, line.maker), need)
        if line.buy < need or least is None or least != round(line.cost * 100):
            yield f"{line.part} is not bought as the catalog sells it"
        cents += least or 0
    money = Fraction(str(outline.costs.placement)) * outline.quantity * 100
    placed = _half_up(money) * sum(line.pieces for line in plan.bill)
    lines = _half_up(Fraction(str(outline.costs.line_item)) * 100) * len(plan.bill)
    if cents + placed + lines != plan.cost:
        yield f"the cost is {cents + placed + lines} cents, not {plan.cost}"


def _half_up(value: Fraction) -> int:
    return int(value + Fraction(1, 2))


def _cheapest(where: tuple[Parts, int], need: int) -> int | None:
    """Cents for at least `need` pieces, whatever quantity is bought; None where the stock is too small."""
    parts, row = where
    breaks = parts.points["price"][row]
    stock = float(parts.number["stock"][row]) if "stock" in parts.number else float("nan")
    offers = []
    for quantity in {need, *(-int(-first // 1) for first, _ in breaks if first > need)}:
        if quantity > stock:
            continue
        held = [unit for first, unit in breaks if first <= quantity] or [breaks[0][1]]
        offers.append(_half_up(min(Fraction(str(float(unit))) for unit in held) * quantity * 100))
    return min(offers, default=None)
