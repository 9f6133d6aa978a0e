"""What a board needs to know of the parts of a setting: packages, pinouts, and where passives come from."""

from __future__ import annotations

from collections.abc import Iterator

from optimizer.catalog.parts import Catalogs, Parts
from optimizer.search.space import Space

Indices = tuple[int, int, int, int, int]


def outlines(space: Space, catalogs: Catalogs, chosen: Indices) -> dict[str, str | None]:
    """By the record's keys, the outlines of the op-amp, photodiode, context, resistor and capacitor `chosen`.

    None where the catalog leaves a blank, or where there is no such part.
    """
    opamp, diode, context, resistor, capacitor = chosen
    x, r, c = space.contexts, space.resistors, space.capacitors
    rows = {
        "resistor": r.rows[int(r.family[resistor])],
        "capacitor": c.rows[int(c.family[capacitor])] if c.family[capacitor] >= 0 else -1,
        "divider": int(x.resistors[context]),
        "bypass": int(x.bypass[context]),
    }
    said = dict(_active("photodiode", catalogs.photodiodes, diode))
    said |= _active("opamp", catalogs.opamps, opamp)
    for name, row in rows.items():
        parts = catalogs.resistors if name in ("resistor", "divider") else catalogs.capacitors
        said |= _passive(name, parts, row)
    return said


def _active(name: str, parts: Parts, row: int) -> Iterator[tuple[str, str | None]]:
    for column in ("package", "pinout"):
        yield f"{name}_{column}", cell(parts, column, row)


def _passive(name: str, parts: Parts, row: int) -> Iterator[tuple[str, str | None]]:
    """Maker and package of a family; its name too, where the candidate does not name it elsewhere."""
    columns = ("maker", "package") if name in ("resistor", "capacitor") else ("family", "maker", "package")
    for column in columns:
        yield f"{name}_{column}", cell(parts, column, row)


def cell(parts: Parts, column: str, row: int) -> str | None:
    """A text of a catalog row; None where it is blank, or where `row` is none (-1)."""
    if row < 0 or column not in parts.text:
        return None
    return str(parts.text[column][row]) or None
