"""The one table of names: every figure, target and catalog column, with kind, meaning and usual range."""

from optimizer.vocabulary.columns import COLUMNS, NAMES, ROLES, Column
from optimizer.vocabulary.figures import TARGETS, VOCABULARY, Figure, figure_kind

__all__ = [
    "COLUMNS",
    "NAMES",
    "ROLES",
    "TARGETS",
    "VOCABULARY",
    "Column",
    "Figure",
    "figure_kind",
]
