"""The bill of materials with its sums: parts, line items, placements."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.board.amounts import CENTS, in_cents, money, of_cents, unit_price
from optimizer.report.layout import Column
from optimizer.report.words import count, several

Data = Mapping[str, Any]

MORE = "+"
"""Marks what is bought beyond the need, up to a price break."""
KINDS: Mapping[str, str] = {"resistor": "resistance", "capacitor": "capacitance"}


def bill_columns(plan: Data, data: Data) -> list[Column]:
    """One row a part number, as the plan has them."""
    bill, quantity = plan["bill"], data["board"]["quantity"]
    return [
        Column("part", tuple(clean(line["part"]) for line in bill), gives=True),
        Column("maker", tuple(clean(line["maker"]) for line in bill), gives=True),
        Column("value", tuple(value_words(line) for line in bill), right=True),
        Column("package", tuple(clean(line["package"] or "-") for line in bill), gives=True),
        Column("a\nboard", tuple(count(line["pieces"]) for line in bill), right=True),
        Column("to buy", tuple(_to_buy(line, quantity) for line in bill), right=True),
        Column("unit\nprice", tuple(unit_price(line["unit_price"]) for line in bill), right=True),
        Column("line\ncost", tuple(f"{line['cost']:.2f}" for line in bill), right=True),
    ]


def value_words(line: Data) -> str:
    """The value of a passive; '' for other parts."""
    return "" if line["value"] is None else show(line["value"], KINDS[line["role"]])


def _to_buy(line: Data, quantity: int) -> str:
    return f"{count(line['buy'])}{MORE if bought_up(line, quantity) else ' '}"


def bought_up(line: Data, quantity: int) -> bool:
    """Whether more is bought than `quantity` boards need."""
    return bool(line["buy"] > line["pieces"] * quantity)


def bought_up_words(plan: Data, data: Data) -> str:
    """What the mark stands for, with the needs; '' where nothing is bought beyond them."""
    quantity = data["board"]["quantity"]
    marked = [line for line in plan["bill"] if bought_up(line, quantity)]
    if not marked:
        return ""
    said = ", ".join(f"{_named(line)} {count(line['pieces'] * quantity)}" for line in marked)
    return f"{MORE} bought up to a price break, for less money than what is needed alone: {said}"


def _named(line: Data) -> str:
    return " ".join(filter(None, (clean(line["part"]), value_words(line))))


def sum_columns(plan: Data, data: Data) -> list[Column]:
    """Parts, line items and placements, and the total: what they are, a build and a board."""
    rows = sums(plan, data)
    quantity = data["board"]["quantity"]
    return [
        Column("", tuple(name for name, _, _ in rows)),
        Column("", tuple(what for _, what, _ in rows), gives=True),
        Column("a build", tuple(of_cents(cents) for _, _, cents in rows), right=True),
        Column("a board", tuple(money(cents / CENTS / quantity) for _, _, cents in rows), right=True),
    ]


def sums(plan: Data, data: Data) -> Sequence[tuple[str, str, int]]:
    """Each sum with what it is made of, in cents a build; the last one is the plan's own cost."""
    costs, bill, quantity = data["board"]["costs"], plan["bill"], data["board"]["quantity"]
    placed = sum(line["pieces"] for line in bill)
    numbers = several(len(bill), "part number")
    items, placements = (unit_price(costs[name]) for name in ("line_item", "placement"))
    return (
        ("parts", numbers, sum(in_cents(line["cost"]) for line in bill)),
        ("line items", f"{numbers} at {items}", len(bill) * in_cents(costs["line_item"])),
        (
            "placements",
            f"{several(placed * quantity, 'part')} at {placements}",
            placed * in_cents(costs["placement"] * quantity),
        ),
        ("total", several(quantity, "board"), plan["cost"]),
    )
