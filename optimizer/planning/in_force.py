"""A board file's tables and keys with the values in force, as the saved record writes them."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from optimizer.planning.outline import Outline


def in_force(outline: Outline) -> dict[str, Any]:
    """Return the board as nested tables, named as in its TOML, with every default filled in.

    Numbers are in SI, money in the catalogs' currency. Limits that are not stated are left out, so
    that the tables written as TOML read to an equal outline.
    """
    limits = {name: limit for name, limit in asdict(outline.limits).items() if limit is not None}
    return {
        "name": outline.name,
        "quantity": outline.quantity,
        "channels": [
            {"name": channel.name, "request": channel.request, "count": channel.count}
            for channel in outline.channels
        ],
        "limits": limits,
        "costs": asdict(outline.costs),
        "rules": asdict(outline.rules),
        "solve": asdict(outline.solve),
    }
