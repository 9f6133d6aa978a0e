"""What a plan by name uses of every limit, counted again from its bill, its levels and the catalogs."""

from __future__ import annotations

from collections.abc import Iterator
from math import fsum, isclose, isnan

from optimizer.board.prices import CENTS
from optimizer.catalog.parts import Parts
from optimizer.physics.reference import current as divider_current
from optimizer.planning.outline import Outline
from optimizer.planning.plan import TOTALS, BoardPlan, LineItem
from optimizer.planning.told import UnsoundBoardError
from optimizer.vocabulary import NAMES

ROLES = {"photodiode": "photodiodes", "opamp": "opamps", "resistor": "resistors", "capacitor": "capacitors"}
SAME, OVER = 1e-6, 1e-8
"""Shares by which a total may differ from its count, and pass its limit."""


def recounted(outline: Outline, plan: BoardPlan) -> Iterator[str]:
    """What is wrong with the totals of `plan`: those that differ from what is built, or pass their limit."""
    limits, said = _limits(outline), {total.name: total for total in plan.totals}
    for name, value in _counts(outline, plan).items():
        total = said.get(name)
        if total is None or total.limit != limits.get(name) or not _equal(total.value, value):
            yield f"the total of {name} is {value}, not as it is said"
        limit = limits.get(name)
        if limit is not None and (value is None or value > limit * (1.0 + OVER)):
            yield f"{name} is over its limit"


def row_of(outline: Outline, role: str, part: str, maker: str) -> tuple[Parts, int]:
    """The catalog row of a part. Raises UnsoundBoardError where no catalog holds it."""
    for channel in outline.channels:
        parts: Parts = getattr(channel.study.catalogs, ROLES[role])
        for row in range(parts.size):
            if (parts.text[NAMES[parts.role]][row], parts.text["maker"][row]) == (part, maker):
                return parts, row
    raise UnsoundBoardError(f"no catalog holds {maker}/{part}")


def amplifier_of(outline: Outline, opamp: str, maker: str) -> tuple[str, int]:
    """The family of an op-amp, and how many amplifiers its package holds."""
    parts, row = row_of(outline, "opamp", opamp, maker)
    return str(parts.text["family"][row]), int(parts.number["channels"][row])


def _limits(outline: Outline) -> dict[str, float | None]:
    stated = outline.limits
    return {
        "cost": stated.cost,
        "supply_current": stated.supply_current,
        "area": stated.area,
        "line_items": stated.line_items,
        "opamp_parts": outline.rules.opamp_parts or None,
    }


def _equal(one: float | None, other: float | None) -> bool:
    if one is None or other is None:
        return one is other
    return isclose(one, other, rel_tol=SAME, abs_tol=1e-12)


def _counts(outline: Outline, plan: BoardPlan) -> dict[str, float | None]:
    """All of TOTALS; None where the catalogs do not say."""
    opamps = [line for line in plan.bill if line.role == "opamp"]
    values = (
        plan.cost / CENTS / outline.quantity,
        _current(outline, plan, opamps),
        _sum(outline, plan.bill, "board_area"),
        float(len(plan.bill)),
        float(len(opamps)),
        float(sum(line.pieces for line in opamps)),
        float(sum(line.pieces for line in plan.bill)),
    )
    return dict(zip(TOTALS, values, strict=True))


def _current(outline: Outline, plan: BoardPlan, opamps: list[LineItem]) -> float | None:
    """That of whole packages, and of every divider that there is."""
    packages = _sum(outline, opamps, "quiescent_current")
    supplies = {channel.name: channel.study.request.supply for channel in outline.channels}
    dividers = []
    for build in plan.builds:
        reference, supply = build.candidate.reference, supplies[build.channel]
        if build.level is None and reference.top is not None and reference.bottom is not None:
            each = divider_current(supply.high, supply.low, reference.top, reference.bottom)
            dividers.append(len(build.copies) * float(each))
    for level in plan.levels:
        supply = supplies[level.channels[0]]
        dividers.append(float(divider_current(supply.high, supply.low, level.top, level.bottom)))
    return None if packages is None else packages + fsum(dividers)


def _sum(outline: Outline, lines: tuple[LineItem, ...] | list[LineItem], column: str) -> float | None:
    """The sum of a column over the pieces of `lines`, for every amplifier that a package holds."""
    values = []
    for line in lines:
        parts, row = row_of(outline, line.role, line.part, line.maker)
        each = float(parts.number[column][row]) if column in parts.number else float("nan")
        amplifiers = parts.number["channels"][row] if column == "quiescent_current" else 1.0
        values.append(line.pieces * float(amplifiers) * each)
    return None if any(map(isnan, values)) else fsum(values)
