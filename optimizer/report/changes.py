"""What one candidate changes against another, position by position, as 'old -> new'."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.cells import named
from optimizer.report.words import count, figure

Row = Mapping[str, Any]

ARROW = " -> "
NAMES = {
    "photodiode": "photodiode",
    "opamp": "op-amp",
    "wiring": "wiring",
    "reference": "reference",
    "feedback_resistance": "Rf",
    "feedback_capacitance": "Cf",
    "low_pass": "low-pass",
}
"""Each position as the tables call it."""
FAMILIES = {"feedback_resistance": "resistor", "feedback_capacitance": "capacitor"}
"""Whose family stands beside a value, by the record's name of it."""


def changes(old: Row, new: Row, positions: Sequence[str]) -> Iterator[tuple[str, str]]:
    """Each of `positions` with what stood and what stands there."""
    for position in positions:
        yield NAMES[position], ARROW.join(_sides(position, old, new))
    packages = [2 if row["reference"]["extra_package"] else 1 for row in (old, new)]
    if packages[0] != packages[1]:
        yield "op-amp packages", f"{packages[0]}{ARROW}{packages[1]}"


def short(old: Row, new: Row, positions: Sequence[str]) -> str:
    """The same on one line, without makers and packages: 'op-amp YZA-1 -> YZA-2, Rf 9.1 Mohm -> 10 Mohm'."""
    return ", ".join(f"{NAMES[p]} {_brief(p, old)}{ARROW}{_brief(p, new)}" for p in positions)


def cost_words(old: Row, new: Row, request: Mapping[str, Any]) -> str:
    """The cost of both, and how much more or less that is a receiver and for the whole build."""
    before, after = (row["figures"].get("cost") for row in (old, new))
    said = ARROW.join(figure("cost", value, request) for value in (before, after))
    if before is None or after is None:
        return said
    quantity = request["quantity"]
    change = after - before
    if abs(change) < 1e-9 * abs(before):
        return f"{said}, the same"
    word = "more" if change > 0 else "less"
    each, all_ = (show(abs(change) * pieces, "price", 2) for pieces in (1, quantity))
    return f"{said}, {each} {word} a receiver, {all_} {word} for {count(quantity)} built"


def _sides(position: str, old: Row, new: Row) -> tuple[str, str]:
    if position in ("photodiode", "opamp"):
        outlines = [_outline(row, position) for row in (old, new)]
        moved = outlines[0] != outlines[1] or "unknown" in outlines[0]
        before, after = (
            named(row, position) + (f", {outline}" if moved else "")
            for row, outline in zip((old, new), outlines, strict=True)
        )
        return before, after
    if position == "reference":
        return _references(old, new)
    if position in FAMILIES:
        return _passive(position, FAMILIES[position], old, new)
    return _brief(position, old), _brief(position, new)


def _outline(row: Row, role: str) -> str:
    package, pinout = (row.get(f"{role}_{what}") for what in ("package", "pinout"))
    return f"{clean(package or 'unknown package')} {clean(pinout or 'unknown pinout')}"


def _brief(position: str, row: Row) -> str:
    if position in ("photodiode", "opamp", "wiring"):
        return clean(row[position])
    if position == "reference":
        kind, voltage = row["reference"]["kind"], row["reference"]["voltage"]
        return "ground" if kind == "ground" else show(voltage, "voltage")
    if position == "low_pass":
        return "none" if row["low_pass"] is None else show(row["low_pass"], "frequency")
    kind = "resistance" if position == "feedback_resistance" else "capacitance"
    return show(row[position], kind) if row[position] else "none"


def _passive(position: str, name: str, old: Row, new: Row) -> tuple[str, str]:
    """Both values, with families and packages where they differ."""
    families = [_family(row, name) if row[position] else "" for row in (old, new)]
    if families[0] == families[1]:
        return _brief(position, old), f"{_brief(position, new)} ({clean(new[f'{name}_family'])})"
    before, after = (
        _brief(position, row) + (f" ({family})" if family else "")
        for row, family in zip((old, new), families, strict=True)
    )
    return before, after


def _family(row: Row, name: str) -> str:
    family, package = row.get(f"{name}_family"), row.get(f"{name}_package")
    return ", ".join(clean(text) for text in (family, package) if text)


def _references(old: Row, new: Row) -> tuple[str, str]:
    """Both references, with the families of a divider that differ."""
    differing = [name for name in ("divider", "bypass") if _family(old, name) != _family(new, name)]
    before, after = (_reference(row) + _in_brackets(row, differing) for row in (old, new))
    return before, after


def _in_brackets(row: Row, names: Sequence[str]) -> str:
    families = [text for text in (_family(row, name) for name in names) if text]
    return f" ({'; '.join(families)})" if families else ""


def _reference(row: Row) -> str:
    reference = row["reference"]
    if reference["kind"] == "ground":
        return "ground"
    top, bottom = (show(reference[end], "resistance") for end in ("top", "bottom"))
    said = f"{_brief('reference', row)}, {top} over {bottom}"
    return f"{said}, buffered" if reference["buffered"] else said
