"""Whether all that one run says about its currency can be one currency."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from optimizer.errors import Problem

# Signs that several currencies share agree with each of these.
_SHARED = {
    "$": frozenset({"USD", "AUD", "CAD", "HKD", "NZD", "SGD", "TWD", "MXN", "CLP", "COP", "ARS"}),
    "¥": frozenset({"JPY", "CNY"}),
}


@dataclass(frozen=True, slots=True)
class Stated:
    """One place that says which currency its prices have: `code` by ISO 4217, `text` as written."""

    file: str
    code: str
    text: str
    row: int | None = None
    column: str | None = None

    @property
    def possible(self) -> frozenset[str]:
        """The currencies that the text can stand for."""
        marks = "".join(sign for sign in self.text if not sign.isdigit() and sign not in " .,'")
        return _SHARED.get(marks, frozenset()) | {self.code}


def settle(stated: Iterable[Stated], wanted: str | None) -> tuple[str | None, list[Problem]]:
    """Return the one currency of the run (None: nowhere said), and every place that contradicts it.

    `wanted` is the currency of the request's limits, None where it states none. A sign that several
    currencies share agrees with each of them; alone it means the most traded one.
    """
    entries = sorted(_first_of_each(stated), key=lambda entry: len(entry.possible))
    if wanted is not None:
        entries.insert(0, Stated("the request", wanted, wanted))
    if not entries:
        return None, []
    anchor = entries[0]
    clashes = [entry for entry in entries if not entry.possible & anchor.possible]
    return anchor.code, [_problem(entry, anchor) for entry in clashes]


def _first_of_each(stated: Iterable[Stated]) -> list[Stated]:
    """Keep the first entry of each file and currency: one line says it as well as five thousand."""
    kept: dict[tuple[str, frozenset[str]], Stated] = {}
    for entry in stated:
        kept.setdefault((entry.file, entry.possible), entry)
    return list(kept.values())


def _problem(entry: Stated, anchor: Stated) -> Problem:
    place = anchor.file if anchor.row is None else f"{anchor.file}, line {anchor.row}"
    rule = f"two currencies in one run: {place} has {anchor.code}"
    remedy = "bring all prices and limits into one currency"
    return Problem(entry.file, entry.row, entry.column, entry.text, rule, remedy)
