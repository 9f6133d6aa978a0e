"""The request's types, under the name that they are to keep; their module moves here."""

from optimizer.request_types import (
    RANKINGS,
    REFERENCES,
    ROLES,
    WIRINGS,
    Ambient,
    Converter,
    Divider,
    Light,
    Ranking,
    Request,
    Space,
    Supply,
    Targets,
)

__all__ = [
    "RANKINGS",
    "REFERENCES",
    "ROLES",
    "WIRINGS",
    "Ambient",
    "Converter",
    "Divider",
    "Light",
    "Ranking",
    "Request",
    "Space",
    "Supply",
    "Targets",
]
