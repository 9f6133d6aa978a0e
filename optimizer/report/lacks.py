"""Why a kind of change has no substitute, in words: what fails first, and what would admit one."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.quantities import show
from optimizer.report.changes import NAMES, short
from optimizer.report.misses import missed_words, worst_first
from optimizer.report.paragraphs import styled
from optimizer.report.reasons import WORDS
from optimizer.report.words import percent
from optimizer.review.replacement import Lack, Replacement
from optimizer.search.change.substitutes import CORNER

Row = Mapping[str, Any]
INDENT = 4
BLANK = "a value that a target or check needs is blank"


def lack_lines(lack: Lack, near: Row | None, answer: Replacement, width: int) -> list[Text]:
    """Why there is no such substitute; `near` is the nearest one as the record has it, if there is one."""
    texts = list(_nearest(near, answer) if near is not None else [_none(lack, answer)])
    return [Text("    ") + line for text in texts for line in styled(text, width - INDENT)]


def _nearest(near: Row, answer: Replacement) -> list[str]:
    """The nearest miss: what it changes, what it misses, what would let it through."""
    change = short(answer.board_row, near, near["changed"])
    request = answer.reopened.record.data["request"]
    missed = worst_first(near)
    if not missed:
        return [f"None: op-amps of too few makers can serve it. The nearest: {change}"]
    said = "; ".join(missed_words(target, request) for target in missed)
    by = ", ".join(f"{target['name']} by {percent(-target['margin'])}" for target in missed)
    last = f"Fails first: {near['limiting']}. The smallest relaxation that admits one, in margin: {by}"
    return [f"None meets. The nearest: {change}", said, last]


def _none(lack: Lack, answer: Replacement) -> str:
    if lack.stopped == CORNER:
        return "None is eligible at every corner of the spreads, though some are at nominal values"
    if lack.stopped:
        key, _, column = lack.stopped.partition(":")
        why = f"{BLANK}, {clean(column)}" if column else WORDS[key]
        return f"None is eligible: the one that gets furthest fails at {key} ({why})"
    said = [_lacking(position, lack.change, answer) for position in lack.lacking]
    return f"There is none: {'; '.join(said) or 'nothing can change in this way'}"


def _lacking(position: str, change: str, answer: Replacement) -> str:
    """Why nothing is to be had for one position."""
    plan, old = answer.withdrawal.plan, answer.old
    part = plan.board.parts.get(position)
    bound = change in ("drop-in", "values")
    if position in ("photodiode", "opamp"):
        if part is None or position not in plan.withdrawn or not bound:
            return f"no other {NAMES[position]} is to be had"
        if not (part.package and part.pinout):
            return f"package or pinout of {clean(part.name)} is not known, so no other counts as the same"
        return f"no other {NAMES[position]} in {clean(part.package)} {clean(part.pinout)}"
    if position in ("feedback_resistance", "feedback_capacitance") and part is not None:
        kind = "resistance" if position == "feedback_resistance" else "capacitance"
        value = show(old[position], kind) if change == "drop-in" else NAMES[position]
        where = f" in {clean(part.package)}" if part.package and bound else ""
        return f"no other family{where} offers {value}"
    if position == "reference" and "divider" in plan.withdrawn | plan.board.parts.keys():
        return "no other families with the same footprints offer the divider"
    return f"nothing is to be had for {NAMES[position]}"
