"""Real parts: how the figures spread over random draws, and what that makes of the yield."""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from optimizer.report.page.blocks import Block, Cell, Figure, Section, Table, Words, cells
from optimizer.report.page.draw.spread import Panel, draw_spread
from optimizer.report.page.terms import in_terms, joined, term
from optimizer.report.real_parts import sentences
from optimizer.report.words import beside, count, figure, percent, side
from optimizer.report.yields import yield_words
from optimizer.review.dossier import Dossier

Floats = NDArray[np.float64]
PERCENTILES = (1, 50, 99)


def spread(dossier: Dossier) -> Section | None:
    """The section on real parts; None where the request states no [tolerance]."""
    said = list(sentences(dossier.data))
    if not said:
        return None
    row = dossier.candidate
    blocks: list[Block] = []
    words = "; ".join(yield_words(row, dossier.request))
    if words and row["yield"]["unknown"]:
        blocks.append(Words(f"{words}.", "alert", "Yield"))
    elif words:
        blocks.append(Words(f"{words}.", "lead"))
    blocks.append(Words(in_terms(" ".join(said))))
    if dossier.findings.drawn and row.get("yield", {}).get("draws"):
        blocks.append(_figure(dossier.findings.drawn, dossier))
    return Section("tolerance", "Real parts", tuple(blocks))


def _figure(values: Mapping[str, Floats], dossier: Dossier) -> Figure:
    request, drawn = dossier.request, dossier.candidate["yield"]
    targets = [target for target in dossier.candidate["targets"] if _moves(values, target["name"])]
    panels = [
        Panel(
            term(target["name"]),
            values[target["name"]],
            target["limit"],
            at_least=side(target["name"]) == "at least",
            said=partial(_said, target["name"], request),
        )
        for target in targets
    ]
    fixed = [term(t["name"]) for t in dossier.candidate["targets"] if t not in targets]
    alternative = (
        f"Histograms of {count(drawn['draws'])} draws, one panel a target, each with its limit; draws that "
        f"miss it stand beyond it. Missed: {joined(_missed(drawn)) or 'nothing in any draw'}."
        + (f" Not drawn, for they do not move: {joined(fixed)}." if fixed else "")
    )
    title = "Each target over random real parts, with its limit"
    draw = partial(draw_spread, panels)
    return Figure("spread", title, alternative, draw, _data(values, dossier), 600)


def _missed(drawn: Mapping[str, Any]) -> list[str]:
    """What the draws miss, the most frequent first."""
    failures = sorted(drawn["failures"].items(), key=lambda item: (-item[1], item[0]))
    return [f"{term(name)} in {percent(number / drawn['draws'])}" for name, number in failures]


def _moves(values: Mapping[str, Floats], name: str) -> bool:
    known = values.get(name, np.array([]))
    known = known[np.isfinite(known)]
    return bool(known.size and known.max() > known.min())


def _said(name: str, request: Mapping[str, Any], value: float) -> str:
    return figure(name, value, request)


def _data(values: Mapping[str, Floats], dossier: Dossier) -> Table:
    request, drawn = dossier.request, dossier.candidate["yield"]
    rows = []
    for target in dossier.candidate["targets"]:
        name = target["name"]
        value, limit = beside(name, target["value"], target["limit"], request)
        middle = (figure(name, _at(values.get(name), share), request) for share in PERCENTILES)
        failed = drawn["failures"].get(name, 0)
        texts = (term(name), f"{side(name)} {limit}", value, figure(name, drawn["worst"].get(name), request))
        missed = percent(failed / drawn["draws"]) if failed else "never"
        rows.append((*cells(*texts, *middle), Cell(missed, tone="bad" if failed else "")))
    headings = ("target", "limit", "nominal", "worst drawn", *(f"{p} % below" for p in PERCENTILES), "missed")
    return Table("Each target over the draws", headings, tuple(rows), numbers=frozenset(range(2, 8)))


def _at(values: Floats | None, share: int) -> float | None:
    """The value below which `share` percent of the draws lie; None where some draw has none."""
    if values is None or not np.isfinite(values).all():
        return None
    return float(np.percentile(values, share))
