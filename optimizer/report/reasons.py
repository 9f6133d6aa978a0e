"""Why pairs dropped out, in words: the keys of the eligibility table, with counts."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rich.text import Text

from optimizer.quantities import show
from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import styled
from optimizer.report.words import clean, count
from optimizer.vocabulary import COLUMNS

ROLES = {"opamps": "op-amp", "photodiodes": "photodiode", "resistors": "resistor", "capacitors": "capacitor"}
ASSUMABLE = (
    "Blanks may be filled by [assume] lines in the request; luxsift inspect says what each would admit."
)
WORDS: Mapping[str, str] = {
    "status": "the part's status is not among those the request takes",
    "excluded": "excluded, or not of the required parts, makers, packages or active area",
    "stock": "less in stock than the build needs",
    "temperature": "the part's temperature range does not cover the ambient",
    "wavelength": "the signal wavelength lies outside the diode's responsivity points",
    "supply": "the supply leaves the op-amp's range at one end of its tolerance",
    "reverse_bias": "the diode's reverse bias would exceed its maximum",
    "input_range": "Vref lies outside the op-amp's input range",
    "window": "the output limits leave no room for a signal",
    "dark_output": "the output without light is too close to a limit, or beyond it",
    "load": "the op-amp cannot drive the load and the feedback current",
    "gain": "the open-loop gain is too low for the diode's shunt resistance",
    "min_gain": "the op-amp would work below the gain at which it is stable",
    "unstable": "no setting that gets this far has a positive phase margin",
    "missed_target": "a target is missed at every setting",
    "cannot_beat": "proved unable to beat the last row shown, so not decided",
}


def reason_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """A heading and one line a reason, most pairs first; empty where nothing dropped out."""
    dropped = sorted(record["search"]["dropped"].items(), key=lambda item: (-item[1], item[0]))
    dropped = [(key, pairs) for key, pairs in dropped if pairs]
    if not dropped:
        return []
    columns = (
        Column("pairs", tuple(count(pairs) for _key, pairs in dropped), right=True),
        Column("key", tuple(clean(key) for key, _pairs in dropped)),
        Column("why", tuple(reason(key, record["request"]) for key, _pairs in dropped), gives=True),
    )
    widths = fit(columns, width - 2, least=24)
    out = [Text(f"Why {count(sum(pairs for _key, pairs in dropped))} other pairs dropped out", "bold")]
    for row in range(len(dropped)):
        out += [Text("  " + line) for line in lines(columns, widths, row)]
    if any(key.startswith("missing:") for key, _pairs in dropped):
        out += styled(ASSUMABLE, width, indent="  ")
    return out


def reason(key: str, request: Mapping[str, Any]) -> str:
    """One key of the eligibility table in words; `missing:column` names the column."""
    head, _, column = key.partition(":")
    if head == "missing":
        whose = [ROLES[role] for role, known in COLUMNS.items() if column in known]
        catalog = f"the {whose[0]} catalog" if len(whose) == 1 else "a catalog"
        return f"{catalog} leaves {clean(column)} blank, and a target or check needs it"
    if head == "wavelength":
        return (
            f"{show(request['light']['wavelength'], 'length')} lies outside the diode's responsivity points"
        )
    return WORDS.get(head, "dropped for a reason this version does not know")
