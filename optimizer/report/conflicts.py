"""Why nothing meets: sets of targets that cannot hold together, and what easing one of them would take."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from rich.text import Text

from optimizer.errors import clean
from optimizer.report.layout import Column
from optimizer.report.paragraphs import styled
from optimizer.report.stepped import BOLD, as_row, stacked
from optimizer.report.words import beside, figure, side
from optimizer.search.weigh.conflicts import Conflicts, Relaxation

BAD = "bold red"


def cannot_lines(reasons: Sequence[str], width: int) -> list[Text]:
    """What no part could meet, with the reasons; empty where there is no such thing."""
    if not reasons:
        return []
    out = styled("No part could meet this request:", width, BAD)
    return out + [line for reason in reasons for line in styled(f"- {clean(reason)}", width, indent="  ")]


def conflict_lines(found: Conflicts | None, data: Mapping[str, Any], width: int) -> list[Text]:
    """The conflicting sets, then the least relaxations; empty where something meets."""
    if found is None:
        return []
    if not found.eligible:
        text = "No pair is eligible, whatever the targets: see luxsift shortlist for the reasons."
        return styled(text, width)
    return [*_sets(found, width), Text(""), *_relaxations(found.relaxations, data, width)]


def _sets(found: Conflicts, width: int) -> list[Text]:
    out = styled("Targets that cannot hold together, the smallest sets first", width, BOLD)
    for names in found.sets:
        out += styled(f"- {listed(names)}", width, indent="  ")
    if not found.complete:
        text = f"There are more; these {len(found.sets)} were looked for, and none of the others is smaller."
        out += styled(text, width)
    return out


def listed(names: Sequence[str]) -> str:
    """Names in running text: 'bandwidth, snr and cost'."""
    *most, last = names
    return f"{', '.join(most)} and {last}" if most else last


def _relaxations(every: Sequence[Relaxation], data: Mapping[str, Any], width: int) -> list[Text]:
    """One line for each target that helps, then the others by name."""
    helpful = [one for one in every if one.candidate is not None]
    helpless = [one.target for one in every if one.candidate is None]
    out = []
    if helpful:
        title = "The smallest relaxation of one target alone that lets something through"
        out = styled(title, width, BOLD) + stacked(list(_columns(helpful, data["request"])), width)
    if helpless:
        which = "No single target helps, not even dropped"
        text = (
            f"Not even dropping one of these alone helps: {', '.join(helpless)}." if helpful else which + "."
        )
        out += styled(text, width)
    return out


def _columns(eased: Sequence[Relaxation], request: Mapping[str, Any]) -> Iterator[Column]:
    said = [beside(one.target, one.value, one.limit, request) for one in eased]
    best = [{} if one.candidate is None else as_row(one.candidate) for one in eased]
    yield Column("target", tuple(one.target for one in eased))
    limits = (f"{side(o.target)} {limit}" for o, (_, limit) in zip(eased, said, strict=True))
    yield Column("stated limit", tuple(limits))
    yield Column("best to be had", tuple(value for value, _ in said), right=True)
    yield Column("relaxed by", tuple(relaxed(one) for one in eased), right=True)
    yield Column("cost", tuple(figure("cost", row["figures"]["cost"], request) for row in best), right=True)
    parts = (f"{clean(row['photodiode'])} with {clean(row['opamp'])}" for row in best)
    yield Column("receiver", tuple(parts), gives=True)


def relaxed(one: Relaxation) -> str:
    """How far a target must be eased, in margin: '52 %'; what is not all of it is not rounded to it."""
    if one.margin is None:
        return "-"
    return "over 99.9 %" if -1.0 < one.margin < -0.999 else f"{-one.margin * 100:.3g} %"
