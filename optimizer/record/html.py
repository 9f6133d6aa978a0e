"""The record as a notebook shows it: engineering notation, every text escaped."""

from __future__ import annotations

from collections.abc import Callable
from html import escape
from typing import TYPE_CHECKING, Any

from optimizer.quantities import show
from optimizer.vocabulary import VOCABULARY

if TYPE_CHECKING:
    from optimizer.record.model import Record

SHOWN = ("bandwidth", "snr", "dynamic_range", "supply_current", "cost")
KINDS = {
    "reference_voltage": "voltage",
    "feedback_resistance": "resistance",
    "feedback_capacitance": "capacitance",
    "margin": "fraction",
}
CHOICE = (
    "rank",
    "photodiode",
    "opamp",
    "wiring",
    "reference_voltage",
    "feedback_resistance",
    "feedback_capacitance",
)


def notebook(record: Record) -> str:
    """An HTML table of the candidates, or of the near misses where nothing meets the request."""
    met = bool(record.candidates)
    table = record.table if met else record.near_miss_table
    what = "meet the request" if met else "near misses: nothing meets the request"
    caption = f"{record.data['name']}: {len(table)} {what}"
    names = [*CHOICE, *SHOWN, "limiting", "margin"]
    body = table[names].to_html(index=False, formatters=_formatters(), escape=True, na_rep="-")
    return f"<p>{escape(caption)}</p>\n{body}"


def _formatters() -> dict[str, Callable[[Any], str]]:
    kinds = KINDS | {name: VOCABULARY[name].kind for name in SHOWN}
    return {name: _formatter(kind) for name, kind in kinds.items()}


def _formatter(kind: str) -> Callable[[Any], str]:
    return lambda value: show(float(value), kind)
