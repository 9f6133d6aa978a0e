"""The chosen row in full: what to build, and every graded target beside its limit."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.cells import named
from optimizer.report.corner import at_corner, graded_value, has_corner
from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import paragraph
from optimizer.report.pinned import pinned
from optimizer.report.words import beside, figure, margin_words, side, told_apart
from optimizer.report.yields import yield_words

LISTED = 4
"""Second sources that are named; the record has all."""


def chosen_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """The chosen candidate as a short parts list and its targets; empty where none is chosen."""
    rows = [row for row in record["candidates"] if row["rank"] == record["chosen"]]
    if not rows:
        return []
    row, request = rows[0], record["request"]
    out = [Text(f"Row {row['rank']}, chosen", "bold")]
    for label, text in parts_list(row, request):
        folded = paragraph(text, width - 13)
        out += [Text(f"  {label if i == 0 else '':<10} {line}") for i, line in enumerate(folded)]
    return out + _targets(row, request, width) + _yield(row, request, width)


def parts_list(row: Mapping[str, Any], request: Mapping[str, Any]) -> list[tuple[str, str]]:
    """What to build, as labels with words; a label is empty where the words go on."""
    bias = figure("reverse_bias", row["figures"]["reverse_bias"], request)
    rows = [
        ("photodiode", f"{named(row, 'photodiode')}, {row['wiring']}, reverse bias {bias}"),
        ("op-amp", named(row, "opamp")),
        ("", second_sources(row)),
        ("feedback", _feedback(row)),
        ("", pinned(row, request)),
        ("reference", _reference(row, request)),
    ]
    if row["low_pass"] is not None:
        rows.append(("low-pass", f"{show(row['low_pass'], 'frequency')} after the receiver (not priced)"))
    return rows


def second_sources(row: Mapping[str, Any]) -> str:
    """The op-amps of other makers that meet everything in the same place; '' where none was looked for."""
    others = row.get("alternates", ())
    if not others:
        return ""
    names = ", ".join(named(other, "opamp") for other in others[:LISTED])
    more = f" and {len(others) - LISTED} more" if len(others) > LISTED else ""
    return f"or, in the same package and pinout, {names}{more}"


def _feedback(row: Mapping[str, Any]) -> str:
    resistor = f"{show(row['feedback_resistance'], 'resistance')} ({clean(row['resistor_family'])})"
    if not row["feedback_capacitance"]:
        return f"{resistor}, no capacitor placed"
    placed = show(row["feedback_capacitance"], "capacitance")
    return f"{resistor} with {placed} ({clean(row['capacitor_family'])})"


def _reference(row: Mapping[str, Any], request: Mapping[str, Any]) -> str:
    reference = row["reference"]
    if reference["kind"] == "ground":
        return "ground"
    top, bottom = (show(reference[end], "resistance") for end in ("top", "bottom"))
    level = show(reference["voltage"], "voltage")
    text = f"{level} by a divider of {top} from V+ and {bottom} to V-"
    bypass = request["space"].get("divider", {}).get("bypass")
    if bypass is not None:
        text += f", bypassed by {show(bypass, 'capacitance')}"
    if reference["buffered"]:
        text += ", buffered by a second amplifier"
        text += " in a second package" if reference["extra_package"] else " of the same package"
    return text


def _targets(row: Mapping[str, Any], request: Mapping[str, Any], width: int) -> list[Text]:
    if any(has_corner(target) for target in row["targets"]):
        return _at_corners(row, request, width)
    comfort = request["ranking"]["comfort"]
    pairs = [beside(t["name"], t["value"], t["limit"], request) for t in row["targets"]]
    names = [t["name"] for t in row["targets"]]
    limits = [f"{side(name)} {limit}" for name, (_value, limit) in zip(names, pairs, strict=True)]
    columns = (
        Column("target", tuple(names)),
        Column("value", tuple(value for value, _limit in pairs), right=True),
        Column("limit", tuple(limits)),
        Column("margin", tuple(_margin(t, row["limiting"], comfort) for t in row["targets"]), gives=True),
    )
    widths = fit(columns, width - 2)
    out = [Text("  " + line, "bold") for line in lines(columns, widths, -1)]
    for index in range(len(names)):
        out += [Text("  " + line) for line in lines(columns, widths, index)]
    return out


def _margin(target: Mapping[str, Any], limiting: str, comfort: float) -> str:
    words = margin_words(target["margin"])
    return ", ".join((words, *_remarks(target, limiting, comfort)))


def _remarks(target: Mapping[str, Any], limiting: str, comfort: float) -> list[str]:
    limits = ["limiting"] if target["name"] == limiting else []
    return [*limits, "comfortable"] if target["margin"] >= comfort else limits


def _at_corners(row: Mapping[str, Any], request: Mapping[str, Any], width: int) -> list[Text]:
    """Every target at nominal and at its worst corner, which stands below it."""
    comfort, targets = request["ranking"]["comfort"], row["targets"]
    said = [told_apart(t["name"], (t["value"], graded_value(t)), t["limit"], request) for t in targets]
    columns = (
        Column("target", tuple(t["name"] for t in targets)),
        Column("nominal", tuple(nominal for (nominal, _worst), _limit in said), right=True),
        Column("worst", tuple(worst for (_nominal, worst), _limit in said), right=True),
        Column("limit", tuple(f"{side(t['name'])} {s[1]}" for t, s in zip(targets, said, strict=True))),
        Column("margin", tuple(margin_words(t["margin"]) for t in targets), gives=True),
    )
    widths = fit(columns, width - 2)
    out = [Text("  " + line, "bold") for line in lines(columns, widths, -1)]
    for index, target in enumerate(targets):
        corner = f"worst {at_corner(target)}" if at_corner(target) else "no corner is worse"
        below = ", ".join((*_remarks(target, row["limiting"], comfort), corner))
        out += [Text("  " + line) for line in lines(columns, widths, index)]
        out += [Text("    " + line) for line in paragraph(below, width - 4)]
    return out


def _yield(row: Mapping[str, Any], request: Mapping[str, Any], width: int) -> list[Text]:
    """The yield as one labelled paragraph; nothing where nothing was drawn."""
    folded = paragraph("; ".join(yield_words(row, request)), width - 13)
    return [Text(f"  {'yield' if i == 0 else '':<10} {line}") for i, line in enumerate(folded)]
