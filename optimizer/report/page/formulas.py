"""Each figure worked by hand: its formula, the numbers put in, and its source."""

from __future__ import annotations

from collections.abc import Iterable

from optimizer.report.page.blocks import Formula, Formulas, Part, Section, Words
from optimizer.report.page.terms import CONTRIBUTIONS, contribution, term
from optimizer.report.words import light_kind
from optimizer.report.worked import Worked, steps, worked
from optimizer.review.dossier import Dossier
from optimizer.vocabulary import VOCABULARY


def formulas(dossier: Dossier) -> Section:
    """The section of worked figures, and of the values in between that they use."""
    glass, figures = dossier.glass, dossier.candidate["figures"]
    text = (
        "Each figure with its formula, the numbers put in and its source, so that it can be redone by hand. "
        "Numbers are written to five digits; angles of atan are in degrees."
    )
    parts = (
        Part("Figures", (_formulas(worked(glass, figures, light_kind(dossier.request))),)),
        Part("Values in between", (_formulas(steps(glass)),)),
    )
    return Section("formulas", "How each figure comes about", (Words(text),), parts)


def _formulas(rows: Iterable[Worked]) -> Formulas:
    return Formulas(
        tuple(Formula(_name(row.figure), row.formula, row.numbers, row.value, row.source) for row in rows)
    )


def _name(figure: str) -> str:
    if figure in VOCABULARY:
        return term(figure)
    return contribution(figure) if figure in CONTRIBUTIONS else figure
