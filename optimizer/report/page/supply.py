"""How much each part of the candidate hangs on its supply."""

from __future__ import annotations

from collections.abc import Sequence

from optimizer.errors import clean
from optimizer.report.exposure import CAUTION, COUNTED_IN_ONE, USED, wrong_words
from optimizer.report.page.blocks import Block, Cell, Section, Table, Words, cells
from optimizer.report.page.terms import joined
from optimizer.report.words import count
from optimizer.review.dossier import Dossier
from optimizer.review.supply import Exposure

UNKNOWN = "not stated"


def exposure(dossier: Dossier) -> Section | None:
    """The section on the supply of each part; None where it was not looked for."""
    return supplied(dossier.findings.exposure)


def supplied(found: Sequence[Exposure]) -> Section | None:
    """The section on parts whose supply was `found` out; None without any."""
    if not found:
        return None
    headings = (
        "part", "used for", "status", "stock", "needed", "lead time", "makers", "drop-in", "values", "exposed"
    )  # fmt: skip
    table = Table(
        "Each part's supply, the worst first",
        headings,
        tuple(_exposed(part) for part in found),
        numbers=frozenset({3, 4, 5, 6, 7, 8}),
    )
    blocks: list[Block] = []
    alone = [clean(part.part) for part in found if part.alone]
    if alone:
        has = "has" if len(alone) == 1 else "have"
        text = f"{joined(alone)} {has} no substitute in the same footprint that meets every target."
        blocks.append(Words(text, "alert", "Exposed"))
    return Section(
        "exposure", "Supply of each part", (*blocks, table, Words(COUNTED_IN_ONE, "note"), Words(CAUTION))
    )


def _exposed(part: Exposure) -> tuple[Cell, ...]:
    tone = "bad" if part.alone else ""
    wrong = "; ".join(wrong_words(part))
    return (
        *cells(_named(part), ", ".join(USED[use] for use in part.uses), part.status or UNKNOWN),
        Cell(UNKNOWN if part.stock is None else count(int(part.stock)), tone="bad" if part.short else ""),
        *cells(count(part.needed), _weeks(part.lead_weeks), count(part.makers)),
        Cell(count(part.drop_ins), tone=tone),
        Cell(count(part.values), tone=tone),
        Cell(wrong.replace("NO SUBSTITUTE", "no substitute") or "-"),
    )


def _named(part: Exposure) -> str:
    return f"{clean(part.part)} ({clean(part.maker)})" if part.maker else clean(part.part)


def _weeks(weeks: float | None) -> str:
    return UNKNOWN if weeks is None else f"{weeks:g} weeks"
