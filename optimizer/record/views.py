"""The record as a notebook and a Python prompt show it: engineering notation, a page wide."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from html import escape
from typing import TYPE_CHECKING, Any

from optimizer.errors import clean, shortened
from optimizer.quantities import show
from optimizer.vocabulary import VOCABULARY

if TYPE_CHECKING:
    import pandas as pd

LONGEST_NAME = 80
PARTS = ("photodiode", "opamp")
KINDS = {
    "reference_voltage": "voltage",
    "feedback_resistance": "resistance",
    "margin": "fraction",
}
FIGURES = ("bandwidth", "snr", "dynamic_range", "supply_current", "cost")
HTML = (
    "rank",
    *PARTS,
    "wiring",
    "reference_voltage",
    "feedback_resistance",
    "feedback_capacitance",
    *FIGURES,
    "limiting",
    "margin",
)
TEXT = {
    "rank": "rank",
    "photodiode": "photodiode",
    "opamp": "op-amp",
    "feedback_resistance": "Rf",
    "feedback_capacitance": "Cf",
    "bandwidth": "bandwidth",
    "snr": "SNR",
    "cost": "cost",
    "limiting": "limiting",
    "margin": "margin",
}


def summary(data: Mapping[str, Any]) -> str:
    """One line: the request's name, how many pairs meet it, and what limits the best one."""
    name = shortened(clean(data["name"]), LONGEST_NAME)
    proven = "" if data["search"]["proven"] else ", not proven"
    return f"{name}: {_verdict(data)}{proven}"


def as_text(data: Mapping[str, Any], table: pd.DataFrame) -> str:
    """The summary over the columns of `table` that a prompt has room for."""
    if table.empty:
        return summary(data)
    body = table.to_string(
        columns=list(TEXT), header=list(TEXT.values()), index=False, formatters=_formatters(), na_rep="-"
    )
    return f"{summary(data)}\n{body}"


def as_html(data: Mapping[str, Any], table: pd.DataFrame) -> str:
    """The summary over the columns of `table` that a page has room for, every text escaped."""
    caption = f"<p>{escape(summary(data))}</p>"
    if table.empty:
        return caption
    body = table[list(HTML)].to_html(index=False, formatters=_formatters(), escape=True, na_rep="-")
    return f"{caption}\n{body}"


def _verdict(data: Mapping[str, Any]) -> str:
    met, missed = data["candidates"], data["near_misses"]
    if data["search"].get("impossible"):
        return "no part could meet the request"
    if met:
        verb = "meets" if len(met) == 1 else "meet"
        return f"{len(met)} {verb} the request, the first limited by {met[0]['limiting']}"
    if not missed:
        return "nothing meets the request, no pair is eligible"
    plural = "near miss" if len(missed) == 1 else "near misses"
    nearest = missed[0]["limiting"]
    return f"nothing meets the request; {len(missed)} {plural}, the nearest limited by {nearest}"


def _formatters() -> dict[str, Callable[[Any], str]]:
    kinds = KINDS | {name: VOCABULARY[name].kind for name in FIGURES}
    formatters = {name: _formatter(kind) for name, kind in kinds.items()}
    return formatters | dict.fromkeys(PARTS, clean) | {"feedback_capacitance": _capacitance}


def _formatter(kind: str) -> Callable[[Any], str]:
    return lambda value: show(float(value), kind)


def _capacitance(value: Any) -> str:
    return show(float(value), "capacitance") if value else "none"
