"""What one setting changes on a board, by name, written once more from the words of the kinds of change."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from optimizer.catalog.parts import Parts
from optimizer.request.types import WIRINGS
from optimizer.search.space import Choice, Space
from optimizer.search.values import family_values
from tests.search.boards import FAMILIES, Case, uses_of

Bought = tuple[Any, Any, float]  # resistor family, bypass family, cost
Setting = dict[str, Any]


def old_of(one: Case) -> Setting:
    """The candidate by what is compared; outlines from the catalogs, or else from the record."""
    c, reference = one.candidate, one.candidate["reference"]
    old: Setting = {
        "photodiode": (c["photodiode"], c["photodiode_maker"]),
        "opamp": (c["opamp"], c["opamp_maker"]),
        "wiring": c["wiring"],
        "level": (reference["kind"], reference["top"], reference["bottom"]),
        "buffered": reference["buffered"],
        "extra": reference["extra_package"],
        "rf": c["feedback_resistance"],
        "cf": c["feedback_capacitance"],
        "low_pass": c["low_pass"],
        "resistor": _named_family(one.catalogs.resistors, c, "resistor"),
        "capacitor": _named_family(one.catalogs.capacitors, c, "capacitor"),
        "divider": _named_family(one.catalogs.resistors, c, "divider"),
        "bypass": _named_family(one.catalogs.capacitors, c, "bypass"),
    }
    if reference["kind"] == "divider" and old["divider"] is None:
        pair = {reference["top"], reference["bottom"]}
        before = replace(one, gone=frozenset())
        old["divider"] = cheapest(before, "resistors", pair, lambda _: True)
        old["bypass"] = cheapest(before, "capacitors", {one.request.space.divider.bypass}, lambda _: True)
    return old


def _named_family(parts: Parts, candidate: Setting, name: str) -> Any:
    """(name, maker) of a family of the candidate; the maker from the catalog where the record has none."""
    family = candidate.get(f"{name}_family")
    if family is None:
        return None
    maker = candidate.get(f"{name}_maker")
    if maker is None:
        rows = np.flatnonzero(parts.text["family"] == family)
        maker = str(parts.text["maker"][rows[0]]) if rows.size else ""
    return family, maker


def package(one: Case, role: str, name: Any) -> tuple[str, str]:
    """Package and pinout of a part, '' where unknown."""
    parts: Parts = getattr(one.catalogs, role)
    column = "family" if role in FAMILIES else "part"
    for row in range(parts.size):
        if (parts.text[column][row], parts.text["maker"][row]) == name:
            pinout = "" if role in FAMILIES else str(parts.text["pinout"][row])
            return str(parts.text["package"][row]), pinout
    for use, catalog, full in uses_of(one.candidate):
        if catalog == role and full == f"{name[1]}/{name[0]}":
            key = {"feedback_resistance": "resistor", "feedback_capacitance": "capacitor"}.get(use, use)
            pinout = one.candidate.get(f"{key}_pinout") or ""
            return one.candidate.get(f"{key}_package") or "", pinout
    return "", ""


def alike(one: Case, role: str, old: Any, new: Any) -> bool:
    """Whether `new` goes where `old` was; nothing does where it is not known what was there."""
    if old is None:
        return False
    if role in FAMILIES and old == new:
        return True
    (old_package, old_pinout), (new_package, new_pinout) = package(one, role, old), package(one, role, new)
    if role in FAMILIES:
        return bool(old_package) and old_package == new_package
    return bool(old_package and old_pinout) and (old_package, old_pinout) == (new_package, new_pinout)


def lost(one: Case, role: str, name: Any) -> bool:
    return name is not None and (role, f"{name[1]}/{name[0]}") in one.gone


def positions(one: Case, old: Setting, new: Setting) -> set[str]:
    """Which positions differ; a divider that must be bought anew is a change of the reference."""
    found = {
        name
        for name in ("photodiode", "opamp", "wiring", "low_pass")
        if not _equal(name, old[name], new[name])
    }
    moved = (old["level"], old["buffered"]) != (new["level"], new["buffered"])
    if moved or lost(one, "resistors", old["divider"]) or lost(one, "capacitors", old["bypass"]):
        found.add("reference")
    if (old["rf"], old["resistor"]) != (new["rf"], new["resistor"]):
        found.add("feedback_resistance")
    if (old["cf"], old["capacitor"]) != (new["cf"], new["capacitor"]):
        found.add("feedback_capacitance")
    return found


def _equal(name: str, old: Any, new: Any) -> bool:
    return (
        bool(old == new)
        if name != "low_pass" or None in (old, new)
        else bool(np.isclose(old, new, rtol=1e-8))
    )


def change_of(one: Case, old: Setting, new: Setting) -> str:
    """What the new setting amounts to, by the table's words."""
    gone = {
        role
        for role, name in (("photodiode", "photodiodes"), ("opamp", "opamps"))
        if lost(one, name, old[role])
    }
    changed = positions(one, old, new)
    other = ({"photodiode", "opamp"} - gone) & changed
    kind = old["level"][0] != new["level"][0]
    frame = kind or old["buffered"] != new["buffered"] or old["extra"] != new["extra"]
    if other or frame or changed & {"wiring", "low_pass"}:
        return "redesign"
    if not _same_footprints(one, old, new, gone):
        return "footprint"
    values = [old[name] != new[name] for name in ("rf", "cf", "level")]
    values.append(old["resistor"] != new["resistor"] and not lost(one, "resistors", old["resistor"]))
    values.append(old["capacitor"] != new["capacitor"] and not lost(one, "capacitors", old["capacitor"]))
    return "values" if any(values) else "drop-in"


