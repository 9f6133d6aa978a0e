"""What a plan uses of the board's limits, and which of them is the nearest."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.report.board.amounts import amount, told_apart
from optimizer.report.layout import Column
from optimizer.report.words import margin_words

Data = Mapping[str, Any]


def total_columns(plan: Data) -> list[Column]:
    """One row for each total a board, with its limit and what is left of it."""
    totals = plan["totals"]
    said = [_value_and_limit(total) for total in totals]
    return [
        Column("a board", tuple(clean(total["name"]) for total in totals)),
        Column("used", tuple(value for value, _ in said), right=True),
        Column("limit", tuple(limit for _, limit in said)),
        Column("margin", tuple(_margin(total, plan) for total in totals), gives=True),
    ]


def _value_and_limit(total: Data) -> tuple[str, str]:
    name, value, limit = total["name"], total["value"], total["limit"]
    if limit is None:
        return amount(name, value), "-"
    used, bound = told_apart(name, value, limit)
    return used, f"at most {bound}"


def _margin(total: Data, plan: Data) -> str:
    if total["limit"] is None:
        return "-"
    if total["margin"] is None:
        return "unknown"
    words = margin_words(total["margin"])
    return f"{words}, limiting" if total["name"] == plan["limiting"] else words


def limit_words(plan: Data) -> str:
    """That no limit is stated; '' where one is, for the table marks the nearest."""
    stated = any(total["limit"] is not None for total in plan["totals"])
    return "" if stated else "The board file states no limit on the whole board."
