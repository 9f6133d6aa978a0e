"""The bill of materials of a plan, what it costs, and what it uses of every limit."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from math import fsum

from optimizer.board.prices import CENTS, Purchase, purchase
from optimizer.planning.columns import Field, costs_of
from optimizer.planning.outline import Outline
from optimizer.planning.plan import ROLES, LineItem, Total
from optimizer.planning.shelf import Shelf


def bill_of(field: Field, pieces: Mapping[int, int]) -> tuple[LineItem, ...]:
    """The bill of `pieces` a board by part of the shelf; an op-amp on several rails is one line."""
    merged: dict[tuple[str, str, str, float | None], list[int]] = {}
    for part in sorted(pieces):
        stocked = field.shelf.parts[part]
        key = (stocked.role, stocked.key[1], stocked.key[2], stocked.value)
        merged.setdefault(key, []).append(part)
    lines = [_line(field, parts, sum(pieces[p] for p in parts)) for parts in merged.values()]
    return tuple(
        sorted(lines, key=lambda line: (ROLES.index(line.role), line.part, line.value or 0.0, line.maker))
    )


def _line(field: Field, parts: Sequence[int], pieces: int) -> LineItem:
    stocked = field.shelf.parts[parts[0]]
    entry = stocked.entry
    bought = bought_of(field.shelf, parts[0], field.outline.quantity, pieces)
    return LineItem(
        role=stocked.role,
        part=stocked.key[2],
        maker=stocked.key[1],
        value=stocked.value,
        package=stocked.package,
        pieces=pieces,
        buy=bought.quantity,
        unit_price=bought.unit,
        cost=bought.cents / CENTS,
        area=entry.area,
    )


def bought_of(shelf: Shelf, part: int, boards: int, pieces: int) -> Purchase:
    """What is bought for `pieces` a board; where the stock is too small for them, as if it were not."""
    entry = shelf.parts[part].entry
    bought = purchase(entry.breaks, boards, pieces, entry.stock) or purchase(
        entry.breaks, boards, pieces, None
    )
    assert bought is not None
    return bought


def cost_of(outline: Outline, bill: Sequence[LineItem]) -> int:
    """Cents a build: parts, line items and placements."""
    line_item, placement = costs_of(outline)
    parts = sum(round(line.cost * CENTS) for line in bill)
    return parts + line_item * len(bill) + placement * sum(line.pieces for line in bill)


def totals_of(
    field: Field, bill: Sequence[LineItem], cost: int, current: float
) -> tuple[tuple[Total, ...], str | None]:
    """What is used of every limit a board, and the limit that is nearest; `current` in A."""
    outline = field.outline
    opamps = [line for line in bill if line.role == "opamp"]
    areas = [line.area for line in bill]
    area = None if None in areas else fsum((line.area or 0.0) * line.pieces for line in bill)
    limits = outline.limits
    totals = (
        Total("cost", cost / CENTS / outline.quantity, limits.cost),
        Total("supply_current", None if _unknown_current(field, opamps) else current, limits.supply_current),
        Total("area", area, limits.area),
        Total("line_items", float(len(bill)), limits.line_items),
        Total("opamp_parts", float(len(opamps)), outline.rules.opamp_parts or None),
        Total("packages", float(sum(line.pieces for line in opamps)), None),
        Total("placements", float(sum(line.pieces for line in bill)), None),
    )
    held = [(total.margin, total.name) for total in totals if total.margin is not None]
    return totals, min(held)[1] if held else None


def _unknown_current(field: Field, opamps: Sequence[LineItem]) -> bool:
    """Whether the supply current of some op-amp is not known."""
    bought = {(line.maker, line.part) for line in opamps}
    return any(
        part.unknown_current and (part.key[1], part.key[2]) in bought
        for part in field.shelf.parts
        if part.key[0] == "opamps"
    )