def _same_footprints(one: Case, old: Setting, new: Setting, gone: set[str]) -> bool:
    if not all(alike(one, f"{role}s", old[role], new[role]) for role in gone):
        return False
    if not alike(one, "resistors", old["resistor"], new["resistor"]):
        return False
    placed = new["capacitor"] is not None
    if placed and (
        old["capacitor"] is None or not alike(one, "capacitors", old["capacitor"], new["capacitor"])
    ):
        return False
    if new["level"][0] == "ground":
        return True
    anew = old["level"] != new["level"] or lost(one, "resistors", old["divider"])
    if anew and not alike(one, "resistors", old["divider"], new["divider"]):
        return False
    by = old["bypass"]
    return not lost(one, "capacitors", by) or alike(one, "capacitors", by, new["bypass"])


def frozen(one: Case, old: Setting, new: Setting) -> bool:
    """Whether the setting changes what is to be kept; a reference is kept by its level and buffering."""
    changed = positions(one, old, new)
    if (old["level"], old["buffered"]) == (new["level"], new["buffered"]):
        changed -= {"reference"}
    return bool(changed & one.keep)


def new_of(one: Case, space: Space, choice: Choice, i: int, bought: Bought) -> Setting:
    o, d, x, r, c, low = (int(column[i]) for column in choice.columns())
    contexts, cats = space.contexts, one.catalogs
    divided = bool(contexts.divided[x])
    level = (
        ("divider", float(contexts.top[x]), float(contexts.bottom[x])) if divided else ("ground", None, None)
    )
    buffered = bool(contexts.buffered[x])
    lag = float(space.low_passes[low])

    def family(parts: Parts, row: int) -> tuple[str, str]:
        return str(parts.text["family"][row]), str(parts.text["maker"][row])

    placed = int(space.capacitors.family[c])
    return {
        "photodiode": (str(cats.photodiodes.text["part"][d]), str(cats.photodiodes.text["maker"][d])),
        "opamp": (str(cats.opamps.text["part"][o]), str(cats.opamps.text["maker"][o])),
        "wiring": WIRINGS[int(contexts.wiring[x])],
        "level": level,
        "buffered": buffered,
        "extra": buffered and cats.opamps.number["channels"][o] < 2.0,
        "rf": float(space.resistors.value[r]),
        "cf": float(space.capacitors.value[c]),
        "low_pass": None if lag == 0.0 else 1.0 / (2.0 * np.pi * lag),
        "resistor": family(cats.resistors, space.resistors.rows[int(space.resistors.family[r])]),
        "capacitor": None if placed < 0 else family(cats.capacitors, space.capacitors.rows[placed]),
        "divider": bought[0],
        "bypass": bought[1],
    }


def cheapest(one: Case, role: str, wanted: set[float], fits: Any) -> Any:
    """The cheapest family that offers all of `wanted` and `fits`, by price, name and maker; or None."""
    parts: Parts = getattr(one.catalogs, role)
    offers = [
        (price(one, parts, row), name)
        for row, name in enumerate(
            zip(parts.text["family"].tolist(), parts.text["maker"].tolist(), strict=True)
        )
        if wanted <= set(family_values(parts, row).tolist()) and not lost(one, role, name) and fits(name)
    ]
    return min(offers)[1] if offers else None


def price(one: Case, parts: Parts, row: int) -> float:
    reached = [price for first, price in parts.points["price"][row] if first <= one.request.quantity]
    return float(reached[-1])
