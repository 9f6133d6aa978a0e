"""The op-amp packages of a plan with what they serve and what is spare; shared reference levels."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.board.amounts import numbered
from optimizer.report.layout import Column
from optimizer.report.words import count, several

Data = Mapping[str, Any]
Served = tuple[str, int]
Key = tuple[str, str, int, tuple[str, ...]]
"""Of packages that are listed together: part, maker, amplifiers, and the names of what each serves."""


def package_columns(plan: Data, counts: Mapping[str, int]) -> list[Column]:
    """One row for the packages of one part that serve the same channels, of which there are `counts`."""
    groups = _alike(plan, counts)
    spare = [key[2] * len(every) - sum(map(len, every)) for key, every in groups.items()]
    return [
        Column("packages", tuple(count(len(every)) for every in groups.values()), right=True),
        Column("op-amp", tuple(clean(part) for part, *_ in groups), gives=True),
        Column("maker", tuple(clean(maker) for _, maker, *_ in groups), gives=True),
        Column("amplifiers\nin each", tuple(count(holds) for _, _, holds, _ in groups), right=True),
        Column("spare", tuple(count(one) if one else "-" for one in spare), right=True),
        Column("serving", tuple(_serving(every) for every in groups.values()), gives=True, least=24),
    ]


def _alike(plan: Data, counts: Mapping[str, int]) -> dict[Key, list[list[Served]]]:
    """What each of the packages serves, those together that are of one part and serve the same channels.

    Where a copy of a channel comes up again, it is the buffer of a divider of its own.
    """
    seen: set[Served] = set()
    groups: dict[Key, list[list[Served]]] = {}
    for package in plan["packages"]:
        served = []
        for place in package["places"]:
            one = _served(place, counts)
            served.append((f"buffer of {one[0]}", one[1]) if one in seen else one)
            seen.add(one)
        names = tuple(sorted(name for name, _ in served))
        key = (package["opamp"], package["maker"], package["amplifiers"], names)
        groups.setdefault(key, []).append(served)
    return groups


def _served(place: Data, counts: Mapping[str, int]) -> Served:
    """The channel by name with the copy; 0 where there is but one, or for the buffer of a shared level."""
    if place["channel"] is None:
        return f"buffer of {clean(place['level'])}", 0
    return clean(place["channel"]), place["copy"] if counts[place["channel"]] > 1 else 0


def _serving(packages: Sequence[Sequence[Served]]) -> str:
    """'turbidity 1-4, buffer of level 1', in the order of the places."""
    copies: dict[str, list[int]] = {}
    for served in packages:
        for name, copy in served:
            copies.setdefault(name, []).append(copy)
    said = (name if not any(every) else f"{name} {numbered(every)}" for name, every in copies.items())
    return ", ".join(said) or "nothing"


def spare_words(plan: Data) -> str:
    """How many amplifiers there are, and how many of them serve nothing."""
    packages = plan["packages"]
    every, spare = (sum(one[key] for one in packages) for key in ("amplifiers", "spare"))
    said = "none of them spare" if not spare else f"{count(spare)} of them spare"
    return f"{several(len(packages), 'package')} with {several(every, 'amplifier')}, {said}."


def level_columns(plan: Data) -> list[Column]:
    """One row for each shared level: its divider and buffer, and who shares it; none without levels."""
    levels = plan["levels"]
    return [
        Column("level", tuple(clean(one["name"]) for one in levels), gives=True),
        Column("voltage", tuple(show(one["voltage"], "voltage") for one in levels), right=True),
        Column("from V+", tuple(show(one["top"], "resistance") for one in levels), right=True),
        Column("to V-", tuple(show(one["bottom"], "resistance") for one in levels), right=True),
        Column("bypass", tuple(show(one["bypass"], "capacitance") for one in levels), right=True),
        Column("buffer", tuple(clean(one["opamp"]) for one in levels), gives=True),
        Column("shared by", tuple(", ".join(map(clean, one["channels"])) for one in levels), gives=True),
    ]
