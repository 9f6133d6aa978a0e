"""Why pairs dropped out, in words: the keys of the eligibility table, with counts."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.report.layout import Column, fit, lines
from optimizer.report.paragraphs import UNBROKEN, styled
from optimizer.report.words import count, several

ASSUMABLE = (
    "Blanks may be filled by [assume] lines in the request; luxsift inspect says what each would admit."
)
UNUSABLE = "Families that took no part, for the catalog leaves blank what the request needs"
MISSING = "missing"
WORDS: Mapping[str, str] = {
    "status": "status not among those the request takes",
    "excluded": "excluded by name, maker, package or active area",
    "stock": "less in stock than the build needs",
    "temperature": "temperature range does not cover the ambient",
    "wavelength": "wavelength outside the diode's responsivity points",
    "supply": "supply outside the op-amp's range at a tolerance end",
    "reverse_bias": "reverse bias above the diode's maximum",
    "input_range": "Vref outside the op-amp's input range",
    "window": "the output limits leave no room for a signal",
    "dark_output": "output without light too close to a limit, or beyond",
    "load": "the op-amp cannot drive load and feedback current",
    "gain": "open-loop gain too low for the diode's shunt",
    "min_gain": "below the noise gain at which the op-amp is stable",
    "unstable": "no positive phase margin",
    "opamp_sources": "op-amps of too few makers in its package and pinout",
    "missed_target": "a target is missed at every setting",
    "cannot_beat": "proved unable to beat the last row shown",
}


def reason_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """A heading and one line a reason, most pairs first; empty where nothing dropped out."""
    dropped = {key: pairs for key, pairs in record["search"]["dropped"].items() if pairs}
    if not dropped:
        return []
    rows = reason_rows(dropped)
    columns = (
        Column("pairs", tuple(count(pairs) for _key, pairs, _why in rows), right=True),
        Column("key", tuple(clean(key) for key, _pairs, _why in rows)),
        Column("why", tuple(why for _key, _pairs, why in rows), gives=True),
    )
    widths = fit(columns, width - 2, least=24)
    out = [Text(f"Why {_which(record, sum(dropped.values()))} dropped out", "bold")]
    for row in range(len(rows)):
        out += [Text("  " + line) for line in lines(columns, widths, row)]
    if any(key == MISSING for key, _pairs, _why in rows):
        out += styled(ASSUMABLE, width)
    return out


def unusable_lines(record: Mapping[str, Any], width: int) -> list[Text]:
    """The families of resistors and capacitors that took no part for a blank; empty without any."""
    families = record["search"].get("unusable", ())
    if not families:
        return []
    said = (f"{clean(one['family'])} ({_blank_words(one)})" for one in families)
    return styled(f"{UNUSABLE}: {', '.join(said)}.", width)


def _blank_words(family: Mapping[str, Any]) -> str:
    columns = " and ".join(clean(name) for name in family["blank"])
    return f"{clean(family['role'])}: {columns}"


def _which(record: Mapping[str, Any], dropped: int) -> str:
    if record["candidates"]:
        return several(dropped, "other pair")
    every = dropped > 1 and dropped == record["search"]["pairs"]
    return f"all {several(dropped, 'pair')}" if every else several(dropped, "pair")


def reason_rows(dropped: Mapping[str, int]) -> list[tuple[str, int, str]]:
    """One row a key with its pairs and words, most pairs first; the blanks of all columns share one row
    that counts each.
    """
    blanks = {key.partition(":")[2]: n for key, n in dropped.items() if _is_blank(key)}
    unknown = "dropped for a reason that this version does not know"
    rows = [(key, n, WORDS.get(key, unknown)) for key, n in dropped.items() if not _is_blank(key)]
    if blanks:
        counted = sorted(blanks.items(), key=lambda item: (-item[1], item[0]))
        columns = ", ".join(f"{clean(column)}{UNBROKEN}{count(n)}" for column, n in counted)
        rows.append(
            (MISSING, sum(blanks.values()), f"a value that a target or check needs is blank: {columns}")
        )
    return sorted(rows, key=lambda row: (-row[1], row[0]))


def _is_blank(key: str) -> bool:
    return key.partition(":")[0] == MISSING
