"""The plan against choosing each channel by itself."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.report.board.amounts import CENTS, money, of_cents, worded
from optimizer.report.conflicts import listed
from optimizer.report.words import percent, several

Data = Mapping[str, Any]

STOCK = "stock"
"""What the record calls it where there is too little of a part."""


def alone_words(plan: Data, data: Data) -> Iterator[str]:
    """What the plan saves, in up to two sentences; none where that is not known."""
    alone = data["alone"]
    if alone is None:
        return
    each = money(alone["cost"] / CENTS / data["board"]["quantity"])
    so = f"With each channel's cheapest receiver, chosen by itself, it would come to {each} a board"
    parts = f"{several(alone['line_items'], 'line item')} and {several(alone['packages'], 'op-amp package')}"
    yield f"{so}, with {parts}. The plan {', but '.join(_savings(plan, data)) or 'saves nothing of it'}."
    limits = [clean(name) for name in alone["over"] if name != STOCK]
    if limits:
        yield f"Built so, the board would not keep to its limits: {listed(limits)}."
    if STOCK in alone["over"]:
        yield "Built so, more of a part would be needed than is in stock."


def _savings(plan: Data, data: Data) -> Iterator[str]:
    """What is saved, in one phrase; what the plan takes more, in another."""
    differences = list(_differences(plan, data))
    for verb, sign in (("saves", 1), ("takes more:", -1)):
        said = [words for amount, words in differences if amount * sign > 0]
        if said:
            yield f"{verb} {listed(said)}"


def _differences(plan: Data, data: Data) -> Iterator[tuple[int, str]]:
    alone, quantity = data["alone"], data["board"]["quantity"]
    saved = alone["cost"] - plan["cost"]
    share = f", {percent(abs(saved) / alone['cost'])}" if saved and alone["cost"] else ""
    yield saved, f"{money(abs(saved) / CENTS / quantity)} a board ({of_cents(abs(saved))} a build{share})"
    totals = {total["name"]: total["value"] for total in plan["totals"]}
    for name, what in (("line_items", "line item"), ("packages", "op-amp package")):
        fewer = alone[name] - round(totals[name])
        yield fewer, worded(abs(fewer), what)
