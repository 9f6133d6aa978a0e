"""The record as a notebook shows it: engineering notation, every text escaped."""

from __future__ import annotations

from collections.abc import Callable
from html import escape
from typing import TYPE_CHECKING, Any

from optimizer.quantities import show
from optimizer.vocabulary import VOCABULARY

if TYPE_CHECKING:
    import pandas as pd

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


def notebook(table: pd.DataFrame, caption: str) -> str:
    """A table of `Record.table`'s columns as HTML under its caption, the columns that fit a page."""
    names = [*CHOICE, *SHOWN, "limiting", "margin"]
    body = table[names].to_html(index=False, formatters=_formatters(), escape=True, na_rep="-")
    return f"<p>{escape(caption)}</p>\n{body}"


def _formatters() -> dict[str, Callable[[Any], str]]:
    kinds = KINDS | {name: VOCABULARY[name].kind for name in SHOWN}
    return {name: _formatter(kind) for name, kind in kinds.items()}


def _formatter(kind: str) -> Callable[[Any], str]:
    return lambda value: show(float(value), kind)
