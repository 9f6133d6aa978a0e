"""What each target costs, and how much each part hangs on its supply."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from optimizer.errors import clean
from optimizer.report.page.blocks import Cell, Section, Table, Words, cells
from optimizer.report.page.terms import money, term
from optimizer.report.words import count, figure, margin_words
from optimizer.review.dossier import Dossier
from optimizer.review.findings import Exposed, Price


def prices(dossier: Dossier) -> Section | None:
    """The section on what each target costs; None where it was not looked for."""
    found = dossier.findings.prices
    if not found:
        return None
    text = "The best receiver if one target alone is relaxed, tightened or dropped and all others stay."
    headings = ("target", "step", "limit", "cost", "margin", "what changes")
    rows = tuple(cells(*_price(price, dossier.data)) for price in found)
    table = Table("What each target costs", headings, rows, numbers=frozenset({1, 2, 3}))
    return Section("prices", "What each target costs", (Words(text), table))


def _price(price: Price, data: Mapping[str, Any]) -> tuple[str, ...]:
    change = "; ".join(
        f"{clean(position).replace('_', ' ')} {clean(words)}" for position, words in price.change
    )
    return (
        term(price.target),
        "dropped" if price.step is None else f"{100.0 * price.step:+.0f} %",
        "-" if price.limit is None else figure(price.target, price.limit, data["request"]),
        "nothing meets" if price.cost is None else money(price.cost, data),
        "-" if price.margin is None else margin_words(price.margin),
        change or "-",
    )


def exposure(dossier: Dossier) -> Section | None:
    """The section on the supply of each part; None where it was not looked for."""
    found = dossier.findings.exposure
    if not found:
        return None
    headings = (
        "part", "used as", "status", "stock", "needed", "lead time", "makers", "drop-ins", "with other values"
    )  # fmt: skip
    rows = tuple(_exposed(part) for part in found)
    table = Table(
        "Each part's supply, the worst first", headings, rows, numbers=frozenset({3, 4, 5, 6, 7, 8})
    )
    alone = [clean(part.part) for part in found if not part.drop_ins and not part.values]
    text = (
        "A drop-in has the same package and pinout and changes nothing else; with other values, Rf, Cf or "
        "the divider's values change too."
    )
    words = [Words(text)]
    if alone:
        words.append(Words(f"No substitute in place: {', '.join(alone)}.", "alert", "Exposed"))
    return Section("exposure", "Supply of each part", (*words, table))


def _exposed(part: Exposed) -> tuple[Cell, ...]:
    short = part.stock is not None and part.stock < part.needed
    bare = not part.drop_ins and not part.values
    return (
        *cells(clean(part.part), part.role, part.status),
        Cell("not stated" if part.stock is None else count(int(part.stock)), tone="bad" if short else ""),
        *cells(count(part.needed), _weeks(part.lead_weeks), count(part.makers)),
        Cell(count(part.drop_ins), tone="bad" if bare else ""),
        Cell(count(part.values), tone="bad" if bare else ""),
    )


def _weeks(weeks: float | None) -> str:
    return "not stated" if weeks is None else f"{weeks:g} weeks"
